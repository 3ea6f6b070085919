"""Where a user's coil book lies when nobody says otherwise."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path

import platformdirs

from windctl.errors import BookError

BOOK_VARIABLE = "WINDCTL_BOOK"
BOOK_NAME = "coils.book"


def data_folder() -> Path:
    """The platform's folder for this user's data, which need not exist yet."""
    return platformdirs.user_data_path("windctl", appauthor=False)


def book_path(given: str | Path | None, environ: Mapping[str, str]) -> Path:
    """The book to use: what was given, else what WINDCTL_BOOK names, else the one in the data folder.

    Only the data folder is made when it is missing; a folder that somebody named has to exist.
    Raises BookError when the data folder cannot be made.
    """
    if given is not None and str(given):
        return Path(given)
    named = environ.get(BOOK_VARIABLE, "")
    if named:
        return Path(named).expanduser()
    folder = data_folder()
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise BookError(
            f"the folder for the coil book, {folder}, cannot be made ({error.strerror}): "
            f"name a book elsewhere with --book or {BOOK_VARIABLE}"
        ) from error
    return folder / BOOK_NAME
