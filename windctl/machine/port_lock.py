"""One port has one user: a lock file for each port, naming who holds it.

The lock itself is the operating system's (flock, or a locked byte on Windows), so it is gone with its
process, however that ended; the text in the file only names the holder. The file is never removed: removing
it would let two processes lock two different files of the same name.
"""

from __future__ import annotations

import errno
import hashlib
import json
import os
import re
import sys
import tempfile
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path

from windctl.errors import MachineError

# Windows locks bytes against reading, too: lock one far behind the text.
_LOCKED_BYTE = 1 << 30


@dataclass(frozen=True, slots=True)
class Holder:
    """Who uses a port: process number, coil number ("" if none yet), and since when (ISO 8601)."""

    pid: int
    coil: str
    since: str


class PortLock:
    """The lock of one port, held from its making until `release`.

    Raises MachineError naming the holder if another user has it, in this process or in another one.
    """

    def __init__(self, url: str, *, coil: str = "", folder: Path | None = None) -> None:
        folder = lock_folder() if folder is None else folder
        self.path = folder / lock_name(url)
        self._since = datetime.now(UTC).isoformat(timespec="seconds")
        try:
            _make_own(folder)
            self._file = os.open(self.path, os.O_RDWR | os.O_CREAT, 0o600)
        except OSError as error:
            raise MachineError(
                f"cannot lock port {url}: {self.path}: {error.strerror or error}; "
                "that folder has to be this user's and writable"
            ) from error
        try:
            _lock(self._file)
        except OSError as error:
            holder = read_holder(self.path)
            os.close(self._file)
            raise MachineError(_busy(url, holder)) from error
        self._held = True
        self.name_coil(coil)

    def name_coil(self, coil: str) -> None:
        """Say which coil the port is used for, for whoever asks next."""
        if not self._held:
            return
        text = json.dumps({"pid": os.getpid(), "coil": coil, "since": self._since})
        os.lseek(self._file, 0, os.SEEK_SET)
        os.write(self._file, text.encode())
        os.ftruncate(self._file, len(text.encode()))

    def release(self) -> None:
        """Give the port back. Safe to call twice."""
        if not self._held:
            return
        self._held = False
        os.ftruncate(self._file, 0)
        os.close(self._file)  # and with it the lock


def lock_folder() -> Path:
    """A folder of the user's own among the temporary files: the same for every process of this user."""
    folder = Path(tempfile.gettempdir())
    if sys.platform == "win32":  # where they are each user's own already
        return folder / "windctl"
    return folder / f"windctl-{os.getuid()}"


def _make_own(folder: Path) -> None:
    """Make the folder unless it is there. Temporary folders are shared: somebody else's is not trusted."""
    folder.mkdir(mode=0o700, parents=True, exist_ok=True)
    if sys.platform != "win32" and folder.lstat().st_uid != os.getuid():
        raise PermissionError(errno.EPERM, "belongs to another user")


def lock_name(url: str) -> str:
    """A file name for a port; two names of one device (a link to it) give the same."""
    canonical = url if "://" in url else os.path.realpath(url)
    readable = re.sub(r"[^A-Za-z0-9]+", "-", canonical).strip("-")[-40:]
    return f"port-{readable}-{hashlib.sha256(canonical.encode()).hexdigest()[:8]}.lock"


def read_holder(path: Path) -> Holder | None:
    """Whom the lock file names; None if it names nobody, or was just being written."""
    try:
        found = json.loads(path.read_text(encoding="utf-8"))
        return Holder(int(found["pid"]), str(found["coil"]), str(found["since"]))
    except (OSError, ValueError, KeyError, TypeError):
        return None


def holder_of(url: str, folder: Path | None = None) -> Holder | None:
    """Who uses a port now, or None. Asking takes no lock from anybody and leaves no file behind."""
    path = (lock_folder() if folder is None else folder) / lock_name(url)
    try:
        file = os.open(path, os.O_RDWR)
    except OSError:
        return None
    try:
        _lock(file)
    except OSError:
        return read_holder(path)
    finally:
        os.close(file)
    return None


def _busy(url: str, holder: Holder | None) -> str:
    if holder is None:
        return f"port {url} is in use by another windctl process; end that one first"
    work = f" for coil {holder.coil}" if holder.coil else ""
    return (
        f"port {url} is in use by windctl process {holder.pid}{work} since {holder.since}; "
        "one port has one user: end that process first"
    )


if sys.platform == "win32":
    import msvcrt

    def _lock(file: int) -> None:
        os.lseek(file, _LOCKED_BYTE, os.SEEK_SET)
        msvcrt.locking(file, msvcrt.LK_NBLCK, 1)

else:
    import fcntl

    def _lock(file: int) -> None:
        fcntl.flock(file, fcntl.LOCK_EX | fcntl.LOCK_NB)
