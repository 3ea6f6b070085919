"""The C core and the virtual machine's board are one: the same outputs in every tick."""

from __future__ import annotations

import ctypes
import sys
from collections.abc import Callable, Iterable
from pathlib import Path

import pytest

from tests.firmware.coverage import missed_lines
from tests.firmware.host_board import load
from tests.firmware.plays import SHORT
from tests.firmware.recording import TICKS, Recorded
from tests.firmware.trace import Trace
from tests.firmware.wild import Reached, wild_ticks
from windctl.protocol import messages as m

LONG_TICKS = 1_000_000
PIECE = 100_000  # ticks played at once


def play(trace: Trace, queue: int = 128) -> tuple[int, int]:
    """The first tick in which the C core differs (-1: none), and how many were played."""
    ticks = ctypes.c_uint32()
    data = bytes(trace.data)
    return load(queue).windctl_play(data, len(data), ctypes.byref(ticks)), ticks.value


def test_every_output_of_every_tick_is_the_same(cc: str, recorded: Recorded) -> None:
    assert play(recorded.trace) == (-1, recorded.trace.ticks)


def test_with_a_short_queue_too(cc: str) -> None:
    trace = Trace()
    wild_ticks(77_000, 40_000, trace, Reached(), queue=16)
    assert play(trace, queue=16) == (-1, trace.ticks)


def test_what_was_compared_is_the_whole_board(recorded: Recorded) -> None:
    reached = recorded.reached
    print(reached.report())
    assert_all(reached.states, m.State)
    assert_all(reached.causes, m.Cause)
    assert_all(reached.trips, m.Trip)
    assert_all(reached.notices, m.NoticeKind)
    assert_all(
        reached.refusals, m.Refusal, but={m.Refusal.NO_SETUP, m.Refusal.NO_DATUM}
    )  # the plays have these
    assert set(reached.readings) >= {0, m.ReadingFlag.TURNING, m.ReadingFlag.OPEN}
    accepted = {command for command, why in reached.answers if why == 0}
    assert accepted == {kind.CODE for kind in m.MESSAGES.values() if kind.CODE < 0x80 and kind.NUMBERED} - {1}
    assert reached.turning_ticks > TICKS // 8


def assert_all(counted: Iterable[int], names: type[m.State], but: Iterable[int] = ()) -> None:
    missing = [name for name in names if name not in counted and name not in but]
    assert not missing


def test_it_ran_through_every_line_of_the_core(
    tool: Callable[[str], str], recorded: Recorded, tmp_path: Path
) -> None:
    tool("gcc")
    if sys.platform != "linux":
        pytest.skip("platform: gcc's own gcov is needed")
    trace = tmp_path / "trace"
    trace.write_bytes(recorded.trace.data)
    missed, total = missed_lines(tmp_path, trace)
    print(f"{total} lines of the core run, {len(missed)} missed")
    print("\n".join(missed))
    assert total > 500
    assert len(missed) <= total // 200  # the plays reach the rare corners, chance the rest


def test_a_recorded_difference_is_found(cc: str) -> None:
    trace = Trace()
    SHORT[0](trace)
    assert play(trace) == (-1, trace.ticks)
    trace.data[-1] ^= 1  # the last tick's last byte out, or its length
    assert play(trace) != (-1, trace.ticks)


@pytest.mark.long
@pytest.mark.timeout(1800)
def test_a_million_random_ticks(cc: str) -> None:
    reached = Reached()
    played = 0
    for piece in range(LONG_TICKS // PIECE):
        trace = Trace()
        wild_ticks(1_000_000 * (piece + 1), PIECE, trace, reached)
        assert play(trace) == (-1, trace.ticks), f"piece {piece}"
        played += trace.ticks
    print(f"{played} random ticks, no difference\n{reached.report()}")
    assert played >= LONG_TICKS
