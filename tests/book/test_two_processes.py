"""Two processes wind, seal, measure and note coils in one book at once."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.book.processes import child, line
from tests.book.samples import files_beside
from windctl.book.open import open_book
from windctl.record.addenda import CoilMeasured, CoilNoted


def both(path: Path, each: int) -> None:
    """`each` coils by each of two processes: no number missing or double, all sealed, measured, verified."""
    open_book(path).close()
    with child("shift", path, "0", str(each)) as one, child("shift", path, "100000", str(each)) as other:
        assert (line(one), line(other)) == ("ready", "ready")
        for process in (one, other):
            assert process.stdin is not None
            process.stdin.write("\n")
            process.stdin.flush()
        told = [line(process) for _ in range(each) for process in (one, other)]
        assert (one.wait(60), other.wait(60)) == (0, 0)
    expected = [f"b1-2026-{n:04d}" for n in range(1, 2 * each + 1)]
    assert sorted(told) == expected
    with open_book(path, readonly=True) as book:
        heads = book.list("sort:coil")
        assert [head.number for head in heads] == expected
        assert all(head.sealed and head.outcome == "finished" for head in heads)
        said = [fact for head in heads for fact in book.addenda(head.id)]
        assert sum(isinstance(fact, CoilMeasured) for fact in said) == 2 * each
        assert sum(isinstance(fact, CoilNoted) for fact in said) == 2 * each
        assert book.count('"seen by"') == len({head.id for head in heads if _noted(book.addenda(head.id))})
        report = book.verify()
        assert (report.checked, report.broken) == (2 * each, ())
    assert files_beside(path) == []


def _noted(facts: tuple[object, ...]) -> bool:
    return any(isinstance(fact, CoilNoted) for fact in facts)


def test_two_processes_wind_into_one_book(path: Path) -> None:
    both(path, 8)


@pytest.mark.long
@pytest.mark.timeout(1200)
def test_two_processes_wind_two_hundred_coils_each_into_one_book(path: Path) -> None:
    both(path, 200)
