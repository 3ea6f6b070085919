"""What verification rests on besides the digests: a fold of the events, and one state of a book in use."""

from __future__ import annotations

import base64
import dataclasses
import json
import sqlite3
import threading
from contextlib import closing
from pathlib import Path
from typing import Any

import pytest

from tests.book.samples import coil_id, finished, packed, seal, started, wind, wound
from windctl.book.book import Book
from windctl.book.check import check_record
from windctl.book.heads import CoilHead, seal_payload
from windctl.book.open import open_book
from windctl.book.queries import StoredRow, curve_in, raw_rows
from windctl.book.store import Store
from windctl.record.canonical import encode
from windctl.record.chain import genesis, link
from windctl.record.curve import CurvePoint
from windctl.record.entries import Entry
from windctl.record.events import Event, NoteMade


def whole(path: Path, n: int) -> tuple[CoilHead, list[StoredRow], list[tuple[int, CurvePoint]]]:
    """A coil's row, rows and curve."""
    with open_book(path, readonly=True) as book:
        head = book.find(coil_id(n))
    store = Store(path, "ro")
    with store.reading() as connection:
        points = curve_in(connection, head.id)
    rows = list(raw_rows(store, head.id, head.n_entries))
    store.close()
    return head, rows, points


def tied_anew(head: CoilHead, entries: list[Entry]) -> tuple[CoilHead, list[StoredRow]]:
    """A forged record: every link computed anew, as somebody with this program could."""
    last, rows = genesis(head.id), []
    for seq, entry in enumerate(entries):
        last = link(last, entry.kind, entry.payload)
        rows.append(StoredRow(seq, entry, last))
    return dataclasses.replace(head, n_entries=len(rows), record_digest=last.hex()), rows


def forged(
    path: Path, *, head: dict[str, Any] | None = None, points: list[CurvePoint] | None = None
) -> list[str]:
    """What is found in closed coil 1 when row, seal and all links are changed to agree with each other."""
    old, rows, curve = whole(path, 1)
    kept = [point for _, point in curve] if points is None else points
    new = dataclasses.replace(old, **(head or {}))
    entries = [row.entry for row in rows[:-1]] + [Entry("sealed", seal_payload(new, kept), 0)]
    new, rows = tied_anew(new, entries)
    return [fault.what for fault in check_record(new, rows, list(enumerate(kept)))]


def test_a_good_book_is_good(copied: Path) -> None:
    with open_book(copied, readonly=True) as book:
        report = book.verify()
        assert (report.checked, report.broken, report.good) == (3, (), True)
        assert book.verify("b2-2026-0001").checked == 1


def test_an_empty_book_is_good(book: Book) -> None:
    assert (book.verify().checked, book.verify().broken) == (0, ())


def test_forging_everything_but_the_facts_is_found_by_the_fold(copied: Path) -> None:
    assert forged(copied) == []
    assert forged(copied, head={"dcr_20c_ohm": 26.0}) == [
        "dcr_20c_ohm is 26.0, its events say 25.512345678901234"
    ]
    assert forged(copied, head={"verdict": "outside"}) == ["verdict is 'outside', its events say 'within'"]
    (found,) = forged(copied, head={"trace_digest": "00" * 32})
    assert found.startswith(f"trace_digest is '{'00' * 32}', its events say")
    _, _, curve = whole(copied, 1)
    points = [point for _, point in curve]
    points[1] = dataclasses.replace(points[1], final_ohm=points[1].final_ohm + 0.001)
    (found,) = forged(copied, points=points)
    assert found.startswith("point 1 of the curve: final_ohm is")
    assert forged(copied, points=points[:-1]) == [
        f"the curve has {len(points) - 1} points, its events give {len(points)}"
    ]


def test_the_last_bits_of_another_computers_forecast_are_no_fault(copied: Path) -> None:
    _, _, curve = whole(copied, 1)
    points = [dataclasses.replace(point, final_ohm=point.final_ohm * (1 + 1e-13)) for _, point in curve]
    assert forged(copied, points=points) == []


def test_the_curve_of_another_version_rests_on_its_seal_alone(book: Book, path: Path) -> None:
    """A later forecast may be better; what was known when the coil was wound stays what it was."""
    first = started(1, version="0.0.1")
    writer = book.begin_coil("b1", 2026, first)
    writer.commit(packed([*wound(writer.started, 2), finished(2)]))
    from windctl.record.curve import review
    from windctl.record.summary import summarise
    from windctl.record.trace import trace_digest

    events = list(book.events("1"))
    seen = review(events)
    points = [dataclasses.replace(point, final_ohm=point.final_ohm + 1.0) for point in seen.curve]
    writer.seal(summarise(seen.state), points, trace_digest(book.entries("1")), "2026-05-04T09:00:00+02:00")
    assert book.verify().broken == ()
    with closing(sqlite3.connect(path, isolation_level=None)) as connection:
        connection.execute("UPDATE curve SET final_ohm = final_ohm + 1e-9 WHERE seq = 0")
    assert [finding.what for finding in book.verify().broken] == [
        "the curve was altered: it does not agree with the seal"
    ]


