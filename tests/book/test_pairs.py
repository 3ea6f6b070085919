"""Pairs stand in both coils' logs, at once or not at all."""

from __future__ import annotations

import sqlite3
from contextlib import closing
from dataclasses import replace
from pathlib import Path

import pytest

from tests.book.samples import ENDED, coil_id, wind
from windctl.book import pairs as pairs_in_book
from windctl.book.book import Book
from windctl.book.export import restored
from windctl.book.logs import COIL
from windctl.errors import BookError
from windctl.record.addenda import Addendum, MagnetTold, PairMade, PairParted, encode, genesis, magnet, paired
from windctl.record.chain import link

WHO = "Demo Winder"
FIRST, SECOND, THIRD, FOURTH = (f"b1-2026-000{n}" for n in range(1, 5))


def said(partner: int) -> PairMade:
    return PairMade(
        ENDED, WHO, coil_id(partner), f"b1-2026-{partner:04d}", "start to start", -51.0, -80.0, -45.0
    )


def pair(one: int, other: int) -> list[tuple[str, PairMade]]:
    return [(f"b1-2026-{one:04d}", said(other)), (f"b1-2026-{other:04d}", said(one))]


@pytest.fixture
def four(book: Book) -> Book:
    for n in range(1, 5):
        wind(book, n, turns=1)
    return book


def partner(book: Book, coil: str) -> str | None:
    now = paired(book.addenda(coil))
    return None if now is None else now.partner_number


def test_both_coils_know_of_each_other(four: Book) -> None:
    four.make_pairs([pair(1, 3), pair(2, 4)])
    assert [partner(four, each) for each in (FIRST, SECOND, THIRD, FOURTH)] == [THIRD, FOURTH, FIRST, SECOND]
    assert not four.verify().broken


def test_a_coil_that_has_a_partner_finds_no_other_and_nothing_else_is_kept(four: Book) -> None:
    four.make_pairs([pair(1, 3)])
    with pytest.raises(BookError, match=r"b1-2026-0003 goes with b1-2026-0001 already.*unpair"):
        four.make_pairs([pair(2, 4), pair(3, 3)[:1]])
    assert partner(four, SECOND) is partner(four, FOURTH) is None
    with pytest.raises(BookError, match="one other"):
        four.make_pairs([pair(2, 4), pair(4, 2)])


def test_a_failure_in_between_leaves_neither_log_longer(four: Book, monkeypatch: pytest.MonkeyPatch) -> None:
    """The second coil's fact cannot be kept: the first one's is not, either."""
    broken = PairMade(ENDED, WHO, coil_id(1), FIRST, "", float("nan"), 0.0, 0.0)
    with pytest.raises(BookError, match="cannot be kept"):
        four.make_pairs([[(FIRST, said(3)), (THIRD, broken)]])
    assert partner(four, FIRST) is None
    assert not four.verify().broken


