"""Coils from one book to another: nothing is lost or mixed up, and the second time nothing happens."""

from __future__ import annotations

import json
import sqlite3
from collections.abc import Iterator
from contextlib import closing
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest

from tests.book.samples import ENDED, STARTED, coil_id, finished, packed, seal, started, stocked, wind, wound
from tests.plan.experience.lots import basis
from windctl.book.book import Book
from windctl.book.exchange import Hand, Taken, coil_of, coils_in
from windctl.book.imports import gaps
from windctl.book.open import open_book
from windctl.errors import BookError, RecordBroken
from windctl.plan.experience.lesson import Lesson, Resistance
from windctl.record import addenda
from windctl.record.addenda import CoilMeasured, CoilNoted, CoilTaught, CoilWithdrawn

WHO = "Demo Winder"
HAND = Hand(ENDED, WHO, False)
TEACHING = replace(HAND, teach=True)


@pytest.fixture
def other(tmp_path: Path) -> Iterator[Book]:
    """Another, empty book."""
    with open_book(tmp_path / "other.book", wait_s=5.0) as opened:
        yield opened


def lesson(n: int) -> CoilTaught:
    taught = Lesson(f"b1-2026-{n:04d}", "b1", "s1", basis(), 30.0, 0.004, (Resistance(25.5, 0.002),))
    return CoilTaught("1", taught)


def filled(book: Book) -> Book:
    """Two closed coils of one bench, one of another, an open one; much said of the first."""
    wind(book, 1, turns=2, spool="s1")
    wind(book, 2, turns=1, bench="b2", spool="s1")
    wind(book, 3, turns=1, recipe_name="Größe 3")
    book.begin_coil("b1", 2026, started(4)).close()
    stocked(book)
    book.amend(coil_id(1), lesson(1), CoilWithdrawn(ENDED, WHO, "damp spool"))
    book.amend(coil_id(3), lesson(2))
    return book


def closed(book: Book) -> bytes:
    """An export of all closed coils."""
    return b"".join(book.export_lines([head for head in book.list() if head.sealed]))


def taken(book: Book, text: bytes, hand: Hand = HAND) -> list[Taken]:
    """What an import says."""
    return [book.take_in(coil_of(line), hand) for line in text.splitlines()[1:]]


def test_exported_imported_verified_and_exported_again_they_are_the_same_bytes(
    book: Book, other: Book, tmp_path: Path
) -> None:
    text = closed(filled(book))
    path = tmp_path / "coils.jsonl"
    path.write_bytes(text)
    n, lines = coils_in(path)
    assert n == 3
    said = [other.take_in(coil_of(line), HAND) for line in lines]
    assert sorted(one.number for one in said) == ["b1-2026-0001", "b1-2026-0002", "b2-2026-0001"]
    assert {one.how for one in said} == {"new"}
    report = other.verify()
    assert (report.checked, report.broken) == (3, ())
    assert closed(other) == text
    for head in (head for head in book.list() if head.sealed):
        assert other.find(head.id) == head
        assert other.addenda(head.id) == book.addenda(head.id)
        assert other.curve(head.id) == book.curve(head.id)
        assert list(other.entries(head.id)) == list(book.entries(head.id))
        assert other.list(f'id:{head.id} "{head.recipe}" spool:"{head.spool}"') == (head,)
    assert [head.number for head in other.list('"damp SPOOL"')] == ["b1-2026-0001"]


def test_the_same_coils_again_change_nothing(book: Book, other: Book) -> None:
    text = closed(filled(book))
    taken(other, text)
    with closing(sqlite3.connect(other.path)) as connection:
        before = list(connection.iterdump())
    assert {one.how for one in taken(other, text)} == {"same"}
    assert {one.how for one in taken(book, text)} == {"same"}
    with closing(sqlite3.connect(other.path)) as connection:
        assert list(connection.iterdump()) == before


def test_every_kind_of_what_can_be_said_goes_along(book: Book, other: Book) -> None:
    """Whatever kinds there are: rows of a log are taken over as they are stored."""
    wind(book, 1, turns=1)
    facts = [
        made
        for kind in addenda.KINDS.values()
        if (made := _any(kind)) is not None and kind.__name__.startswith(("Coil", "Pair", "Magnet"))
    ]
    assert len(facts) >= 5
    book.amend(coil_id(1), *facts)
    text = closed(book)
    assert taken(other, text)[0].how == "new"
    assert other.addenda(coil_id(1)) == tuple(facts)
    assert closed(other) == text
    assert other.verify().broken == ()


