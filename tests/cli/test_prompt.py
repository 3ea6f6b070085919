"""Lines typed at a terminal."""

from __future__ import annotations

import os
import time

import pytest

from windctl.cli.prompt import Prompt

pty = pytest.importorskip("pty", reason="platform: pseudo-terminals are of POSIX")


def waited_for(prompt: Prompt, seconds: float = 5.0) -> str | None:
    """The next line, if it comes in time."""
    until = time.monotonic() + seconds
    while time.monotonic() < until:
        line = prompt.answer()
        if line is not None:
            return line
        time.sleep(0.01)
    return None


def test_on_a_terminal_what_was_typed_ahead_is_thrown_away_and_what_follows_counts() -> None:
    person, terminal = pty.openpty()
    try:
        os.write(person, b"go\n")
        time.sleep(0.1)
        prompt = Prompt(terminal)
        prompt.open_question()
        assert waited_for(prompt, 0.3) is None
        os.write(person, b"  Go \n")
        assert waited_for(prompt) == "Go"
        os.write(person, b"g")
        assert waited_for(prompt, 0.2) is None
        os.write(person, b"o\nend\n")
        assert waited_for(prompt) == "go"
        assert waited_for(prompt) == "end"
        os.write(person, b"go\n")
        time.sleep(0.2)
        prompt.open_question()
        assert waited_for(prompt, 0.3) is None
        os.write(person, b"last\n")
        assert waited_for(prompt) == "last"
    finally:
        os.close(person)
        os.close(terminal)
