"""What is said after a coil is closed, and of spools: kept in chains of their own, in order, lossless."""

from __future__ import annotations

import sqlite3
from contextlib import closing
from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.book.samples import ENDED, STARTED, coil_id, packed, started, wind, wound
from tests.plan.experience.lots import basis
from windctl.book.book import Book
from windctl.book.open import open_book
from windctl.book.shelf import history
from windctl.errors import BookError, RecordBroken
from windctl.plan.experience.lesson import Build, Lesson, Mass, Resistance, Share
from windctl.plan.experience.spool import PieceMeasured
from windctl.record.addenda import (
    CoilMeasured,
    CoilNoted,
    CoilReadmitted,
    CoilTaught,
    CoilWithdrawn,
    SpoolAdded,
    SpoolMeasured,
    SpoolWeighed,
    decode,
    encode,
)

WHO = "Demo Winder"
texts = st.text(st.characters(exclude_categories=["Cs"]), max_size=20)
reals = st.floats(allow_nan=False, allow_infinity=False)


def spool(name: str = "s1", at: str = STARTED) -> SpoolAdded:
    return SpoolAdded(at, WHO, name, "AWG 42", None, "grade 1", None, "polyurethane", "")


def lesson(coil: str, name: str = "s1") -> Lesson:
    return Lesson(coil, "b1", name, basis(), 30.0, 0.004, (Resistance(25.5, 0.002), Share(0.1, 0.002)))


@given(
    coil=texts,
    numbers=st.tuples(reals, reals, reals, reals),
    ohm=reals,
    reason=texts,
)
def test_what_was_said_comes_back_bit_for_bit(
    coil: str, numbers: tuple[float, float, float, float], ohm: float, reason: str
) -> None:
    a, b, c, d = numbers
    measured = (Resistance(a, b), Share(c, d), Mass(b, a), Build(d, c))
    for fact in (
        CoilTaught("1", replace(lesson(coil), measured=measured)),
        CoilMeasured(STARTED, coil, ohm=ohm, celsius=a),
        CoilWithdrawn(STARTED, coil, reason),
        spool(coil),
    ):
        assert decode(fact.kind, encode(fact)) == fact


def test_a_spool_is_kept_with_all_that_is_said_of_it(book: Book) -> None:
    book.add_spool(spool(), SpoolWeighed(STARTED, WHO, 250.0, 0.5))
    book.add_to_spool("s1", SpoolMeasured(ENDED, WHO, 5.5, 0.005), SpoolWeighed(ENDED, WHO, 220.0, 0.5))
    record = book.spool("s1")
    assert record.spool.wire().label == "AWG 42, grade 1"
    assert [each.grams for each in record.weighed] == [250.0, 220.0]
    assert [each.ohm_per_m for each in record.measured] == [5.5]
    assert book.spools() == (record,)
    with pytest.raises(BookError, match=r"s1 is in the coil book .* already"):
        book.add_spool(spool())
    with pytest.raises(BookError, match="there is no spool 's2'"):
        book.add_to_spool("s2", SpoolWeighed(ENDED, WHO, 220.0, 0.5))
    with pytest.raises(BookError, match="there is no spool 's2'"):
        book.spool("s2")
    assert book.verify().good


def test_an_open_coil_is_not_amended(book: Book) -> None:
    with book.begin_coil("b1", 2026, started(1)) as writer, pytest.raises(BookError, match="is still open"):
        book.amend(writer.number, CoilNoted(ENDED, WHO, "too soon"))


def test_what_is_no_number_is_refused(book: Book) -> None:
    wind(book, 1, turns=1)
    with pytest.raises(BookError, match="cannot be kept"):
        book.amend("1", CoilMeasured(ENDED, WHO, ohm=float("nan")))
    assert book.addenda("1") == ()


def test_a_record_does_not_change_by_what_is_said_later(book: Book) -> None:
    head = wind(book, 1, turns=1)
    book.amend("1", CoilWithdrawn(ENDED, WHO, "core was warped"))
    assert book.find("1") == head
    assert book.addenda("1") == (CoilWithdrawn(ENDED, WHO, "core was warped"),)


