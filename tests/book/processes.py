"""Starting `tests.book.child` and being sure that it is gone afterwards."""

from __future__ import annotations

import subprocess
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

ROOT = Path(__file__).parents[2]


@contextmanager
def child(task: str, path: Path, *arguments: str) -> Iterator[subprocess.Popen[str]]:
    """A process doing `task`; killed at the end of the block if it still runs."""
    command = [sys.executable, "-m", "tests.book.child", task, str(path), *arguments]
    with subprocess.Popen(
        command, cwd=ROOT, stdin=subprocess.PIPE, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True
    ) as process:
        try:
            yield process
        finally:
            process.kill()


def line(process: subprocess.Popen[str]) -> str:
    """The next line that the process says; its complaint when it has ended."""
    assert process.stdout is not None
    said = process.stdout.readline()
    if not said:
        assert process.stderr is not None
        raise AssertionError(f"the process ended: {process.stderr.read()}")
    return said.strip()
