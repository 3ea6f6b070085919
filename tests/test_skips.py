"""CI turns a skip that nobody can account for into a failure; this proves it on a session of its own."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

HERE = Path(__file__).parent


def outcome(tmp_path: Path, reason: str, ci: bool, workers: str = "0") -> int:
    """The exit code of pytest over one test that skips itself for `reason`, on so many workers."""
    (tmp_path / "conftest.py").write_text(
        (HERE / "conftest.py").read_text(encoding="utf-8"), encoding="utf-8"
    )
    (tmp_path / "test_it.py").write_text(
        f"import pytest\ndef test_a():\n    pytest.skip({reason!r})\ndef test_b():\n    pass\n",
        encoding="utf-8",
    )
    environment = {**os.environ, "CI": "true" if ci else "", "PYTHONPATH": str(HERE.parent)}
    command = [
        sys.executable,
        "-m",
        "pytest",
        "-q",
        "-p",
        "no:cacheprovider",
        "-c",
        os.devnull,
        "--rootdir",
        ".",
    ]
    done = subprocess.run(
        [*command, "-o", "markers=long", "-n", workers, "test_it.py"],
        cwd=tmp_path, env=environment, capture_output=True, timeout=60, check=False,
    )  # fmt: skip
    return done.returncode


def test_a_skip_for_any_reason_fails_in_ci_only(tmp_path: Path) -> None:
    assert outcome(tmp_path, "not today", ci=True) == 1
    assert outcome(tmp_path, "not today", ci=True, workers="2") == 1
    assert outcome(tmp_path, "not today", ci=False) == 0


def test_a_skip_for_a_documented_reason_may_stand(tmp_path: Path) -> None:
    assert outcome(tmp_path, "platform: no pseudo-terminal", ci=True) == 0
