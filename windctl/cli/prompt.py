"""Questions to the person at the terminal while a run goes on: answered by a line, never waited for."""

from __future__ import annotations

import os
import queue
import threading
from collections.abc import Callable


class Prompt:
    """Lines typed at a terminal, looked for without waiting.

    What was typed before a question was asked answers nothing. Reading is left to a thread, which Windows
    needs, and which may still sit in its read when the program ends.
    """

    def __init__(self, descriptor: int, discard: Callable[[int], None] | None = None) -> None:
        self._descriptor = descriptor
        self._discard = discard or _discard_typed_ahead
        self._lines: queue.SimpleQueue[str] = queue.SimpleQueue()
        self._thread: threading.Thread | None = None

    def open_question(self) -> None:
        """From now on lines count: whatever was typed before is thrown away."""
        if self._thread is None:
            self._discard(self._descriptor)
            self._thread = threading.Thread(target=self._read, name="windctl-keyboard", daemon=True)
            self._thread.start()
        while self.answer() is not None:
            continue

    def answer(self) -> str | None:
        """The next line typed, without blanks around it; None if there is none yet."""
        try:
            return self._lines.get_nowait()
        except queue.Empty:
            return None

    def _read(self) -> None:
        """os.read, not sys.stdin: a buffered reader that is still read from cannot be shut down at exit."""
        rest = b""
        while True:
            try:
                data = os.read(self._descriptor, 1024)
            except OSError:
                return
            if not data:
                return
            *lines, rest = (rest + data).split(b"\n")
            for line in lines:
                self._lines.put(line.decode(errors="replace").strip())


def _discard_typed_ahead(descriptor: int) -> None:
    try:
        import termios
    except ImportError:  # Windows keeps no such queue that could be emptied
        return
    try:
        termios.tcflush(descriptor, termios.TCIFLUSH)
    except termios.error:
        return  # not a terminal