def _any(kind: Any) -> addenda.Addendum | None:
    """A fact of a kind with a text wherever it wants one; None where it wants more than that."""
    if kind is CoilTaught:
        return lesson(1)
    try:
        names = [name for name in kind.__annotations__ if name != "kind"]
        fact: addenda.Addendum = kind(**dict.fromkeys(names, "x"))
        return fact if addenda.decode(kind.kind, addenda.encode(fact)) == fact else None
    except (TypeError, ValueError, AttributeError, RecordBroken):
        return None


def test_what_was_said_since_is_added_and_what_was_said_here_stays(book: Book, other: Book) -> None:
    wind(book, 1, turns=1)
    early = closed(book)
    taken(other, early)
    book.amend(
        coil_id(1), CoilNoted(ENDED, WHO, "sent out"), CoilMeasured(ENDED, WHO, grams=3.0, grams_sd=0.1)
    )
    late = closed(book)
    assert taken(other, late)[0].how == "more"
    assert other.addenda(coil_id(1)) == book.addenda(coil_id(1))
    assert other.list('"sent out"') == (other.find("1"),)
    assert taken(other, early)[0].how == "less"
    assert closed(other) == late
    assert other.verify().broken == ()


def test_different_words_about_one_coil_are_refused_by_its_name(book: Book, other: Book) -> None:
    wind(book, 1, turns=1)
    taken(other, closed(book))
    book.amend(coil_id(1), CoilNoted(ENDED, WHO, "hums"))
    other.amend(coil_id(1), CoilNoted(ENDED, WHO, "does not hum"))
    before = closed(other)
    with pytest.raises(BookError, match="coil b1-2026-0001: different things were said of it here"):
        taken(other, closed(book))
    assert closed(other) == before


def test_another_record_under_the_same_id_is_refused_by_name(book: Book, other: Book) -> None:
    wind(book, 1, turns=1)
    wind(other, 1, turns=2)
    before = closed(other)
    with pytest.raises(BookError, match=r"coil b1-2026-0001: the book has another record under the same id"):
        taken(other, closed(book))
    assert closed(other) == before


def test_a_number_that_is_another_coils_here_is_told_apart(book: Book, other: Book) -> None:
    """Two benches of one name: what the record calls the coil stays as it was, and goes out as it came."""
    wind(book, 1, turns=1)
    wind(other, 2, turns=1)
    text = closed(book)
    assert taken(other, text) == [Taken("b1b-2026-0001", "b1-2026-0001", "new")]
    assert other.verify().broken == ()
    assert other.find(coil_id(1)).number == "b1b-2026-0001"
    assert other.find("b1-2026-0001").id == coil_id(2)
    assert taken(other, text) == [Taken("b1b-2026-0001", "b1-2026-0001", "same")]
    only = [head for head in other.list() if head.id == coil_id(1)]
    assert b"".join(other.export_lines(only)) == text
    with open_book(other.path.with_name("third.book")) as third:
        wind(third, 3, turns=1)
        wind(third, 4, turns=1, bench="b1b")
        assert taken(third, text)[0].number == "b1c-2026-0001"
        assert third.verify().broken == ()
    with closing(sqlite3.connect(other.path, isolation_level=None)) as connection:
        connection.execute("UPDATE coils SET number = 'b1d-2026-0001', bench = 'b1d' WHERE bench = 'b1b'")
    assert any("it was imported as 'b1b-2026-0001'" in one.what for one in other.verify(coil_id(1)).broken)


def test_a_bench_goes_on_behind_the_numbers_that_were_imported(book: Book, other: Book) -> None:
    for n in range(1, 6):
        wind(book, n, turns=1)
    some = [head for head in book.list() if head.serial in (2, 5)]
    for line in b"".join(book.export_lines(some)).splitlines()[1:]:
        other.take_in(coil_of(line), HAND)
    assert other.verify().broken == ()
    assert wind(other, 7, turns=1).number == "b1-2026-0006"
    assert wind(other, 8, turns=1).number == "b1-2026-0007"
    assert other.verify().broken == ()
    late = [head for head in book.list() if head.serial == 3]
    for line in b"".join(book.export_lines(late)).splitlines()[1:]:
        assert other.take_in(coil_of(line), HAND).number == "b1-2026-0003"
    assert other.verify().broken == ()
    for gone, what in (("b1-2026-0006", "was allotted"), ("b1-2026-0005", "it was imported")):
        with closing(sqlite3.connect(other.path, isolation_level=None)) as connection:
            (ident,) = connection.execute("SELECT id FROM coils WHERE number = ?", [gone]).fetchone()
            for table in ("entries", "curve"):
                connection.execute(f"DELETE FROM {table} WHERE coil = ?", [ident])
            connection.execute("DELETE FROM coils WHERE id = ?", [ident])
        assert any(one.coil == gone and what in one.what for one in other.verify().broken)


