"""A host that winds coils after its fashion, talks out of turn, and sends rubbish, all drawn from a seed.

It reads from the board itself what a host would have to wait for, so that it gets deep into every state; what
the core it drives must not do is believe any of it.
"""

from __future__ import annotations

import random
import struct
from dataclasses import replace

from tests.firmware.wild_plant import WildPlant
from windctl.machine.twin import motion
from windctl.machine.twin.board import Board
from windctl.protocol import messages as m
from windctl.protocol.frames import encode
from windctl.protocol.messages import Capability, State

ALL_FITTED = 0x3F
PLAIN = int(Capability.DRIVE_STEP | Capability.GUIDE_STEP | Capability.INDEX | Capability.TENSION)
EDGES = (0, 1, 0x7F, 0x80, 0xFF, 0x7FFF, 0x8000, 0xFFFF, 0x40000000, 0x7FFFFFFF, 0x80000000, 0xFFFFFFFF)


class WildHost:
    """Bytes for a board, a tick at a time, from a host of a temper drawn for it."""

    def __init__(self, rng: random.Random, board: Board, plant: WildPlant) -> None:
        self._rng = rng
        self._board = board
        self._plant = plant
        self._hostility = rng.choice((0.0, 0.02, 0.2))  # share of what it says that is meant to harm
        self._untimely = rng.choice((0.02, 0.02, 0.2))  # share of commands at any time
        self._fickle = rng.choice(
            (0.1, 0.1, 0.5)
        )  # share of moving the guide, measuring, disarming, before Go
        self._dumb = rng.choice((0.001, 0.001, 0.05))  # share of falling silent
        self._wire = bytearray()
        self._speed = rng.choice((3, 11, 11, 60, 1000))  # bytes a tick
        self._wait = 0
        self._beat_in = 0
        self._silent = 0
        self._said: list[bytes] = []
        self._setup = self._draw_setup()
        self._turn = 0  # of laying: which way the guide goes

    def bytes_for_tick(self) -> bytes:
        """What arrives at the board in this tick."""
        self._beat_in -= 1
        if self._silent:
            self._silent -= 1
        elif self._beat_in <= 0:
            self._beat_in = self._rng.choice((100, 500, 500, 1900))
            self._wire += encode(m.Beat.CODE, 0, b"")
        self._wait -= 1
        if self._wait <= 0 and not self._wire and not (self._silent and self._rng.random() < 0.95):
            self._wait = self._rng.choice((1, 1, 1, 5, 20, 60))
            self._act()
        piece = bytes(self._wire[: self._speed])
        del self._wire[: self._speed]
        return piece

    # ---------------------------------------------------------------- what to do next

    def _act(self) -> None:
        rng, board = self._rng, self._board
        draw = rng.random()
        if draw < self._hostility:
            self._harm()
        elif board.dialogue.greeted and draw < self._hostility + self._untimely:
            self._say(self._any_command())
        elif rng.random() < self._dumb:
            self._silent = 2200
        elif not board.dialogue.greeted:
            self._greet()
        else:
            self._in_state(rng, board)

    def _in_state(self, rng: random.Random, board: Board) -> None:
        state = board.state
        if not board.standing and state != State.TURNING and rng.random() < 0.9:
            return
        if state == State.DRIVES_OFF:
            if board.setup is None or rng.random() < 0.05:
                if rng.random() < 0.9:
                    self._setup = self._draw_setup()
                self._say(self._setup)
            elif board.trust != 3 or rng.random() < 0.05:
                self._say(self._datum())
            elif rng.random() < 0.05:
                self._plant.turn_by_hand(rng.randrange(-40, 80), rng.randrange(1, 400))
            elif self._hungry and rng.random() < 0.6:
                self._say(self._lay())
            else:
                self._say(rng.choice((self._measure, self._arm, self._arm, self._arm))())
        elif state in (State.READY, State.HELD):
            self._prepare_to_go(rng, board)
        elif state == State.TURNING:
            self._while_turning(rng, board)
        elif rng.random() < 0.5:
            self._say(self._datum())
        else:
            self._say(m.ClearTrip(*self._consent()))

    def _prepare_to_go(self, rng: random.Random, board: Board) -> None:
        if board.away and rng.random() < 0.9:
            self._say(self._guide_to(board.guide - board.away) if rng.random() < 0.7 else self._datum())
        elif board.spindle.pace == 0 or rng.random() < 0.15:
            self._say(self._pace())
        elif motion.target(board) <= board.count and rng.random() < 0.8:
            further = (
                (self._datum, self._stop_at, self._lay) if self._guided else (self._datum, self._stop_at)
            )
            self._say(rng.choice(further)())
        elif self._hungry and rng.random() < 0.5:
            self._say(self._lay())
        elif rng.random() < 0.2:
            self._say(self._stop_at())
        elif rng.random() < self._fickle:
            other = (self._disarm, self._datum, self._guide_to, self._guide_to, self._measure)
            self._say(rng.choice(other)())
        elif board.fitted & Capability.PEDAL and not board.pedal_fresh and rng.random() < 0.8:
            self._plant.pedal = not self._plant.pedal
            self._wait = 30
        else:
            self._say(m.Go(*self._consent()))
            if not board.fitted & Capability.DRIVE_STEP:
                self._plant.turn_by_hand(rng.choice((1, 16, 100, 300)), rng.choice((50, 1000, 5000)))

    def _while_turning(self, rng: random.Random, board: Board) -> None:
        draw = rng.random()
        if draw < 0.5:
            if self._hungry:
                self._say(self._lay())
        elif draw < 0.6:
            self._say(self._pace())
        elif draw < 0.7:
            self._say(self._stop_at())
        elif draw < 0.75:
            self._say(self._measure())
        elif draw < 0.76:
            self._wire += encode(m.Hold.CODE, rng.getrandbits(8), b"")
        elif draw < 0.765:
            self._plant.pedal = False
        elif draw < 0.82 and not board.fitted & Capability.DRIVE_STEP:
            self._plant.turn_by_hand(rng.choice((-20, 1, 16, 100, 300)), rng.choice((50, 1000, 5000)))

    @property
    def _guided(self) -> bool:
        return bool(self._board.fitted & Capability.GUIDE_STEP)

    @property
    def _hungry(self) -> bool:
        """Whether a Lay makes sense; now and then it is sent without."""
        return self._guided and (self._board.line.free >= m.SEGMENTS_PER_LAY or self._rng.random() < 0.05)

    # ---------------------------------------------------------------- saying it

    def _say(self, message: m.HostMessage) -> None:
        sequence = (self._board.dialogue._sequence + 1) & 0xFF
        self._send(encode(message.CODE, sequence, message.encode_body()))
        if isinstance(message, m.Setup):
            self._plant.counts_per_turn = max(1, message.counts_per_turn)
            self._plant.steps_per_turn = max(1, message.steps_per_turn)

    def _send(self, frame: bytes) -> None:
        self._wire += frame
        self._said.append(frame)
        del self._said[:-40]

    def _greet(self) -> None:
        schema = m.SCHEMA if self._rng.random() < 0.95 else m.SCHEMA ^ 1
        greet = m.Greet(self._rng.choice((1, 2, 3)), schema)
        self._send(b"\0" + encode(m.Greet.CODE, self._rng.getrandbits(8), greet.encode_body()))

    def _harm(self) -> None:
        rng, board = self._rng, self._board
        due = (board.dialogue._sequence + 1) & 0xFF
        kind = rng.randrange(12)
        if kind == 0:
            self._wire += rng.randbytes(rng.randrange(1, 100))
        elif kind == 1:
            self._wire += bytes(rng.choice((0, 1, 2, 3, 0xFF)) for _ in range(rng.randrange(1, 90)))
        elif kind == 2 and self._said:
            damaged = bytearray(rng.choice(self._said))
            damaged[rng.randrange(len(damaged))] ^= 1 << rng.randrange(8)
            self._wire += damaged
        elif kind == 3 and self._said:
            whole = rng.choice(self._said)
            self._wire += whole[: rng.randrange(len(whole))] + rng.choice((b"", b"\0"))
        elif kind == 4 and self._said:
            self._wire += rng.choice(self._said)  # late: its number or its epoch has passed
        elif kind == 5 and self._said:
            self._wire += self._said[-1] * rng.randrange(1, 4)
        elif kind == 6:
            self._wire += encode(rng.getrandbits(8), due, rng.randbytes(rng.randrange(61)))
        elif kind == 7:
            kinds = list(m.MESSAGES.values())
            message = rng.choice(kinds)
            self._wire += encode(message.CODE, due, rng.randbytes(message.SIZE))
        elif kind == 8:
            self._wire += encode(m.Pace.CODE, rng.getrandbits(8), self._pace().encode_body())
        elif kind == 9:
            self._wire += bytes(rng.randrange(1, 256) for _ in range(rng.randrange(60, 75))) + b"\0"
        elif kind == 10:
            self._greet()
            self._wire += self._said[-1] * rng.randrange(5)  # more answers than fit into a tick
        else:
            self._wire += encode(m.Hold.CODE, due, b"")

    # ---------------------------------------------------------------- what to say

    def _consent(self) -> tuple[int, int]:
        board = self._board
        draw = self._rng.random()
        if draw < 0.02:
            return board.boot, (board.epoch - 1) & 0xFFFF
        if draw < 0.03:
            return (board.boot + 1) & 0xFFFF, board.epoch
        return board.boot, board.epoch

    def _any_command(self) -> m.HostMessage:
        rng = self._rng
        draws = (
            self._arm, self._disarm, self._lay, self._pace, self._stop_at, self._guide_to, self._datum,
            self._measure, self._draw_setup,
        )  # fmt: skip
        if rng.random() < 0.2:
            return rng.choice((m.Go, m.ClearTrip))(*self._consent())
        return rng.choice(draws)()

    def _arm(self) -> m.Arm:
        if self._rng.random() < 0.9:
            self._plant.pedal = False
        return m.Arm(*self._consent())

    def _disarm(self) -> m.Disarm:
        return m.Disarm()

    def _draw_setup(self) -> m.Setup:
        rng = self._rng
        decel = rng.choice((100, 500, 3333, 20_000, 65_535, rng.randrange(100, 65_536)))
        counts = rng.choice((400, 400, 100, 24, 2, 1, rng.randrange(1, 401)))
        guide = rng.choice((4000, 4000, 300, 0x7FFFFFFF))
        low = rng.choice((0, 0, 0, 8000, 9990))
        setup = m.Setup(
            coil_token=rng.getrandbits(32),
            counts_per_turn=counts,
            steps_per_turn=rng.choice((400, 400, 200, 800, 1, rng.randrange(1, 801))),
            max_count=rng.choice((1 << 30, 3000 * counts, 3000 * counts, rng.randrange(1, 60 * counts + 2))),
            max_pace=min(15_000, 10 * decel, rng.choice((15_000, 8000, rng.randrange(1, 15_001)))),
            accel=rng.choice((2000, 20_000, 65_535, rng.randrange(100, 65_536))),
            decel=decel,
            guide_min=-guide,
            guide_max=guide,
            slip_counts=rng.choice((20, 20, 3, 0, 1000, 65_535)),
            reverse_counts=rng.choice((40, 3, 0, 1000, 65_535)),
            tension_low=low,
            tension_high=rng.choice((65_535, 65_535, 65_535, 12_000, low + 40)),
            fitted=rng.choice((PLAIN, PLAIN, ALL_FITTED, rng.getrandbits(6))) & self._board.capabilities,
            rotation=rng.getrandbits(1),
        )
        if rng.random() < 0.2:
            field = rng.choice(setup.__slots__)
            value = rng.choice((*EDGES, rng.getrandbits(32)))
            if field.startswith("guide"):
                return replace(setup, **{field: _i32(value)})
            width = {"fitted": 8, "rotation": 8, "coil_token": 32, "max_count": 32}.get(field, 16)
            return replace(setup, **{field: value & ((1 << width) - 1)})
        return setup

    def _datum(self) -> m.SetDatum:
        rng, board = self._rng, self._board
        count = rng.choice((0, 0, board.count, rng.randrange(-5000, 5000)))
        draw = rng.random()
        if draw < 0.06:
            count = rng.choice(((1 << 30) - 500, -(1 << 30), 1 << 30))
        elif draw < 0.1:
            count = rng.choice(((1 << 30) + 1, -(1 << 30) - 1, 0x7FFFFFFF, -0x80000000))
        guide = rng.choice((0, 0, rng.randrange(-250, 251)))
        if rng.random() < 0.1:
            guide = rng.choice((board.guide, self._setup.guide_max, self._setup.guide_min))
        if rng.random() < 0.04:
            guide = rng.choice((self._setup.guide_min - 1, self._setup.guide_max + 1))
        first = rng.choice((0, 0, 500, 0xFFFFFFF0, rng.getrandbits(32)))
        into = rng.choice((0, 0, rng.randrange(1, 400)))
        return m.SetDatum(*self._consent(), rng.choice((7, 7, 8)), count, _i32(guide), first, into)

    def _lay(self) -> m.Lay:
        rng, board = self._rng, self._board
        counts = board.counts_per_turn
        n = m.SEGMENTS_PER_LAY if rng.random() < 0.7 else rng.randrange(1, 13)
        n = max(1, min(n, board.line.free)) if rng.random() < 0.95 else n
        long = rng.choice((1, 5, counts, counts, 2 * counts, 2 * counts, 65_535))
        packed = b""
        for _ in range(n):
            length = max(1, min(65_535, long + rng.randrange(-3, 4)))
            most = min(length, rng.choice((3, 44, 44, 32_000)))
            if rng.random() < 0.1:
                self._turn ^= 1
            if abs(board.guide) > 200 and rng.random() < 0.9:
                self._turn = int(board.guide > 0)
            steps = rng.randrange(most + 1)
            packed += struct.pack("<Hh", length, -steps if self._turn else steps)
        if rng.random() < 0.03:
            bad = rng.randrange(n)
            wrong = struct.pack("<Hh", *rng.choice(((0, 0), (5, 6), (5, -6), (0x7FFF, -0x8000))))
            packed = packed[: 4 * bad] + wrong + packed[4 * bad + 4 :]
        program, first = board.line.program, board.line.next
        if rng.random() < 0.02:
            program ^= 1
        if rng.random() < 0.02:
            first = (first + rng.choice((-1, 1))) & 0xFFFFFFFF
        if rng.random() < 0.02:
            n = rng.choice((0, 13, 255))
        return m.Lay(program, first, n, packed.ljust(48, b"\xaa"))

    def _pace(self) -> m.Pace:
        rng = self._rng
        most = self._setup.max_pace
        pace = rng.choice((most, most, max(1, most // 2), rng.randrange(1, most + 2)))
        if rng.random() < 0.1:
            pace = rng.choice((0, most + 1, 0xFFFF))
        return m.Pace(*self._consent(), min(pace, 0xFFFF))

    def _stop_at(self) -> m.StopAt:
        rng, board = self._rng, self._board
        near = board.count + rng.randrange(40 * board.counts_per_turn)
        count = rng.choice((near, near, near, 0xFFFFFFFF))
        if rng.random() < 0.2:
            close = board.count + rng.randrange(-50, 500)
            count = rng.choice((0, close, close, self._setup.max_count, self._setup.max_count + 1))
        return m.StopAt(*self._consent(), count & 0xFFFFFFFF)

    def _guide_to(self, guide: int | None = None) -> m.GuideTo:
        rng = self._rng
        if guide is None:
            low, high = self._setup.guide_min, self._setup.guide_max
            near = self._board.guide + rng.randrange(-300, 301)
            guide = rng.choice((0, near, near, low, high, low - 1, high + 1))
        return m.GuideTo(*self._consent(), _i32(guide), rng.choice((1000, 4000, 4000, 1, 0, 4001)))

    def _measure(self) -> m.Measure:
        rng = self._rng
        window = rng.choice((100, 100, 300, 600, 6000, 0, 6100, 150))
        return m.Measure(window, rng.choice((0, 0, 100, 700, 65_535)))


def _i32(value: int) -> int:
    return ((value + 0x80000000) & 0xFFFFFFFF) - 0x80000000
