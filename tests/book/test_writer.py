"""One coil being written: durable, in order, by one writer only."""

from __future__ import annotations

import dataclasses
import hashlib
import math
import sqlite3
import threading
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from tests.book.processes import child, line
from tests.book.samples import (
    ENDED,
    coil_id,
    files_beside,
    finished,
    packed,
    seal,
    started,
    wind,
    wound,
)
from windctl.book.book import Book
from windctl.book.open import open_book
from windctl.errors import BookError, RecordBroken
from windctl.record.curve import review
from windctl.record.entries import Entry
from windctl.record.events import NoteMade
from windctl.record.summary import summarise
from windctl.record.trace import trace_digest


def chain(coil: str, rows: list[tuple[str, bytes]]) -> list[bytes]:
    """The links of a record by the rule as it is documented, written down here a second time."""
    links = [hashlib.sha256(b"windctl coil 1\0" + coil.encode()).digest()]
    for kind, payload in rows:
        tied = links[-1] + len(kind).to_bytes(2, "big") + kind.encode() + payload
        links.append(hashlib.sha256(tied).digest())
    return links[1:]


def stored(path: Path, coil: str) -> list[tuple[int, str, int, bytes, bytes]]:
    """The rows of a record as the file has them, read without our code."""
    with sqlite3.connect(path) as connection:
        query = "SELECT seq, kind, events, payload, link FROM entries WHERE coil = ? ORDER BY seq"
        rows = connection.execute(query, [coil]).fetchall()
    connection.close()
    return rows


def test_what_was_committed_is_in_the_file_when_commit_returns(book: Book, path: Path) -> None:
    with book.begin_coil("b1", 2026, started(1)) as writer:
        rows = packed(wound(writer.started))
        writer.commit(rows[:10])
        writer.commit(rows[10:])
        with open_book(path, readonly=True) as other:
            assert list(other.entries("1"))[1:] == rows
            assert list(other.events("1")) == [writer.started, *wound(writer.started)]