@pytest.mark.parametrize(
    ("present", "missing"),
    [
        ([], [(1, 9)]),
        ([(3, 3), (1, 1)], [(2, 2), (4, 9)]),
        ([(1, 9)], []),
        ([(0, 4), (2, 3), (20, 30)], [(5, 9)]),
        ([(5, 40)], [(1, 4)]),
    ],
)
def test_gaps(present: list[tuple[int, int]], missing: list[tuple[int, int]]) -> None:
    assert gaps(present, 1, 9) == missing


def test_imported_coils_teach_only_when_told_to(book: Book, other: Book) -> None:
    text = closed(filled(book))
    assert len(book.lessons()) == 2
    taken(other, text)
    assert other.lessons() == ()
    assert [one.how for one in taken(other, text, TEACHING)] == ["taught"] * 3
    assert [one.how for one in taken(other, text, TEACHING)] == ["same"] * 3
    assert other.lessons() == book.lessons()
    assert [one.withdrawn for one in other.lessons() if one.withdrawn] == ["damp spool"]
    assert other.verify().broken == ()
    assert {one.how for one in taken(book, text, HAND)} == {"same"}
    assert len(book.lessons()) == 2


def test_an_open_coil_is_not_taken_over(book: Book, other: Book) -> None:
    book.begin_coil("b1", 2026, started(1)).close()
    open_one = json.dumps(book.export("1")).encode()
    with pytest.raises(BookError, match="coil b1-2026-0001 is still open"):
        other.take_in(coil_of(open_one), HAND)
    assert other.count() == 0


def test_a_single_coil_as_it_is_shown_can_be_imported(book: Book, other: Book, tmp_path: Path) -> None:
    filled(book)
    path = tmp_path / "one.json"
    path.write_text(json.dumps({"format": 1, **book.export("b1-2026-0001")}, indent=2), encoding="utf-8")
    n, lines = coils_in(path)
    assert (n, [other.take_in(coil_of(line), HAND).number for line in lines]) == (1, ["b1-2026-0001"])
    assert other.verify().broken == ()


def test_an_export_of_before_there_were_spools_in_it_is_read(book: Book) -> None:
    wind(book, 1, turns=1, spool="s1")
    data = dict(book.export("1"))
    del data["spool"]
    assert coil_of(json.dumps(data).encode()).head == book.find("1")


def test_an_altered_or_cut_file_is_refused(book: Book, other: Book, tmp_path: Path) -> None:
    text = closed(filled(book))
    path = tmp_path / "coils.jsonl"
    for place in range(300, len(text), len(text) // 40):
        spoilt = text[:place] + bytes([text[place] ^ 1]) + text[place + 1 :]
        path.write_bytes(spoilt)
        if b'"sealed":' in text[place - 20 : place + 20] or b'"genesis":' in text[place - 80 : place + 1]:
            continue  # these repeat what other values say
        with pytest.raises((RecordBroken, BookError)):
            for line in coils_in(path)[1]:
                other.take_in(coil_of(line), HAND)
        assert other.verify().broken == ()
    path.write_bytes(b"".join(text.splitlines(keepends=True)[:-1]))
    with pytest.raises(RecordBroken, match="is not whole: it holds 2 coils, its first line says 3"):
        list(coils_in(path)[1])
    for nothing in (b"", b"{}", b"[1]", b"no", b'{"holds":"coils of a coil book","format":9}\n'):
        path.write_bytes(nothing)
        with pytest.raises(RecordBroken):
            coils_in(path)
    with pytest.raises(BookError, match="cannot be read"):
        coils_in(tmp_path)


def test_a_coil_wound_here_and_one_imported_stand_beside_each_other(book: Book, other: Book) -> None:
    """Writing goes on as ever in a book that has imported coils."""
    taken(other, closed(filled(book)))
    with other.begin_coil("b3", 2026, started(9)) as writer:
        writer.commit(packed([*wound(writer.started, 1), finished(1)]))
        seal(other, writer)
    assert wind(other, 10, bench="b2", turns=1).number == "b2-2026-0002"
    assert other.verify().broken == ()
    assert STARTED[:4] == "2026"
