"""windctl in tmux: a terminal that draws what it is sent, keys as pressed, text as it stands there."""

from __future__ import annotations

import os
import shlex
import shutil
import subprocess
import sys
import time
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

THERE = shutil.which("tmux") is not None


class Tmux:
    """One window of a tmux server of its own."""

    def __init__(self, folder: Path, size: tuple[int, int]) -> None:
        self._socket = folder / "tmux.socket"
        self.folder = folder
        self.size = size

    def start(self, *arguments: str) -> None:
        """Start windctl there; the window stays when it ends, and shows its exit code."""
        words = shlex.join([sys.executable, "-m", "windctl", *arguments])
        command = f"{words}; printf 'ended with %s\\n' $?; exec sleep 1000"
        across, down = (str(part) for part in self.size)
        environment = {**os.environ, "PYTHONPATH": str(Path(__file__).resolve().parents[2])}
        self._tmux(
            "-f", "/dev/null", "new-session", "-d", "-x", across, "-y", down, command, environment=environment
        )

    def press(self, *keys: str) -> None:
        """Keys by tmux's names; a single character is itself."""
        for key in keys:
            self._tmux("send-keys", *(["-l", key] if len(key) == 1 else [key]))
            time.sleep(0.15 if key == "Escape" else 0.02)

    def type(self, text: str) -> None:
        """A line and Enter."""
        self._tmux("send-keys", "-l", text)
        self.press("Enter")

    @property
    def screen(self) -> str:
        """What stands there now."""
        return self._tmux("capture-pane", "-p")

    def shows(self, *words: str, seconds: float = 60.0) -> str:
        """Wait until one of `words` stands there; which one."""
        end = time.monotonic() + seconds
        while True:
            screen = self.screen
            for word in words:
                if word in screen:
                    return word
            assert time.monotonic() < end, f"none of {words} is shown:\n{screen}"
            time.sleep(0.1)

    def close_terminal(self) -> None:
        """The window is closed, as a terminal's is: what runs in it is told by SIGHUP."""
        self._tmux("kill-server")

    def _tmux(self, *arguments: str, environment: dict[str, str] | None = None) -> str:
        done = subprocess.run(
            ["tmux", "-S", str(self._socket), *arguments],
            cwd=self.folder,
            env=environment,
            capture_output=True,
            text=True,
            timeout=20,
            check=True,
        )
        return done.stdout


@contextmanager
def tmux(folder: Path, size: tuple[int, int] = (80, 24)) -> Iterator[Tmux]:
    """A tmux server, ended afterwards whatever happens."""
    terminal = Tmux(folder, size)
    try:
        yield terminal
    finally:
        subprocess.run(
            ["tmux", "-S", str(folder / "tmux.socket"), "kill-server"],
            capture_output=True,
            timeout=20,
            check=False,
        )
