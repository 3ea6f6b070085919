"""From the hold key to the frame on the line, with the journal blocked and 500 reports a second."""

from __future__ import annotations

import sys
from pathlib import Path

import pytest

from tests.benchmarks.hold import PLACES, delays

pytestmark = pytest.mark.skipif(sys.platform == "win32", reason="platform: no pseudo-terminals")


def test_a_hold_goes_out_whatever_else_is_busy(tmp_path: Path) -> None:
    """Two presses on whatever computer this is, busy with other tests; the long form has the real bound."""
    assert max(delays(tmp_path, 2)) < 1.0


@pytest.mark.long
@pytest.mark.parametrize(
    ("bytes_per_s", "bound_s"), [(None, 0.1), (11_500.0, 0.3)], ids=["fast", "slow line"]
)
def test_200_of_200_in_time(tmp_path: Path, bytes_per_s: float | None, bound_s: float) -> None:
    late = [delay for delay in delays(tmp_path, 25 * len(PLACES), bytes_per_s) if delay > bound_s]
    assert late == []
