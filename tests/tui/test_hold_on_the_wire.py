"""From the hold key to the frame on the line, with the journal blocked and 500 reports a second."""

from __future__ import annotations

import sys
import time
from pathlib import Path

import pytest

from tests.benchmarks.hold import delays
from tests.tui.terminal import journal_blocked, standing, until, winding

pytestmark = pytest.mark.skipif(sys.platform == "win32", reason="platform: no pseudo-terminals")


def test_a_hold_goes_out_whatever_else_is_busy(tmp_path: Path) -> None:
    """Two presses on whatever computer this is, busy with other tests; the long form has the real bound."""
    assert max(delays(tmp_path, 2)) < 1.0


@pytest.mark.long
@pytest.mark.parametrize(
    ("bytes_per_s", "bound_s"), [(None, 0.1), (11_500.0, 0.3)], ids=["fast", "slow line"]
)
def test_200_of_200_in_time(tmp_path: Path, bytes_per_s: float | None, bound_s: float) -> None:
    late = [delay for delay in delays(tmp_path, 200, bytes_per_s) if delay > bound_s]
    assert late == []


def test_without_its_journal_it_is_held_by_itself_and_the_screen_says_so(tmp_path: Path) -> None:
    """Nobody presses anything: after 3 s of facts that are not durable the spindle is asked to stand, and the
    one at the machine reads why."""
    with winding(tmp_path, status_per_s=20.0) as (terminal, line):
        time.sleep(0.5)
        before = len(line.holds)
        with journal_blocked(tmp_path / "a.book"):
            begun = time.monotonic()
            until(lambda: len(line.holds) > before, 8.0, "it was not held")
            late = line.holds[before] - begun
            until(lambda: standing(line), 10.0, "it does not stand")
        assert 2.5 <= late <= 5.0  # 3 s from the first fact that is not written; one is at most 0.5 s old
        until(lambda: "s behind" in terminal.text, 20.0, f"nothing says why: {terminal.text[-3000:]!r}")
