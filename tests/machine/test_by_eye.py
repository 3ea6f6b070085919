"""The port of a bench without a board: a twin on the computer's clock that makes up for the time it was not
read."""

from __future__ import annotations

import pytest

from windctl.errors import LinkLost
from windctl.machine.by_eye import ByEyePort
from windctl.protocol.conversation import Conversation
from windctl.protocol.messages import Capability, Setup, State, Status
from windctl.protocol.wants import Datum, Wants

SETUP = Setup(
    coil_token=7,
    counts_per_turn=1,
    steps_per_turn=1,
    max_count=8000,
    max_pace=15,
    accel=100,
    decel=100,
    guide_min=0,
    guide_max=0,
    slip_counts=2,
    reverse_counts=2,
    tension_low=0,
    tension_high=0xFFFF,
    fitted=0,
    rotation=0,
)


class Clock:
    """A clock that only sleeping moves on."""

    def __init__(self) -> None:
        self.s = 100.0

    def now(self) -> float:
        return self.s

    def sleep(self, seconds: float) -> None:
        self.s += seconds


def test_it_speaks_twenty_times_a_second_however_seldom_it_is_read() -> None:
    clock = Clock()
    port = ByEyePort(clock.now, clock.sleep)
    talk = Conversation(lambda: 1)
    heard: list[Status] = []
    for _ in range(40):
        messages = talk.receive(port.read(0.05), port.now())
        heard += [message for message in messages if isinstance(message, Status)]
        port.write(talk.advance(Wants(beat=True), port.now()))
    assert clock.s == pytest.approx(102.0)
    assert 38 <= len(heard) <= 42
    assert [status.ticks for status in heard] == sorted({status.ticks for status in heard})
    assert heard[-1].ticks == pytest.approx(2000, abs=50)


def test_it_is_told_where_the_coil_stands_also_beyond_its_end_and_has_nothing_that_could_turn() -> None:
    clock = Clock()
    port = ByEyePort(clock.now, clock.sleep)
    talk = Conversation(lambda: 1)
    status: Status | None = None
    for _ in range(40):
        for message in talk.receive(port.read(0.05), port.now()):
            status = message if isinstance(message, Status) else status
        permission = talk.board.permission
        datum = None if permission is None else Datum(8010, 0, 0, 0, permission)
        port.write(talk.advance(Wants(beat=True, setup=SETUP, datum=datum, pace=15), port.now()))
    assert status is not None
    assert (status.count, status.state) == (8010, State.DRIVES_OFF)
    identity = talk.board.identity
    assert identity is not None
    assert identity.capabilities == Capability(0)  # neither simulated nor fitted with anything
    assert talk.counters.refused == 0


def test_an_hour_in_which_nobody_read_it_is_not_made_up_for() -> None:
    """A computer that slept would be busy for seconds otherwise."""
    clock = Clock()
    port = ByEyePort(clock.now, clock.sleep)
    clock.s += 3600.0
    assert len(port.read(0.0)) < 20 * 64
    assert port.read(0.0) == b""


def test_what_is_closed_says_so() -> None:
    port = ByEyePort()
    port.close()
    port.close()
    with pytest.raises(LinkLost):
        port.read(0.0)
    with pytest.raises(LinkLost):
        port.write(b"x")
