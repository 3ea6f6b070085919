"""A book of its own for each test, and one finished book that tests copy before they spoil it."""

from __future__ import annotations

import shutil
from collections.abc import Iterator
from pathlib import Path

import pytest

from tests.book.samples import packed, started, stocked, wind, wound
from windctl.book.book import Book
from windctl.book.open import open_book


@pytest.fixture
def path(tmp_path: Path) -> Path:
    """Where a book may be made."""
    return tmp_path / "shop.book"


@pytest.fixture
def book(path: Path) -> Iterator[Book]:
    """An empty book."""
    with open_book(path, wait_s=5.0) as opened:
        yield opened


@pytest.fixture(scope="session")
def _finished_book(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Two closed coils (b1-2026-0001, b2-2026-0001) and an open one (b1-2026-0002); a spool, and a note."""
    path = tmp_path_factory.mktemp("finished") / "shop.book"
    with open_book(path) as book:
        wind(book, 1, turns=2)
        wind(book, 2, turns=1, bench="b2")
        with book.begin_coil("b1", 2026, started(3)) as writer:
            writer.commit(packed(wound(writer.started, 1)))
        stocked(book)
    return path


@pytest.fixture
def copied(_finished_book: Path, path: Path) -> Path:
    """A copy of that book, to be spoilt."""
    shutil.copyfile(_finished_book, path)
    return path
