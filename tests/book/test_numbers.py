"""Numbers that people can say: in order, without gaps, and never the same one twice."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.book.processes import child, line
from tests.book.samples import coil_id, started
from windctl.book.book import Book
from windctl.book.heads import coil_number
from windctl.book.open import open_book
from windctl.errors import BookError


def test_numbers_count_up_for_each_bench_and_year_on_its_own(book: Book) -> None:
    where = [("b1", 2026), ("b1", 2026), ("left", 2026), ("b1", 2027), ("b1", 2026), ("left", 2026)]
    numbers = []
    for n, (bench, year) in enumerate(where):
        with book.begin_coil(bench, year, started(n)) as writer:
            numbers.append(writer.number)
    assert numbers == [
        "b1-2026-0001",
        "b1-2026-0002",
        "left-2026-0001",
        "b1-2027-0001",
        "b1-2026-0003",
        "left-2026-0002",
    ]


def test_the_first_fact_is_recorded_under_the_number(book: Book) -> None:
    with book.begin_coil("b1", 2026, started(7)) as writer:
        assert writer.started == started(7, number="b1-2026-0001")
        assert list(book.events(writer.number)) == [writer.started]
        assert writer.id == coil_id(7)


def test_two_processes_allotting_at_once_get_a_hundred_different_numbers(path: Path) -> None:
    open_book(path).close()
    with child("number", path, "0", "50") as one, child("number", path, "50", "50") as other:
        for process in (one, other):
            assert line(process) == "ready"
        for process in (one, other):
            assert process.stdin is not None
            process.stdin.write("go\n")
            process.stdin.flush()
        numbers = [[line(process) for _ in range(50)] for process in (one, other)]
        assert one.wait(10) == 0
        assert other.wait(10) == 0
    assert sorted(numbers[0] + numbers[1]) == [f"b1-2026-{n:04d}" for n in range(1, 101)]
    assert numbers[0] == sorted(numbers[0])
    with open_book(path, create=False) as book:
        report = book.verify()
    assert (report.checked, report.broken) == (100, ())


def test_a_coil_that_could_not_be_recorded_takes_no_number(book: Book) -> None:
    with book.begin_coil("b1", 2026, started(1)) as writer:
        assert writer.number == "b1-2026-0001"
    with pytest.raises(BookError, match="already has a coil with the id"):
        book.begin_coil("b1", 2026, started(1))
    with book.begin_coil("b1", 2026, started(2)) as writer:
        assert writer.number == "b1-2026-0002"


@pytest.mark.parametrize("bench", ["", "B1", "b-1", "bench1234", "b1 ", "ü"])
def test_a_bench_name_that_cannot_be_in_a_number_is_refused(book: Book, bench: str) -> None:
    with pytest.raises(BookError, match="1 to 8 of a-z and 0-9"):
        book.begin_coil(bench, 2026, started(1))
    assert book.count() == 0


def test_a_clock_that_was_never_set_is_refused(book: Book) -> None:
    with pytest.raises(BookError, match="year is 1970, outside 2000 to 9999: set the computer's clock"):
        book.begin_coil("b1", 1970, started(1))


@pytest.mark.parametrize("given", ["", "demo", coil_id(1).upper(), coil_id(1).replace("-", "")])
def test_an_id_that_is_not_written_as_a_uuid_is_refused(book: Book, given: str) -> None:
    with pytest.raises(BookError, match="must be a UUID in lower case"):
        book.begin_coil("b1", 2026, started(1, coil_id=given))


@pytest.mark.parametrize(("field", "value"), [("of", -1), ("of", 10**30), ("operator", "\udcff")])
def test_a_start_that_cannot_be_stored_is_refused(book: Book, field: str, value: object) -> None:
    with pytest.raises(BookError, match=r"outside 0|cannot be recorded"):
        book.begin_coil("b1", 2026, started(1, **{field: value}))
    assert book.verify().broken == ()


def test_there_is_a_number_after_9999() -> None:
    assert coil_number("b1", 2026, 9999) == "b1-2026-9999"
    assert coil_number("b1", 2026, 10_000) == "b1-2026-10000"
