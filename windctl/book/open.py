"""A path becomes a book."""

from __future__ import annotations

from pathlib import Path

from windctl.book.book import Book
from windctl.book.ledger import bring_up
from windctl.book.store import WAIT_S, Store
from windctl.errors import BookError

_SQLITE = b"SQLite format 3\0"  # how every file of SQLite begins that is not empty


def open_book(
    path: Path | str, *, create: bool = True, readonly: bool = False, wait_s: float = WAIT_S
) -> Book:
    """Open the coil book at `path`; made if missing and `create`; an older one is brought up to date.

    `readonly` never changes the file. `wait_s`: how long to wait for another program's lock, in seconds.

    Raises BookError, saying what to do: folder or file missing, not a coil book, written by a newer windctl,
    no permission, locked, disk full.
    """
    path = Path(path)
    there = path.exists()
    if path.is_dir():
        raise BookError(f"{path} is a folder, not a coil book: name a file in it with --book")
    if not path.absolute().parent.is_dir():
        raise BookError(
            f"the folder {path.absolute().parent} for the coil book is missing: make it, "
            "or choose another with --book"
        )
    if not there and (readonly or not create):
        raise BookError(
            f"there is no coil book {path}: it is made when the first coil is wound; "
            "or choose one with --book"
        )
    if there:
        _refuse_something_else(path)
    store = Store(path, "ro" if readonly else "rwc" if create else "rw", wait_s)
    try:
        bring_up(store)
        if not readonly:
            _leave_write_ahead_log(store)
    except BaseException:
        store.close()
        raise
    return Book(store)


def _refuse_something_else(path: Path) -> None:
    """SQLite takes some files that are none of its own for empty ones, and would fill them."""
    if path.with_name(f"{path.name}-journal").exists():
        return  # a writer died, perhaps while it made the book: SQLite takes its changes back first
    try:
        with path.open("rb") as file:
            beginning = file.read(len(_SQLITE))
    except OSError as error:
        raise BookError(
            f"the coil book {path} cannot be read ({error.strerror}): check the permissions of the file"
        ) from error
    if beginning not in (b"", _SQLITE):
        raise BookError(
            f"{path} is not a coil book: choose another file with --book; nothing was changed in it"
        )


def _leave_write_ahead_log(store: Store) -> None:
    """Back to a rollback journal, where some other program changed the file's mode."""
    with store.bare() as connection:
        mode = connection.execute("PRAGMA journal_mode").fetchone()[0]
        if mode != "delete":
            mode = connection.execute("PRAGMA journal_mode=DELETE").fetchone()[0]
    if mode != "delete":
        raise BookError(
            f"the coil book {store.path} is in journal mode {mode!r} and cannot be brought back to 'delete': "
            "close whatever else has it open and try again"
        )
