"""Finding coils: by what people say, and by what they were wound for."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.book.samples import coil_id, finished, packed, seal, started, wind, wound
from windctl.book.book import Book
from windctl.book.queries import CoilLine
from windctl.errors import BookError


@pytest.fixture
def lot(book: Book) -> Book:
    """Six coils of two recipes and two lots; the fourth outside its tolerance, the last one open."""
    for n in range(1, 6):
        writer = book.begin_coil(
            "b1" if n < 4 else "b2",
            2026,
            started(
                n,
                recipe_name="neck" if n % 2 else "bridge",
                batch="lot A" if n < 3 else "lot B",
                wall_time=f"2026-05-0{n}T08:00:00+02:00",
            ),
        )
        verdict = "outside" if n == 4 else "within"
        writer.commit(packed([*wound(writer.started, 1), finished(1, verdict=verdict)]))
        seal(book, writer)
    book.begin_coil("b1", 2026, started(6, wall_time="2026-05-06T08:00:00+02:00")).close()
    return book


def numbers(heads: object) -> list[str]:
    """The serial parts with their benches."""
    return [head.number.replace("-2026-000", " ") for head in heads]  # type: ignore[attr-defined]  # heads of coils


def test_the_coil_started_last_comes_first(lot: Book) -> None:
    assert numbers(lot.list()) == ["b1 4", "b2 2", "b2 1", "b1 3", "b1 2", "b1 1"]


def test_a_page_at_a_time(lot: Book) -> None:
    assert numbers(lot.list(limit=2)) == ["b1 4", "b2 2"]
    assert numbers(lot.list(limit=2, offset=2)) == ["b2 1", "b1 3"]
    assert numbers(lot.list(limit=9, offset=5)) == ["b1 1"]
    assert numbers(lot.list(offset=4)) == ["b1 2", "b1 1"]
    assert lot.list(limit=2, offset=6) == ()


def test_lines_are_the_list_of_which_less_is_read(lot: Book) -> None:
    for asked in ({}, {"query": "bench:b1", "sort": "coil"}, {"limit": 2}, {"outcome": "open"}):
        heads, lines = lot.list(**asked), lot.lines(**asked)
        assert [{name: getattr(head, name) for name in CoilLine._fields} for head in heads] == [
            line._asdict() for line in lines
        ]
    assert lot.count() == 6


def test_filters_narrow_each_other(lot: Book) -> None:
    assert numbers(lot.list(recipe="neck")) == ["b2 2", "b1 3", "b1 1"]
    assert numbers(lot.list(batch="lot B", recipe="neck")) == ["b2 2", "b1 3"]
    assert numbers(lot.list(outcome="open")) == ["b1 4"]
    assert numbers(lot.list(verdict="outside")) == ["b2 1"]
    assert numbers(lot.list(bench="b2", verdict="within")) == ["b2 2"]
    assert lot.list(recipe="nec") == ()
    assert (lot.count(recipe="neck"), lot.count(batch="lot B", outcome="finished")) == (3, 3)


def test_open_coils_of_all_benches_or_one(lot: Book) -> None:
    assert numbers(lot.open_coils()) == ["b1 4"]
    assert numbers(lot.open_coils("b1")) == ["b1 4"]
    assert lot.open_coils("b2") == ()


@pytest.mark.parametrize(
    "text",
    ["b1-2026-0003", " B1-2026-0003 ", "0003", "3", coil_id(3), coil_id(3)[:8].upper(), coil_id(3)[:4]],
)
def test_a_coil_is_found_by_what_people_say(lot: Book, text: str) -> None:
    assert lot.find(text).number == "b1-2026-0003"


@pytest.mark.parametrize(
    "text", ["", "b1-2026-0009", "0009", "zz", "%", "____", "b1-2026-000%", coil_id(9), coil_id(3)[:3]]
)
def test_a_coil_that_is_not_there_says_how_to_name_one(lot: Book, path: Path, text: str) -> None:
    with pytest.raises(BookError, match="give its number, the number's last digits, or at least") as caught:
        lot.find(text)
    assert repr(text) in str(caught.value)
    assert str(path) in str(caught.value)


def test_a_name_that_may_mean_several_is_asked_back(lot: Book) -> None:
    with pytest.raises(BookError, match=r"'1' may mean several coils \(b2-2026-0001, b1-2026-0001\)"):
        lot.find("1")


def test_digits_are_a_serial_number_before_they_are_the_beginning_of_an_id(book: Book) -> None:
    odd = "00020000-0000-4000-8000-000000000000"
    wind(book, 1, turns=1)
    book.begin_coil("b1", 2026, started(2)).close()
    book.begin_coil("b1", 2026, started(3, coil_id=odd)).close()
    assert book.find("0002").number == "b1-2026-0002"
    assert book.find("00020000").id == odd
    assert book.find("0003").id == odd