def test_what_teaches_in_order_of_time(book: Book) -> None:
    """Coils of two benches whose clocks have different offsets, and a piece measured between them."""
    for n, bench, at in ((1, "b1", "2026-05-04T09:00:00+02:00"), (2, "b2", "2026-05-04T06:00:00+00:00")):
        head = wind(book, n, turns=1, bench=bench, wall_time=at)
        book.amend(head.number, CoilTaught("1", lesson(head.number)))
    book.add_spool(spool(), SpoolMeasured("2026-05-04T08:30:00+02:00", WHO, 5.5, 0.005))
    told = history(book.lessons(), book.spools())
    assert [each.coil if isinstance(each, Lesson) else each for each in told] == [
        "b2-2026-0001",
        PieceMeasured("s1", 5.5, 0.005),
        "b1-2026-0001",
    ]


def test_a_withdrawn_coil_teaches_nothing_until_it_is_readmitted(book: Book) -> None:
    head = wind(book, 1, turns=1)
    book.amend("1", CoilTaught("1", lesson(head.number)))
    before = history(book.lessons(), ())
    book.amend("1", CoilWithdrawn(ENDED, WHO, "core was warped"))
    assert history(book.lessons(), ()) == ()
    assert [each.withdrawn for each in book.lessons()] == ["core was warped"]
    book.amend("1", CoilReadmitted(ENDED, WHO, "it was another one"))
    assert history(book.lessons(), ()) == before


def test_what_was_measured_by_hand_is_learnt_too(book: Book) -> None:
    head = wind(book, 1, turns=1)
    book.amend("1", CoilTaught("1", lesson(head.number)))
    by_hand = CoilMeasured(
        ENDED, WHO, 26.0, 22.0, 25.7, 0.001, grams=28.4, grams_sd=0.02, build_mm=3.1, build_sd_mm=0.1
    )
    book.amend("1", by_hand)
    (one,) = book.lessons()
    assert one.lesson.measured == (
        *lesson("").measured,
        Resistance(25.7, 0.001),
        Mass(28.4, 0.02),
        Build(3.1, 0.1),
    )


def test_a_lesson_that_was_not_written_down_is_read_from_the_record(book: Book) -> None:
    """The program may have been ended between the seal and the lesson. The coil says which basis it has."""
    head = wind(book, 1, turns=30, spool="s1", basis=basis())
    wind(book, 2, turns=30)  # one of an older version, without a basis
    (one,) = book.lessons()
    assert (one.lesson.coil, one.lesson.spool, one.lesson.turns) == (head.number, "s1", 30.0)
    (ohm,) = [each for each in one.lesson.measured if isinstance(each, Resistance)]
    assert ohm.ohm == pytest.approx(0.85 * 30, rel=0.02)  # as the demo coil grows


def test_a_log_that_vanished_is_missed(copied: Path) -> None:
    pristine = copied.read_bytes()
    for log in ("spool s1", f"coil {coil_id(1)}", "logs"):
        copied.write_bytes(pristine)
        with closing(sqlite3.connect(copied)) as connection:
            connection.execute("DELETE FROM log_entries WHERE log = ?", [log])
            connection.execute("DELETE FROM logs WHERE name = ?", [log])
            connection.commit()
        with open_book(copied, readonly=True) as book:
            assert not book.verify().good, log


def test_a_log_cut_short_is_found(copied: Path) -> None:
    with closing(sqlite3.connect(copied)) as connection:
        connection.execute("DELETE FROM log_entries WHERE log LIKE 'coil %' AND seq = 1")
        connection.commit()
    with open_book(copied, readonly=True) as book:
        told = {each.coil: each.what for each in book.verify().broken}
        assert "it has 1 rows, and says it has 2" in book.verify("b1-2026-0001").broken[0].what
    assert set(told) == {"b1-2026-0001"}


def test_a_row_that_cannot_be_read_says_where(copied: Path) -> None:
    with closing(sqlite3.connect(copied)) as connection:
        connection.execute("UPDATE log_entries SET payload = x'7B7D' WHERE log = 'spool s1' AND seq = 0")
        connection.commit()
    with open_book(copied, readonly=True) as book, pytest.raises(RecordBroken, match="the log 'spool s1'"):
        book.spools()


def test_an_open_coil_teaches_nothing(book: Book) -> None:
    with book.begin_coil("b1", 2026, started(1, basis=basis())) as writer:
        writer.commit(packed(wound(writer.started, 5)))
    assert book.lessons() == ()
