"""A book to another file and back. The copy is of one moment, while coils may be wound into the book."""

from __future__ import annotations

import contextlib
import glob
import os
import sqlite3
import time
from contextlib import closing
from pathlib import Path

from windctl.book.faults import told
from windctl.book.lease import written_now
from windctl.book.open import open_book
from windctl.book.store import WAIT_S
from windctl.book.verify import VerifyReport
from windctl.errors import BookError, BookOutdated, RecordBroken

_PAGES = 2000  # copied at once; a writer waits no longer than this takes
_PATIENCE_S = 120.0


def back_up(book: Path, to: Path, *, replace: bool = False) -> VerifyReport:
    """Copy the book to `to` and verify the copy; what was found.

    Raises BookError, also where `to` is there already and must not be replaced; RecordBroken where the copy
    does not verify: it is kept beside, with ".broken" behind its name, and `to` stays as it was.
    """
    _refuse(to, replace)
    half = to.with_name(f"{to.name}.part")
    half.unlink(missing_ok=True)
    with told(book, WAIT_S):
        _copy(book, half)
    return _put(half, to, "the book", book)


def restore(backup: Path, book: Path, *, replace: bool = False) -> tuple[VerifyReport, Path | None]:
    """Make `backup` the book, after it was verified; what was found, and where the book before it is kept.

    Raises BookError, also where there is a book already and must not be replaced, or coils are being written;
    RecordBroken where the backup does not verify. Then nothing was changed.
    """
    _refuse(book, replace)
    half = book.with_name(f"{book.name}.part")
    half.unlink(missing_ok=True)
    with contextlib.suppress(BookOutdated):
        open_book(backup, readonly=True, create=False).close()  # that it is a book at all
    with told(backup, WAIT_S):
        _copy(backup, half)
    open_book(half, create=False).close()  # an older one is taken forward
    for older in half.parent.glob(f"{glob.escape(half.name)}.before-*"):
        older.unlink()  # the backup itself is that
    kept = _kept(book) if book.exists() else None
    return _put(half, book, "the backup", backup, kept), kept


def _refuse(path: Path, replace: bool) -> None:
    if path.is_dir() or not path.absolute().parent.is_dir():
        raise BookError(
            f"{path} is a folder, or its folder is missing: name a file in a folder that is there"
        )
    if path.exists() and not replace:
        raise BookError(f"{path} is there already: name another file, or say --replace; nothing was changed")


def _copy(source: Path, target: Path) -> None:
    """One moment of `source`. SQLite begins again where a coil's run commits meanwhile, so that no run has to
    wait; a large book that is written all the time is given up in the end."""
    until = time.monotonic() + _PATIENCE_S

    def patient(_status: int, _remaining: int, _total: int) -> None:
        if time.monotonic() > until:
            raise BookError(
                f"{source} is written so often that {_PATIENCE_S:g} s gave no whole copy: "
                "try again while nothing is wound"
            )

    with (
        closing(sqlite3.connect(f"{source.absolute().as_uri()}?mode=ro", uri=True, timeout=WAIT_S)) as one,
        closing(sqlite3.connect(target)) as other,
    ):
        one.backup(other, pages=_PAGES, progress=patient, sleep=0.001)
    handle = os.open(target, os.O_RDWR)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)


def _put(half: Path, to: Path, what: str, source: Path, kept: Path | None = None) -> VerifyReport:
    """The verified copy comes to its place, in one step; what was there before is kept under `kept`."""
    with open_book(half, create=False, readonly=True) as copy:
        report = copy.verify()
    if not report.good:
        broken = to.with_name(f"{to.name}.broken")
        half.replace(broken)
        raise RecordBroken(
            f"{what} {source} does not verify ({report.broken[0]}): the copy is {broken}, "
            f"{to} {'is as it was' if to.exists() else 'was not made'}"
        )
    if kept is not None and (writers := written_now(to)):
        half.unlink()
        raise BookError(f"{to} is being written ({', '.join(writers)}): end that first; nothing was changed")
    try:
        if kept is not None:
            _settle(to)
            os.link(to, kept)
        half.replace(to)
    except OSError as error:
        raise BookError(f"{to} cannot be put in its place ({error.strerror}); the copy is {half}") from error
    _sync_folder(to)
    return report


def _settle(book: Path) -> None:
    """What a writer that died left half done in a book is taken back, so that its journal goes; where the
    book is too damaged for that, the journal is put aside: it must never meet the book that comes."""
    with contextlib.suppress(sqlite3.Error), closing(sqlite3.connect(book, timeout=WAIT_S)) as connection:
        connection.execute("BEGIN EXCLUSIVE")
        connection.rollback()
    journal = book.with_name(f"{book.name}-journal")
    if journal.exists():
        journal.replace(book.with_name(f"{_kept(book).name}-journal"))


def _kept(book: Path) -> Path:
    """A name for the book that is replaced, which no file has."""
    kept, n = book.with_name(f"{book.name}.before-restore"), 1
    while kept.exists():
        n += 1
        kept = book.with_name(f"{book.name}.before-restore-{n}")
    return kept


def _sync_folder(path: Path) -> None:
    """The new name is on the disk too, where a folder can be synced."""
    with contextlib.suppress(OSError):
        handle = os.open(path.absolute().parent, os.O_RDONLY)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)