@pytest.mark.parametrize(
    ("entry", "what"),
    [
        (Entry("chunk", b"no zlib", 3), "cannot be read"),
        (Entry("no_such_fact", b"{}", 1), "cannot be read"),
        (Entry("note_made", b'{"at_ms":1}', 1), "cannot be read"),
        (Entry("note_made", b"\xff", 1), "cannot be read"),
        (Entry("note_made", encode(NoteMade(1, "x", "y")), 2), "holds 1 events, it says 2"),
        (Entry("went_on", b'{"at_ms":"soon","count":null}', 1), None),
        (Entry("coil_finished", json.dumps({"at_ms": 1}).encode(), 1), "cannot be read"),
        (Entry("status_heard", b'{"at_ms":1,"status":5}', 1), "cannot be followed"),
        (Entry("count_corrected", b'{"at_ms":1,"turn":"x","by":"","reason":""}', 1), "cannot be followed"),
    ],
)
def test_a_forged_row_that_holds_no_event_is_found(copied: Path, entry: Entry, what: str | None) -> None:
    head, rows, _ = whole(copied, 3)
    head, rows = tied_anew(head, [*(row.entry for row in rows), entry])
    found = [fault.what for fault in check_record(head, rows, [])]
    if what is None:
        assert found == []
    else:
        assert any(what in text for text in found), found


def test_a_record_without_its_beginning_is_found(copied: Path) -> None:
    head, rows, _ = whole(copied, 3)
    head, rows = tied_anew(head, [row.entry for row in rows[1:]])
    assert "the record does not begin with the start of the coil" in [
        fault.what for fault in check_record(head, rows, [])
    ]


def test_an_outcome_without_a_fact_that_ends_the_coil_is_found(copied: Path) -> None:
    head, rows, _ = whole(copied, 3)
    new = dataclasses.replace(
        head, ended="x", outcome="stopped", reason="", turns=1.0, verdict="not judged", trace_digest="00" * 32
    )
    new, rows = tied_anew(new, [*(row.entry for row in rows), Entry("sealed", seal_payload(new, []), 0)])
    assert "outcome is 'stopped', yet no event ends the coil" in [
        fault.what for fault in check_record(new, rows, [])
    ]


def test_a_coil_that_was_never_closed_is_good_as_it_is(book: Book) -> None:
    """As after a crash between the last fact and the seal."""
    with book.begin_coil("b1", 2026, started(1)) as writer:
        writer.commit(packed([*wound(writer.started, 2), finished(2)]))
    assert book.verify().broken == ()
    with book.reopen("1") as again:
        seal(book, again)
    assert book.verify().broken == ()


def test_verifying_beside_a_live_writer_sees_one_state(book: Book) -> None:
    writer = book.begin_coil("b1", 2026, started(1))
    rows = packed(wound(writer.started, 10))

    checked = threading.Semaphore(0)

    def work() -> None:
        for row in rows[:4]:
            checked.acquire()  # so that there is a check between any two of these
            writer.commit([row])
        writer.commit(rows[4:])
        writer.commit(packed([finished(10)]))
        seal(book, writer)

    thread = threading.Thread(target=work)
    thread.start()
    while thread.is_alive():
        assert book.verify().broken == ()
        checked.release()
    thread.join()
    assert book.verify().broken == ()
    assert book.find("1").sealed


def test_shown_and_exported_coils_of_a_book_are_plain_data(book: Book) -> None:
    head = wind(book, 1, turns=2)
    shown = json.loads(json.dumps(book.show("1")))
    assert shown["format"] == 1
    asked = ("coil", "id", "recipe", "started", "outcome", "turns", "dcr_20c_ohm", "verdict")
    assert [shown[name] for name in asked] == [
        head.number,
        head.id,
        head.recipe,
        head.started,
        head.outcome,
        head.turns,
        head.dcr_20c_ohm,
        head.verdict,
    ]
    events: list[Event] = list(book.events("1"))
    assert [event["kind"] for event in shown["events"]] == [event.kind for event in events]
    assert shown["events"][0]["recipe_text"] == started(1).recipe_text
    assert shown["curve"] == [dataclasses.asdict(point) for point in book.curve("1")]
    exported = json.loads(json.dumps(book.export("1")))
    assert {key: exported[key] for key in shown} == shown
    assert base64.b64decode(exported["entries"][0]["payload"]) == encode(events[0])