def test_somebody_who_was_quicker_is_seen_within_the_transaction(
    four: Book, path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Another process pairs the coil after this one has looked, and before it writes."""
    amend = pairs_in_book.amend

    def slow(store: object, facts: object, agreed: object) -> None:
        monkeypatch.setattr(pairs_in_book, "amend", amend)
        four.make_pairs([pair(1, 4)])
        amend(store, facts, agreed)  # type: ignore[arg-type]  # handed on as they are

    monkeypatch.setattr(pairs_in_book, "amend", slow)
    with pytest.raises(BookError, match="b1-2026-0001 goes with b1-2026-0004 already"):
        four.make_pairs([pair(1, 3)])
    assert partner(four, THIRD) is None


def test_parting_is_a_fact_of_its_own_in_both_logs(four: Book) -> None:
    four.make_pairs([pair(1, 3)])
    assert four.part_pair(THIRD, ENDED, WHO, "one was sold alone") == FIRST
    for coil in (FIRST, THIRD):
        facts = four.addenda(coil)
        assert [type(fact) for fact in facts] == [PairMade, PairParted]
        assert paired(facts) is None
    four.make_pairs([pair(3, 2)])
    assert partner(four, THIRD) == SECOND
    with pytest.raises(BookError, match="goes with no other"):
        four.part_pair(FIRST, ENDED, WHO, "again")


def test_a_partner_in_another_book_is_parted_from_as_well(four: Book) -> None:
    four.amend(FIRST, PairMade(ENDED, WHO, "0" * 36, "b7-2026-0001", "", -50.0, -60.0, -40.0))
    assert four.part_pair(FIRST, ENDED, WHO, "it stayed there") == "b7-2026-0001"
    assert partner(four, FIRST) is None


def test_what_decides_about_stock_is_read_without_the_rest(four: Book) -> None:
    four.amend(FIRST, MagnetTold(ENDED, WHO, "north"), MagnetTold(ENDED, WHO, "south"))
    four.make_pairs([pair(2, 4)])
    facts = four.stock_facts()
    assert set(facts) == {coil_id(1), coil_id(2), coil_id(4)}
    told = magnet(facts[coil_id(1)])
    assert told is not None
    assert told.pole == "south"
    assert magnet(facts[coil_id(2)]) is None


def test_a_pair_is_part_of_the_export_and_its_change_shows(four: Book, path: Path) -> None:
    four.make_pairs([pair(1, 3)])
    log = restored(four.export(FIRST)).log
    assert log is not None
    assert [row.kind for row in log.rows] == ["pair_made"]
    four.close()
    with closing(sqlite3.connect(path)) as connection, connection:
        connection.execute(
            "UPDATE log_entries SET payload = replace(payload, '-51', '-61') WHERE kind = 'pair_made'"
        )
    assert {fault.coil for fault in four.verify().broken} == {FIRST, THIRD}


def rewritten(book: Book, n: int, *facts: Addendum) -> None:
    """The log of coil `n` forged, with all its links: it agrees with itself."""
    book.close()
    log = COIL + coil_id(n)
    last = genesis(log)
    with closing(sqlite3.connect(book.path)) as connection, connection:
        connection.execute("DELETE FROM log_entries WHERE log = ?", [log])
        for seq, fact in enumerate(facts):
            last = link(last, fact.kind, encode(fact))
            row = [log, seq, fact.kind, encode(fact), last]
            connection.execute("INSERT INTO log_entries VALUES (?, ?, ?, ?, ?)", row)
        connection.execute("UPDATE logs SET n = ?, digest = ? WHERE name = ?", [len(facts), last.hex(), log])


@pytest.mark.parametrize(
    ("forged", "found"),
    [
        ([said(4)], {FIRST: f"it goes with {THIRD}, and that coil goes with {FOURTH}",
                     THIRD: f"it goes with {FOURTH}, and that coil goes with {SECOND}"}),
        ([said(2)], {FIRST: f"it goes with {THIRD}, and that coil goes with {SECOND}",
                     THIRD: f"it goes with {SECOND}, and that coil goes with {FOURTH}"}),
        ([said(1), PairParted(ENDED, WHO, coil_id(1), FIRST, "sold")],
         {FIRST: f"it goes with {THIRD}, and that coil goes with no other"}),
        ([replace(said(1), joined="start to finish")],
         {FIRST: f"it goes with {THIRD}, and joined is 'start to start' here, 'start to finish' there",
          THIRD: f"it goes with {FIRST}, and joined is 'start to finish' here, 'start to start' there"}),
        ([replace(said(1), left_db=-61.0)],
         {FIRST: f"it goes with {THIRD}, and left_db is -51.0 here, -61.0 there",
          THIRD: f"it goes with {FIRST}, and left_db is -61.0 here, -51.0 there"}),
    ],
)  # fmt: skip
def test_a_half_that_says_otherwise_is_found(
    four: Book, forged: list[Addendum], found: dict[str, str]
) -> None:
    """Coil 3 goes with 1, and 2 with 4; what is said of coil 3 is forged."""
    four.make_pairs([pair(1, 3), pair(2, 4)])
    rewritten(four, 3, *forged)
    what = "what was said since it was closed: "
    others = {fault.coil: fault.what for fault in four.verify().broken if "words is" not in fault.what}
    assert others == {coil: what + text for coil, text in found.items()}
    for coil in (FIRST, THIRD):
        alone = [fault.what for fault in four.verify(coil).broken if "words is" not in fault.what]
        assert alone == ([what + found[coil]] if coil in found else [])
    assert four.verify(SECOND).good


def test_why_a_pair_was_parted_is_found_by_search(four: Book) -> None:
    four.make_pairs([pair(1, 3)])
    four.part_pair(FIRST, ENDED, WHO, "The customer wanted ONE")
    for query in ('"wanted one"', 'note:"customer wanted"'):
        assert {head.number for head in four.list(query)} == {FIRST, THIRD}
    assert four.verify().good
