"""A digest kept elsewhere finds what no chain can: an end that was cut off, a record written anew."""

from __future__ import annotations

import json
import sqlite3
from contextlib import closing
from pathlib import Path

import pytest

from tests.book.samples import coil_id, finished, packed, seal, started, wind, wound
from windctl.book.book import Book
from windctl.book.claims import Claim, claims_in, digest_of
from windctl.errors import BookError, RecordBroken, UsageError
from windctl.record.events import NoteMade


def claim(book: Book, coil: str, digits: int = 64) -> Claim:
    """What a label says of a coil."""
    head = book.find(coil)
    return Claim(head.number, head.id, head.record_digest[:digits])


def wrong(book: Book, one: Claim) -> list[tuple[str, int | None]]:
    """Where the book does not agree with it."""
    return [(fault.coil, fault.event_seq) for fault in book.check_claim(one, "paper").broken]


def test_a_record_that_is_what_it_was_agrees(book: Book) -> None:
    wind(book, 1, turns=1)
    whole = claim(book, "1")
    assert wrong(book, whole) == []
    assert wrong(book, Claim("", "", whole.digest)) == []
    assert wrong(book, Claim("B1-2026-0001".lower(), "", whole.digest[:12])) == []


def write_anew(book: Book, events: int) -> None:
    """The same coil once more from its own first facts, all digests computed anew, under the same number."""
    with closing(sqlite3.connect(book.path, isolation_level=None)) as connection:
        for table in ("entries", "curve"):
            connection.execute(f"DELETE FROM {table} WHERE coil = ?", [coil_id(1)])
        connection.execute("DELETE FROM coils WHERE id = ?", [coil_id(1)])
        connection.execute("UPDATE numbers SET last = last - 1")
    wind(book, 1, turns=events)


def test_a_record_written_anew_with_all_its_digests_is_found(book: Book) -> None:
    wind(book, 1, turns=2)
    kept = claim(book, "1")
    write_anew(book, 1)
    assert book.verify().broken == ()  # nothing in the book tells
    n = book.find("1").n_entries
    assert wrong(book, kept) == [("b1-2026-0001", n - 1)]
    assert wrong(book, Claim("", "", kept.digest)) == [("paper", None)]


def test_a_record_whose_end_was_cut_off_cleanly_is_found(book: Book) -> None:
    """An open coil: the rows and the row that counts them go back to an earlier state, which verifies."""
    with book.begin_coil("b1", 2026, started(1)) as writer:
        writer.commit(packed(wound(writer.started, 2)))
        head = book.find("1")
        writer.commit(packed([NoteMade(0, "spliced", "Demo Winder")]))
    kept = claim(book, "1")
    with closing(sqlite3.connect(book.path, isolation_level=None)) as connection:
        connection.execute("DELETE FROM entries WHERE seq >= ?", [head.n_entries])
        before = [head.n_entries, head.record_digest, "demo bridge\nb1-2026-0001\n"]
        connection.execute("UPDATE coils SET n_entries = ?, record_digest = ?, words = ?", before)
    assert book.verify().broken == ()
    assert wrong(book, kept) == [("b1-2026-0001", head.n_entries - 1)]


def test_a_digest_of_an_open_coil_still_holds_when_the_coil_went_on(book: Book) -> None:
    writer = book.begin_coil("b1", 2026, started(1))
    writer.commit(packed(wound(writer.started, 1)))
    early = claim(book, "1", 16)
    writer.commit(packed([finished(1)]))
    seal(book, writer)
    assert wrong(book, early) == []


def test_a_coil_that_is_missing_is_told(book: Book) -> None:
    report = book.check_claim(Claim("b1-2026-0009", coil_id(9), "ab" * 32), "report.html, b1-2026-0009")
    assert (report.checked, report.broken[0].coil) == (0, "report.html, b1-2026-0009")
    assert "missing, or was exchanged" in report.broken[0].what


def test_a_damaged_record_is_told_before_its_digest_is(book: Book) -> None:
    wind(book, 1, turns=1)
    kept = claim(book, "1")
    with closing(sqlite3.connect(book.path, isolation_level=None)) as connection:
        connection.execute("UPDATE entries SET kind = 'chunk' WHERE seq = 1")
    assert ("b1-2026-0001", 1) in wrong(book, kept)


def test_pages_and_drawings_say_which_records_they_are_of(tmp_path: Path) -> None:
    """The elements of HTML and SVG as any parser finds them: order, case, quotes and blanks are free."""
    digest = "0123456789abcdef" * 4
    page = tmp_path / "batch.html"
    page.write_text(
        f"<!doctype html><html><META content='b1-2026-0001 {coil_id(1)} {digest}' name=windctl-record>\n"
        f'<meta name="viewport" content="width=1"><meta name="windctl-record"\n content="B1-2026-0002 '
        f'{coil_id(2).upper()}  {digest.upper()}"/><body>&lt;meta name="windctl-record"&gt;</body></html>',
        encoding="utf-8",
    )
    assert claims_in(page) == (
        Claim("b1-2026-0001", coil_id(1), digest),
        Claim("b1-2026-0002", coil_id(2), digest),
    )
    drawing = tmp_path / "label.svg"
    drawing.write_text(
        '\ufeff<?xml version="1.0"?><svg xmlns="http://www.w3.org/2000/svg"><metadata><meta '
        f'name="windctl-record" content="b1-2026-0001 {coil_id(1)} {digest}"/></metadata></svg>',
        encoding="utf-8",
    )
    assert claims_in(drawing) == (Claim("b1-2026-0001", coil_id(1), digest),)


@pytest.mark.parametrize(
    ("text", "says"),
    [
        ("<html><p>nothing</p></html>", "carries no digest of a record"),
        ('<meta name="windctl-record">', "says '' of a record"),
        ('<meta name="windctl-record" content="b1 x 12">', "which is not a number, an id and a digest"),
        ("plain words", "holds no coils"),
    ],
)
def test_a_page_that_says_nothing_of_use_is_told(tmp_path: Path, text: str, says: str) -> None:
    page = tmp_path / "page.html"
    page.write_text(text, encoding="utf-8")
    with pytest.raises(RecordBroken, match=says):
        claims_in(page)
    with pytest.raises(BookError, match="cannot be read"):
        claims_in(tmp_path)


def test_a_file_of_coils_says_what_its_coils_are(book: Book, tmp_path: Path) -> None:
    wind(book, 1, turns=1)
    path = tmp_path / "one.json"
    path.write_text(json.dumps(book.export("1")), encoding="utf-8")
    (one,) = claims_in(path)
    assert one.proven
    assert wrong(book, one) == []
    write_anew(book, 2)
    assert wrong(book, one) == [("b1-2026-0001", book.find("1").n_entries - 1)]


def test_digests_as_people_type_them() -> None:
    assert digest_of(" 0123 4567\n89AB ") == "0123456789ab"
    for text in ("", "0123", "0123456789ag", "0" * 65):
        with pytest.raises(UsageError, match="is not a digest: give 12 to 64"):
            digest_of(text)
