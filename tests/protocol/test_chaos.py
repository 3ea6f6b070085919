"""Conversation and virtual board over a line that loses, flips, repeats and delays a fifth of all frames."""

from __future__ import annotations

from collections import Counter
from dataclasses import replace
from random import Random

import pytest

from windctl.machine.twin.signals import ALL_OK, GUARD_OK
from windctl.protocol.frames import FrameReader, encode
from windctl.protocol.messages import (
    MESSAGES,
    SCHEMA,
    Accepted,
    Arm,
    BoardMessage,
    ClearTrip,
    Go,
    Greet,
    GuideTo,
    Hold,
    HostMessage,
    Lay,
    Pace,
    Refusal,
    Refused,
    SetDatum,
    State,
    StopAt,
    decode,
)

from .chaos import PROGRAM_ID, Chances, Machine, Operator, Program, wind

QUIET = Chances(lost=0, flipped=0, repeated=0, delayed=0, hold=0, silence=0, reboot=0)


def many(seeds: range, chances: Chances) -> Counter[str]:
    """All of it together, printed: `pytest -s` or a failure shows what befell."""
    total: Counter[str] = Counter()
    for seed in seeds:
        try:
            total += wind(seed, chances)
        except AssertionError as error:
            raise AssertionError(f"with seed {seed}: {error}") from error
    print("; ".join(f"{what} {n}" for what, n in sorted(total.items())))
    return total


def test_over_a_good_line_nothing_is_sent_twice() -> None:
    total = many(range(4), QUIET)
    assert total["coils"] == 4
    assert total["retries"] == 0
    assert total["go sent"] == total["starts"]


def test_a_coil_is_wound_whole_and_nothing_moves_that_must_not() -> None:
    total = many(range(12), Chances())
    assert total["coils"] == 12
    assert total["starts"] >= 12
    for befell in ("lost", "flipped", "repeated", "delayed"):
        assert 0.15 < total[befell] / total["frames"] < 0.3


@pytest.mark.parametrize("only", ["lost", "flipped", "repeated", "delayed"])
def test_each_kind_of_damage_alone(only: str) -> None:
    chances = replace(
        {
            "lost": replace(QUIET, lost=0.2),
            "flipped": replace(QUIET, flipped=0.2),
            "repeated": replace(QUIET, repeated=0.2),
            "delayed": replace(QUIET, delayed=0.2),
        }[only],
        hold=0.4,
    )
    total = many(range(100, 102), chances)
    assert total["coils"] == 2
    assert total[only] > 0


@pytest.mark.long
@pytest.mark.timeout(1200)
def test_two_hundred_coils() -> None:
    total = many(range(1000, 1200), Chances())
    assert total["coils"] == 200
    assert total["reboots"] > 20


# ---------------------------------------------------------------- one command, late


class Hand:
    """Speaks to the board frame by frame over a perfect line, numbering as a host does."""

    def __init__(self) -> None:
        self.machine = Machine(Program(Random(5)), queue=64)
        self.board = self.machine.board
        self.sequence = 0
        self.reader = FrameReader()

    def wait(self, ticks: int, data: bytes = b"") -> list[BoardMessage]:
        """Let time pass; what the board said."""
        said = self.machine.step(data)
        for _ in range(ticks - 1):
            said += self.machine.step(b"")
        answers = [decode(frame.code, frame.body) for frame in self.reader.feed(said)]
        return [message for message in answers if isinstance(message, Accepted | Refused)]

    def frame(self, command: HostMessage) -> bytes:
        """The next numbered frame."""
        self.sequence = (self.sequence + 1) & 0xFF
        return encode(command.CODE, self.sequence, command.encode_body())

    def do(self, command: HostMessage) -> None:
        """A command that has to be accepted."""
        answers = self.wait(100, self.frame(command))
        assert [type(answer) for answer in answers] == [Accepted], (command, answers)

    def at(self, state: State) -> None:
        """Bring the board into this state."""
        machine, board = self.machine, self.board
        greet = Greet(77, SCHEMA)
        self.wait(100, encode(greet.CODE, self.sequence, greet.encode_body()))
        self.do(Operator(machine, Random(0), QUIET).setup)
        self.do(SetDatum(board.boot, board.epoch, PROGRAM_ID, 0, 0, 0, 0))
        packed = machine.program.wire.packed
        for first in (0, 12, 24):
            self.do(Lay(PROGRAM_ID, first, 12, packed[4 * first : 4 * (first + 12)]))
        if state == State.DRIVES_OFF:
            return
        self.do(Arm(board.boot, board.epoch))
        self.do(Pace(board.boot, board.epoch, 500))
        self.do(StopAt(board.boot, board.epoch, 900))
        if state == State.TRIPPED:
            machine.inputs.pins = ALL_OK & ~GUARD_OK
            self.wait(200)
            machine.inputs.pins = ALL_OK
        if state == State.TURNING:
            machine.consents.add((board.boot, board.epoch))
            self.do(Go(board.boot, board.epoch))
        assert board.state == state


