"""Two workers: what is shared out how, and that the whole suite is run by them and a file is not."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path
from types import SimpleNamespace
from typing import cast

import pytest

from tests.conftest import LONG
from tests.workers import UNITS, WORKERS, unit, wanted

ROOT = Path(__file__).parents[1]


def test_what_is_named_is_there() -> None:
    for path in (path for paths in UNITS.values() for path in paths):
        assert (ROOT / path).exists(), path


def test_no_file_is_parted_and_what_waits_is_together() -> None:
    assert unit("tests/run/test_faults.py::test_a[x::y]") == unit("tests/tui/test_terminal_gone.py::test_b")
    assert unit("tests/firmware/test_chip.py::test_a") == unit("tests/firmware/test_twin.py::test_b")
    assert unit("tests/lay/test_fold.py::test_a[1]") == unit("tests/lay/test_fold.py::test_b")
    assert unit("tests/lay/test_fold.py::test_a") != unit("tests/lay/test_deposit.py::test_a")


def run(folder: Path, *arguments: str) -> str:
    """What pytest says of two files with a test each, with the same plugin."""
    (folder / "pyproject.toml").write_text('[tool.pytest.ini_options]\ntestpaths = ["."]\n', encoding="utf-8")
    for name in ("test_a.py", "test_b.py"):
        (folder / name).write_text("def test_it(): pass\n", encoding="utf-8")
    done = subprocess.run(
        [sys.executable, "-m", "pytest", "-v", "-p", "tests.workers", *arguments],
        cwd=folder, capture_output=True, text=True, timeout=120, check=False,
        env={**os.environ, "PYTHONPATH": str(ROOT), "WINDCTL_LONG": ""},
    )  # fmt: skip
    assert done.returncode == 0, done.stdout + done.stderr
    return done.stdout


@pytest.mark.skipif((os.cpu_count() or 1) < WORKERS, reason="platform: one processor only")
def test_all_of_them_run_on_two_workers_and_a_file_in_one_process(tmp_path: Path) -> None:
    assert "[gw0]" in (said := run(tmp_path)) and "[gw1]" in said and "2 passed" in said
    assert "[gw" not in (said := run(tmp_path, "test_a.py")) and "1 passed" in said


def test_somebody_who_looks_in_gets_one_process() -> None:
    everything = SimpleNamespace(capture="fd", usepdb=False)
    for option, workers in (
        (everything, (os.cpu_count() or 1) >= WORKERS and not LONG),
        (SimpleNamespace(capture="no", usepdb=False), False),
        (SimpleNamespace(capture="fd", usepdb=True), False),
    ):
        config = SimpleNamespace(option=option, args_source=pytest.Config.ArgsSource.TESTPATHS)
        assert wanted(cast("pytest.Config", config)) is workers
