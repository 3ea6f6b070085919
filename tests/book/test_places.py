"""Where the book lies: what was given, then what the environment names, then the user's data folder."""

from __future__ import annotations

import os
import sys
from pathlib import Path

import pytest

from windctl.book.places import book_path, data_folder
from windctl.errors import BookError


def test_what_was_given_goes_first(home: Path) -> None:
    assert book_path("shop.book", {"WINDCTL_BOOK": "other.book"}) == Path("shop.book")
    assert list(home.iterdir()) == []


def test_then_what_the_environment_names(home: Path) -> None:
    assert book_path(None, {"WINDCTL_BOOK": "~/bench/shop.book"}) == home / "bench" / "shop.book"
    assert list(home.iterdir()) == []


@pytest.mark.parametrize("environ", [{}, {"WINDCTL_BOOK": ""}])
def test_else_it_is_in_the_data_folder_which_is_made(home: Path, environ: dict[str, str]) -> None:
    path = book_path(None, environ)
    assert path == data_folder() / "coils.book"
    assert path.parent.is_dir()
    if sys.platform == "linux":  # the folder that the XDG Base Directory Specification names
        assert path.parent == Path(os.environ["XDG_DATA_HOME"]) / "windctl"
        assert path.is_relative_to(home)


@pytest.mark.skipif(
    sys.platform != "linux", reason="platform: the data folder cannot be moved by the environment"
)
def test_a_data_folder_that_cannot_be_made(home: Path) -> None:
    (home / "data").write_text("a file where the folder should be")
    with pytest.raises(BookError, match=r"cannot be made .*name a book elsewhere with --book"):
        book_path(None, {})
