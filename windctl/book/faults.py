"""SQLite's errors in the operator's words: what was asked, what stood in the way, what to do."""

from __future__ import annotations

import sqlite3
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path

import sqlalchemy as sa

from windctl.errors import BookError

_PRIMARY = 0xFF  # an extended result code holds the primary one in its low byte

_SAY: dict[int, Callable[[Path, float], str]] = {
    sqlite3.SQLITE_BUSY: lambda path, wait_s: (
        f"another program kept the coil book {path} locked for more than {wait_s:g} s: "
        "close what else has it open (a database viewer, a backup or sync program) and try again"
    ),
    sqlite3.SQLITE_READONLY: lambda path, _: (
        f"the coil book {path} is read only here: allow writing to the file and its folder, "
        "or choose another book with --book"
    ),
    sqlite3.SQLITE_FULL: lambda path, _: (
        f"the disk that holds the coil book {path} is full: free some space and try again; "
        "all that was recorded before is safe"
    ),
    sqlite3.SQLITE_NOTADB: lambda path, _: (
        f"{path} is not a coil book: choose another file with --book; nothing was changed in it"
    ),
    sqlite3.SQLITE_CORRUPT: lambda path, _: (
        f"the coil book {path} is damaged: keep a copy of it as it is, then go back to the newest backup"
    ),
    sqlite3.SQLITE_CANTOPEN: lambda path, _: (
        f"the coil book {path} cannot be opened: check that the file and its folder may be read and written"
    ),
    sqlite3.SQLITE_PERM: lambda path, _: (
        f"this user may not use the coil book {path}: check the permissions of the file and its folder"
    ),
    sqlite3.SQLITE_IOERR: lambda path, _: (
        f"the disk that holds the coil book {path} failed to read or write: check it before winding on"
    ),
}
_SAY[sqlite3.SQLITE_LOCKED] = _SAY[sqlite3.SQLITE_BUSY]
_SAY[sqlite3.SQLITE_AUTH] = _SAY[sqlite3.SQLITE_PERM]


def said(error: sa.exc.SQLAlchemyError | sqlite3.Error, path: Path, wait_s: float) -> BookError:
    """The BookError that says what `error`, met at the book at `path`, means to the operator."""
    cause = error.orig if isinstance(error, sa.exc.DBAPIError) else error
    code = getattr(cause, "sqlite_errorcode", None)
    say = _SAY.get(code & _PRIMARY) if isinstance(code, int) else None
    detail = str(cause).strip() or type(cause).__name__
    if say is None:
        return BookError(f"the coil book {path} could not be used: {detail}; keep the file as it is")
    return BookError(f"{say(path, wait_s)} ({detail})")


@contextmanager
def told(path: Path, wait_s: float) -> Iterator[None]:
    """Whatever SQLite or SQLAlchemy raises inside comes out as a BookError."""
    try:
        yield
    except (sa.exc.SQLAlchemyError, sqlite3.Error) as error:
        raise said(error, path, wait_s) from error
    except UnicodeDecodeError as error:  # of SQLite's own complaint, which quotes a damaged name
        raise BookError(_SAY[sqlite3.SQLITE_CORRUPT](path, wait_s)) from error