def late(kind: type[HostMessage], boot: int, epoch: int) -> HostMessage:
    """A command of this kind that would move something or widen a limit."""
    further: dict[type[HostMessage], HostMessage] = {
        Arm: Arm(boot, epoch),
        Go: Go(boot, epoch),
        ClearTrip: ClearTrip(boot, epoch),
        Pace: Pace(boot, epoch, 3000),
        StopAt: StopAt(boot, epoch, 2000),
        GuideTo: GuideTo(boot, epoch, 100, 200),
        SetDatum: SetDatum(boot, epoch, PROGRAM_ID, 40, 3, 0, 40),
    }
    return further[kind]


LATE = [
    (Arm, State.DRIVES_OFF),
    (SetDatum, State.DRIVES_OFF),
    (Go, State.READY),
    (GuideTo, State.READY),
    (SetDatum, State.READY),
    (Pace, State.READY),
    (StopAt, State.READY),
    (Pace, State.TURNING),
    (StopAt, State.TURNING),
    (ClearTrip, State.TRIPPED),
]
EVERY_MOVE = {Arm, Go, ClearTrip, Pace, StopAt, GuideTo, SetDatum}


def test_the_list_of_late_commands_is_complete() -> None:
    assert {kind for kind, _ in LATE} == EVERY_MOVE
    assert {kind for kind in MESSAGES.values() if getattr(kind, "MOVES", False)} == EVERY_MOVE


@pytest.mark.parametrize(("kind", "state"), LATE, ids=lambda value: getattr(value, "NAME", str(value)))
def test_a_command_that_arrives_after_a_hold_moves_nothing(kind: type[HostMessage], state: State) -> None:
    hand = Hand()
    hand.at(state)
    board, machine = hand.board, hand.machine
    frame = hand.frame(late(kind, board.boot, board.epoch))  # said before the hold
    hand.wait(1500, encode(Hold.CODE, 0, b""))
    before = (board.state, board.stop_point, board.count, board.guide, machine.position, machine.guide)
    powered = (machine.outputs.drive_enable, machine.outputs.guide_enable)
    pace = board.spindle.pace
    answers = hand.wait(3000, frame)
    assert [answer.why for answer in answers if isinstance(answer, Refused)] == [Refusal.STALE]
    assert (
        board.state,
        board.stop_point,
        board.count,
        board.guide,
        machine.position,
        machine.guide,
    ) == before
    assert (machine.outputs.drive_enable, machine.outputs.guide_enable) == powered
    assert board.spindle.pace == pace
    assert machine.outputs.rate == 0


@pytest.mark.parametrize(("kind", "state"), LATE, ids=lambda value: getattr(value, "NAME", str(value)))
def test_the_same_command_without_a_hold_before_it_is_done(kind: type[HostMessage], state: State) -> None:
    hand = Hand()
    hand.at(state)
    board, machine = hand.board, hand.machine
    machine.watched = False
    answers = hand.wait(2, hand.frame(late(kind, board.boot, board.epoch)))
    assert [type(answer) for answer in answers] == [Accepted]
