"""The program's own log: for finding faults of the program, not for proving how a coil was made."""

from __future__ import annotations

import logging
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from logging.handlers import RotatingFileHandler
from pathlib import Path

from windctl.desk.places import log_file

_BYTES = 500_000
_FILES = 4


def start_log() -> Path | None:
    """Send what `windctl` loggers say to a rotating file; its path, or None where none can be kept."""
    logger = logging.getLogger("windctl")
    for handler in logger.handlers:
        if isinstance(handler, RotatingFileHandler):
            return Path(handler.baseFilename)
    path = log_file()
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        # Opened at once, so that a folder that refuses is found now and not at the first fault.
        file = RotatingFileHandler(path, maxBytes=_BYTES, backupCount=_FILES - 1, encoding="utf-8")
    except OSError:
        return None
    file.setFormatter(
        logging.Formatter("%(asctime)s %(process)d %(threadName)s %(name)s %(levelname)s %(message)s")
    )
    logger.addHandler(file)
    logger.setLevel(logging.INFO)
    logger.propagate = False
    return path


def note(text: str) -> None:
    """A line about the work: what was begun, on what, and how it ended. Nothing where no log can be kept."""
    if start_log() is not None:
        logging.getLogger("windctl").info(text)


def log_fault(error: BaseException) -> Path | None:
    """Write an unforeseen exception with its traceback to the log; where that is, or None if it cannot be."""
    path = start_log()
    if path is not None:
        logging.getLogger("windctl").error("unforeseen", exc_info=error)
    return path


@contextmanager
def faults_of_threads() -> Iterator[list[Path]]:
    """Unforeseen exceptions of other threads go to the log, not to the screen; the list says where."""
    found: list[Path] = []

    def kept(hook: threading.ExceptHookArgs) -> None:
        path = log_fault(hook.exc_value) if hook.exc_value is not None else None
        if path is not None:
            found.append(path)

    before, threading.excepthook = threading.excepthook, kept
    try:
        yield found
    finally:
        threading.excepthook = before
