"""The way in: help that costs next to nothing and still says what the commands say."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

from windctl.cli import entry

ROOT = Path(__file__).parents[2]


def test_the_help_that_was_made_beforehand_is_what_the_commands_say() -> None:
    made = Path(entry.HELP_FILE).read_text(encoding="utf-8")
    assert made == entry.rendered(), "write it anew: python -m windctl.cli.entry"


@pytest.mark.parametrize("asked", ["--help", "-h"])
def test_both_ways_to_ask_print_it(
    asked: str, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(sys, "argv", ["windctl", asked])
    entry.main()
    assert capsys.readouterr().out == Path(entry.HELP_FILE).read_text(encoding="utf-8")


def test_anything_else_goes_to_the_commands(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.setattr(sys, "argv", ["windctl", "--help", "plan"])
    with pytest.raises(SystemExit) as left:
        entry.main()
    assert left.value.code == 0
    assert "Usage: windctl" in capsys.readouterr().out


def test_an_old_terminal_and_a_closed_pipe_are_no_faults() -> None:
    environment = {**os.environ, "PYTHONIOENCODING": "ascii"}
    done = subprocess.run(
        [sys.executable, "-m", "windctl", "--help"],
        capture_output=True,
        env=environment,
        timeout=60,
        check=False,
    )
    assert (done.returncode, done.stderr) == (0, b"")
    read, write = os.pipe()
    os.close(read)
    with os.fdopen(write, "wb") as closed:
        gone = subprocess.run(
            [sys.executable, "-m", "windctl", "--help"],
            stdout=closed,
            stderr=subprocess.PIPE,
            timeout=60,
            check=False,
        )
    assert (gone.returncode, gone.stderr) == (1, b"")
