"""One live writer per coil: a lock file beside the book, held through the operating system.

The lock belongs to the open file, so it ends with the process however that ends: killed, crashed, power lost.
There is nothing to time out and no process number to trust. What is written in the file only serves the
message to whoever comes second.
"""

from __future__ import annotations

import contextlib
import errno
import glob
import os
import sys
from pathlib import Path

from windctl.errors import BookError

if sys.platform == "win32":
    import msvcrt

    _FAR = 1 << 30  # the locked byte lies beyond the text, which stays readable

    def _lock(handle: int) -> None:
        os.lseek(handle, _FAR, os.SEEK_SET)
        msvcrt.locking(handle, msvcrt.LK_NBLCK, 1)

else:
    import fcntl

    def _lock(handle: int) -> None:
        fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)


_TAKEN = (errno.EAGAIN, errno.EACCES, errno.EDEADLK)


class Lease:
    """The right to write one coil, from `take` until `release` or the end of the process."""

    def __init__(self, book: Path, coil_id: str, number: str) -> None:
        self._path = book.with_name(f"{book.name}.{coil_id}.writing")
        self._number = number
        self._handle: int | None = None

    def take(self) -> None:
        """Take it; does nothing where it is held already.

        Raises BookError when another writer is alive, in this process or another, or the file cannot be made.
        """
        if self._handle is None:
            self._handle = _take(self._path, self._number)

    def release(self) -> None:
        """Give it back; a second call does nothing."""
        if self._handle is None:
            return
        handle, self._handle = self._handle, None
        # Removed while still locked, so that nobody else's file is removed. An open file cannot be removed on
        # every platform; one that stays behind is harmless and is taken over by the next writer.
        with contextlib.suppress(OSError):
            self._path.unlink()
        os.close(handle)


def written_now(book: Path) -> list[str]:
    """Who is writing coils into a book at this moment, in words."""
    holders: list[str] = []
    for path in sorted(book.parent.glob(f"{glob.escape(book.name)}.*.writing")):
        try:
            handle = os.open(path, os.O_RDWR)
        except FileNotFoundError:
            continue
        try:
            _lock(handle)
        except OSError:
            holders.append(_holder(handle))
        finally:
            os.close(handle)
    return holders


def _take(path: Path, number: str) -> int:
    while True:
        try:
            handle = os.open(path, os.O_RDWR | os.O_CREAT, 0o666)
        except OSError as error:
            raise BookError(
                f"coil {number} cannot be claimed for writing, {path} cannot be made ({error.strerror}): "
                "allow writing to the book's folder"
            ) from error
        try:
            _lock(handle)
        except OSError as error:
            holder = _holder(handle)
            os.close(handle)
            if error.errno not in _TAKEN:
                raise BookError(
                    f"coil {number} cannot be claimed for writing, the disk of {path} has no locks "
                    f"({error.strerror}): keep the book on a local disk"
                ) from error
            raise BookError(
                f"coil {number} is being written by {holder}: one coil has one writer; "
                "end that run, or wind another coil"
            ) from error
        if _still_there(handle, path):
            os.ftruncate(handle, 0)
            os.lseek(handle, 0, os.SEEK_SET)
            os.write(handle, f"process {os.getpid()}".encode())
            return handle
        os.close(handle)  # the last holder removed the file between our opening and locking it


def _still_there(handle: int, path: Path) -> bool:
    try:
        return os.path.samestat(os.fstat(handle), path.stat())
    except FileNotFoundError:
        return False


def _holder(handle: int) -> str:
    with contextlib.suppress(OSError):
        os.lseek(handle, 0, os.SEEK_SET)
        text = os.read(handle, 100).decode("utf-8", "replace")
        if text:
            return text
    return "another run"
