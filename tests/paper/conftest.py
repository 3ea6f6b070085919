"""A small book of simulated demo coils whose names are made to break out of a page, wound once."""

from __future__ import annotations

from pathlib import Path

import pytest

from tests.cli.recipes import SMALL, TO_RESISTANCE, TO_TURNS
from windctl.book.book import Book
from windctl.book.open import open_book
from windctl.cli.main import run

RECIPE = '[red]<b>x</b> & "q" </style><script>alert(1)</script>'
BATCH = "lot <1> & more"
NOTE = "the <i>first</i> one & a tab\tor two"
BY = "Ann <ann@bench>"


def recipe(folder: Path, stop: str) -> Path:
    """A recipe file with a name that is no markup."""
    file = folder / "small.toml"
    text = SMALL.format(stop=stop).replace('"demo small coil"', f"'{RECIPE}'")
    file.write_text(text.replace('start_flange = "base"', 'start_flange = "base"\nmagnet_up = "north"'))
    return file


@pytest.fixture(scope="session")
def book_path(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Coils 1 and 2 to 120 turns, 3 to a resistance; 1 was measured, and a note is beside it."""
    folder = tmp_path_factory.mktemp("paper")
    path = folder / "shop.book"
    common = ["--book", str(path)]
    wind = ["--machine", "virtual", "--batch", BATCH, "--of", "3", "-q", "--readings", "live"]
    for n in (1, 2):
        file = recipe(folder, TO_TURNS.format(turns=120))
        assert run(["wind", str(file), *common, *wind, "--plant-seed", str(n)]) == 0
    file = recipe(folder, TO_RESISTANCE.format(ohm=90, least=100, most=200))
    assert run(["wind", str(file), *common, *wind, "--plant-seed", "3"]) == 0
    measure = ["--ohm", "85.1", "--celsius", "22.5", "--inductance", "0.0021", "--at-hz", "1000"]
    assert run(["coils", "measure", "1", *measure, "--no-input", "--by", BY, *common]) == 0
    assert run(["coils", "note", "1", NOTE, "--by", BY, *common]) == 0
    return path


@pytest.fixture(scope="session")
def book(book_path: Path) -> Book:
    """The same, open to read."""
    return open_book(book_path, create=False, readonly=True)