def test_commit_returns_only_when_the_disk_has_it(path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """EXTRA is 3 in SQLite's documentation of `PRAGMA synchronous`."""
    made: list[sqlite3.Connection] = []
    connect = sqlite3.connect

    def watched(*arguments: object, **named: object) -> sqlite3.Connection:
        made.append(connect(*arguments, **named))  # type: ignore[call-overload]  # handed on as they are
        return made[-1]

    monkeypatch.setattr(sqlite3, "connect", watched)
    with open_book(path) as book, book.begin_coil("b1", 2026, started(1)):
        assert made
        for connection in made:
            assert connection.execute("PRAGMA synchronous").fetchone() == (3,)
            assert connection.execute("PRAGMA journal_mode").fetchone() == ("delete",)
            assert connection.execute("PRAGMA foreign_keys").fetchone() == (1,)


def test_another_thread_than_the_opener_may_write(book: Book) -> None:
    writer = book.begin_coil("b1", 2026, started(1))
    rows = packed(wound(writer.started))

    def work() -> None:
        for row in rows:
            writer.commit([row])
        writer.close()

    thread = threading.Thread(target=work)
    thread.start()
    while thread.is_alive():
        assert next(book.events(writer.id)) == writer.started  # a screen looking on meanwhile
    thread.join()
    assert list(book.entries(writer.id))[1:] == rows


@settings(max_examples=25, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(
    batches=st.lists(
        st.lists(
            st.builds(Entry, st.text(max_size=20), st.binary(max_size=200), st.integers(0, 2**31)), max_size=4
        ),
        max_size=4,
    )
)
def test_any_rows_come_back_unchanged_and_tied_to_all_before(
    book: Book, path: Path, batches: list[list[Entry]]
) -> None:
    n = book.count()
    rows = [row for batch in batches for row in batch]
    if any(row.kind in ("coil_started", "sealed") for row in rows):
        return
    with book.begin_coil("b1", 2026, started(n)) as writer:
        for batch in batches:
            writer.commit(batch)
    first, *others = stored(path, coil_id(n))
    assert [(seq, kind, events, payload) for seq, kind, events, payload, _ in others] == [
        (k + 1, row.kind, row.events, row.payload) for k, row in enumerate(rows)
    ]
    links = chain(coil_id(n), [(row[1], row[3]) for row in (first, *others)])
    assert [row[4] for row in (first, *others)] == links
    head = book.find(coil_id(n))
    assert (head.n_entries, head.record_digest) == (len(rows) + 1, links[-1].hex())


def test_a_closed_coil_has_its_summary_curve_and_digests(book: Book, path: Path) -> None:
    head = wind(book, 1)
    assert book.find("b1-2026-0001") == head
    assert head.sealed
    said = (head.outcome, head.reason, head.turns, head.dcr_20c_ohm, head.dcr_u95_ohm, head.verdict)
    assert said == ("finished", "the target is reached", 30.0, 25.512345678901234, 0.31, "within")
    assert (head.started, head.ended) == ("2026-05-04T08:30:00+02:00", ENDED)
    assert (head.recipe, head.batch, head.of, head.operator) == ("demo bridge", "demo lot", 6, "Demo Winder")
    assert (head.target_kind, head.target_value) == ("turns", 30.0)
    rows = stored(path, head.id)
    assert (head.n_entries, head.record_digest) == (len(rows), rows[-1][4].hex())
    assert rows[-1][1] == "sealed"
    events = list(book.events(head.id))
    assert list(book.curve(head.id)) == list(review(events).curve) != []
    assert head.trace_digest == trace_digest(book.entries(head.id))
    assert files_beside(path) == []


def test_nothing_is_added_to_a_closed_coil(book: Book) -> None:
    writer = book.begin_coil("b1", 2026, started(1))
    writer.commit(packed([*wound(writer.started), finished()]))
    seal(book, writer)
    with pytest.raises(BookError, match="no longer being written here"):
        writer.commit(packed([NoteMade(1, "late", "Demo Winder")]))
    with pytest.raises(BookError, match=r"coil b1-2026-0001 is closed \(finished\)"):
        book.reopen("b1-2026-0001")
    with pytest.raises(BookError, match="changed by something else"):
        seal(book, writer)
    assert book.verify().good


def test_a_writer_that_was_closed_may_still_close_the_record(book: Book) -> None:
    writer = book.begin_coil("b1", 2026, started(1))
    writer.commit(packed([*wound(writer.started), finished()]))
    writer.close()
    assert seal(book, writer).sealed
    assert book.verify().good


def test_the_last_rows_and_the_seal_are_one_transaction(book: Book) -> None:
    with book.begin_coil("b1", 2026, started(1)) as writer:
        rest = [*wound(writer.started), finished()]
        seen = review([writer.started, *rest])
        trace = trace_digest(packed([writer.started, *rest]))
        points = [*seen.curve, dataclasses.replace(seen.curve[0], ohm_20c=math.nan)]
        with pytest.raises(BookError, match="ohm_20c is nan"):
            writer.seal(summarise(seen.state), points, trace, ENDED, packed(rest))
        assert book.find("1").n_entries == 1
        writer.seal(summarise(seen.state), seen.curve, trace, ENDED, packed(rest))
    assert book.verify().good


def test_a_curve_of_more_than_500_points_is_refused(book: Book) -> None:
    with book.begin_coil("b1", 2026, started(1)) as writer:
        writer.commit(packed([*wound(writer.started), finished()]))
        seen = review(book.events("1"))
        with pytest.raises(BookError, match="501 points, at most 500"):
            writer.seal(summarise(seen.state), [seen.curve[0]] * 501, "00" * 32, ENDED)


def test_a_summary_of_another_coil_or_of_an_open_one_does_not_close_the_record(book: Book) -> None:
    with book.begin_coil("b1", 2026, started(1)) as writer:
        writer.commit(packed(wound(writer.started)))
        summary = summarise(review(book.events("1")).state)
        with pytest.raises(BookError, match="still open"):
            writer.seal(summary, [], "00" * 32, ENDED)
        with pytest.raises(BookError, match="batch is 'demo lot', the summary's is 'other'"):
            writer.seal(dataclasses.replace(summary, batch="other", outcome="stopped"), [], "00" * 32, ENDED)


def test_a_second_beginning_is_refused(book: Book) -> None:
    with (
        book.begin_coil("b1", 2026, started(1)) as writer,
        pytest.raises(BookError, match="has its beginning in the book already"),
    ):
        writer.commit(packed([writer.started]))


def test_an_interrupted_coil_goes_on_where_its_record_ends(book: Book) -> None:
    with book.begin_coil("b1", 2026, started(1)) as writer:
        rows = packed([*wound(writer.started), finished()])
        writer.commit(rows[:7])
    with book.reopen("b1-2026-0001") as again:
        assert again.started == writer.started
        again.commit(rows[7:])
        seal(book, again)
    assert list(book.entries("1"))[1:] == rows
    assert book.verify().good


def test_a_damaged_record_is_not_continued(copied: Path) -> None:
    with sqlite3.connect(copied) as connection:
        connection.execute(
            "UPDATE entries SET payload = CAST(payload || ' ' AS BLOB) WHERE coil = ? AND seq = 2",
            [coil_id(3)],
        )
    connection.close()
    with open_book(copied) as book:
        with pytest.raises(RecordBroken, match="b1-2026-0002 is damaged at row 2"):
            book.reopen("b1-2026-0002")
        assert files_beside(copied) == []


def test_a_second_live_writer_is_refused_in_this_process_and_another(book: Book, path: Path) -> None:
    with child("hold", path) as process:
        assert line(process) == "b1-2026-0001"
        with pytest.raises(BookError, match=f"b1-2026-0001 is being written by process {process.pid}"):
            book.reopen("1")
        process.kill()
        process.wait(10)
        with book.reopen("1") as writer:  # the dead writer's claim is gone with it
            with pytest.raises(BookError, match="is being written by"), open_book(path) as other:
                other.reopen("1")
            writer.commit(packed([NoteMade(1, "taken over", "Demo Winder")]))
    with book.reopen("1"):
        pass
    assert files_beside(path) == []
    assert book.verify().good


def test_rows_written_past_the_lock_are_noticed(book: Book, path: Path) -> None:
    with book.begin_coil("b1", 2026, started(1)) as writer:
        with sqlite3.connect(path) as connection:
            connection.execute("UPDATE coils SET n_entries = 2")
        connection.close()
        with pytest.raises(BookError, match="changed by something else while it was being written"):
            writer.commit(packed([NoteMade(1, "x", "Demo Winder")]))


def test_a_commit_reported_as_failed_that_reached_the_disk_may_be_repeated(book: Book) -> None:
    """As after an I/O error at the very end of a commit: the caller cannot know, so it tries again."""
    with book.begin_coil("b1", 2026, started(1)) as writer:
        before = writer._tail
        rows = packed([NoteMade(1, "x", "Demo Winder")])
        writer.commit(rows)
        writer._tail = before  # as if it had raised
        writer.commit(rows)
        writer.commit(packed([NoteMade(2, "y", "Demo Winder")]))
    assert [entry.kind for entry in book.entries("1")] == ["coil_started", "note_made", "note_made"]
    assert book.verify().good


def test_a_seal_reported_as_failed_that_reached_the_disk_may_be_repeated(book: Book) -> None:
    with book.begin_coil("b1", 2026, started(1)) as writer:
        writer.commit(packed([*wound(writer.started, 1), finished(1)]))
        before, head = writer._tail, writer._head
        sealed = seal(book, writer)
        writer._tail, writer._head = before, head  # as if it had raised
        assert seal(book, writer) == sealed
    assert book.verify().good


def test_a_seal_that_fails_may_be_tried_again_or_left(book: Book, path: Path) -> None:
    with book.begin_coil("b1", 2026, started(1)) as writer:
        writer.commit(packed([*wound(writer.started, 1), finished(1)]))
    with sqlite3.connect(path) as connection:
        connection.execute("UPDATE coils SET n_entries = n_entries + 1")
    connection.close()
    with pytest.raises(BookError, match="changed by something else"):
        seal(book, writer)
    assert files_beside(path) == []
    with sqlite3.connect(path) as connection:
        connection.execute("UPDATE coils SET n_entries = n_entries - 1")
    connection.close()
    assert seal(book, writer).sealed


def test_an_empty_commit_changes_nothing(book: Book) -> None:
    with book.begin_coil("b1", 2026, started(1)) as writer:
        before = book.find("1")
        writer.commit([])
        assert book.find("1") == before
