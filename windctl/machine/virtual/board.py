"""The board: what the firmware's core does, tick for tick, in plain integers.

`tick` is called once a millisecond. What it does is specified in firmware_protocol/README.md; a core in
another language is right if it gives the same outputs for the same inputs. So everything here is
arithmetic that C has: each field's width stands beside it, a quiet tick divides nothing, and no number
leaves its width. Order within a tick: inputs, commands, motion, guide, checks, messages.
"""

from __future__ import annotations

from typing import Final

from windctl.machine.virtual import board_reports, board_watch
from windctl.machine.virtual.board_dialogue import Dialogue
from windctl.machine.virtual.board_rules import (
    CHECK_EVERY,
    NO_STOP_POINT,
    SILENCE,
    STATUS_EVERY,
    STILL,
    still_ticks,
)
from windctl.machine.virtual.board_spindle import BRAKE, REST, RUN, SETTLE, Spindle
from windctl.machine.virtual.contact_mean import ContactMean
from windctl.machine.virtual.guide_line import GuideLine
from windctl.machine.virtual.signals import (
    ALL_OK,
    GUIDE_HIGH_OK,
    GUIDE_LOW_OK,
    Inputs,
    Outputs,
)
from windctl.machine.virtual.turns import Turns
from windctl.protocol.messages import (
    TRIPS,
    Capability,
    Cause,
    Notice,
    NoticeKind,
    Setup,
    State,
    Trip,
    Trust,
)

EVERYTHING: Final = int(
    Capability.DRIVE_STEP
    | Capability.GUIDE_STEP
    | Capability.INDEX
    | Capability.CONTACT
    | Capability.TENSION
    | Capability.PEDAL
    | Capability.THERMOMETER
    | Capability.VIRTUAL
)
GUIDE_OK: Final = GUIDE_LOW_OK | GUIDE_HIGH_OK
M32: Final = 0xFFFFFFFF

# The states, causes and bits that are used every tick, as the plain integers they are.
DRIVES_OFF, READY, TURNING, HELD, TRIPPED = (int(state) for state in State)
FITTED_DRIVE = int(Capability.DRIVE_STEP)
FITTED_GUIDE = int(Capability.GUIDE_STEP)
FITTED_INDEX = int(Capability.INDEX)
FITTED_TENSION = int(Capability.TENSION)
FITTED_PEDAL = int(Capability.PEDAL)
KNOWN: Final = int(Trust.COUNT | Trust.GUIDE)


class Board:
    """One board. `capabilities`, `queue` and the scales are those of its Identity."""

    __slots__ = (
        "_boot_told",
        "_hand_stop_told",
        "_off_at",
        "_settled_cause",
        "_status_at",
        "_status_due",
        "_still_at",
        "away",
        "boot",
        "capabilities",
        "cause",
        "check_at",
        "contact_scale",
        "count",
        "counts_per_turn",
        "dialogue",
        "epoch",
        "fitted",
        "guide",
        "guide_pace",
        "guide_ramp",
        "guide_target",
        "line",
        "mean",
        "over_counts",
        "pedal_at",
        "pedal_fresh",
        "pins",
        "powered",
        "queue",
        "rotation",
        "seen_count",
        "setup",
        "setup_crc",
        "silent_at",
        "slip_limit",
        "speed",
        "spindle",
        "spindle_moves",
        "standing",
        "state",
        "still_ticks",
        "stop_point",
        "tension_scale",
        "ticks",
        "trip",
        "trust",
        "turns",
        "went_back",
    )

    def __init__(
        self,
        capabilities: int = EVERYTHING,
        queue: int = 128,
        boot_number: int = 1,
        contact_scale: int = 250,
        tension_scale: int = 10,
    ) -> None:
        self.capabilities = capabilities  # u8
        self.queue = queue  # u16
        self.contact_scale = contact_scale  # u16, milliohm per unit
        self.tension_scale = tension_scale  # u16, 0.0001 cN per unit
        self._start(boot_number)

    def reboot(self) -> None:
        """A power cycle: everything is forgotten but the boot number, which is one more."""
        self._start((self.boot + 1) & 0xFFFF)

    def _start(self, boot_number: int) -> None:
        self.ticks = 0  # u32, wraps
        self.boot = boot_number  # u16, wraps
        self.epoch = 0  # u16, wraps
        self.state: int = DRIVES_OFF  # u8
        self.cause: int = Cause.BOOT  # u8
        self.trip: int = Trip.NONE  # u8
        self.trust = 0  # u8
        self.pins = ALL_OK  # u8, as of the last tick
        # the conversation
        self.dialogue = Dialogue()
        self._boot_told = False
        self._status_at = STATUS_EVERY
        self.check_at = CHECK_EVERY
        self._status_due = True
        self.silent_at = 0  # tick
        # the coil's limits
        self.setup: Setup | None = None
        self.setup_crc = 0  # u16
        self.fitted = 0  # u8
        self.rotation = 0  # u8
        self.counts_per_turn = 1  # u16
        self.stop_point = NO_STOP_POINT  # u32
        self.slip_limit = 0  # u32, in 1/steps_per_turn count
        self.over_counts = 0  # u32, counts in 64 ticks that are too fast
        # the spindle
        self.spindle = Spindle()
        self.powered = False
        self._off_at = 0  # tick at which a tripped board's drives go off
        self.count = 0  # i32
        self.seen_count = 0  # i32, at the last check
        self.speed = 0  # u16, counts/s over the last 64 ticks
        self.standing = True  # spindle and guide are at rest
        self.spindle_moves = False
        self.still_ticks = STILL  # u16
        self._still_at = 0  # tick
        self._settled_cause: int = Cause.NONE
        self._hand_stop_told = False
        self.went_back = 0  # u32, counts below the furthest since Go
        self.turns = Turns()
        # the guide
        self.line = GuideLine(self.queue)
        self.guide = 0  # i32, steps
        self.away = 0  # i32, steps that GuideTo brought it from its line
        self.guide_pace = 0  # u16, steps/s of GuideTo; 0: none
        self.guide_target = 0  # i32
        self.guide_ramp = 0  # u16, thousandths of a step owed
        # inputs of people
        self.pedal_fresh = False  # pressed since the last stop, and not let go
        self.pedal_at = 0  # tick at which a press counts
        self.mean = ContactMean()

    # ------------------------------------------------------------ the tick

    def tick(self, inputs: Inputs, outputs: Outputs) -> None:
        """One millisecond."""
        self.ticks = ticks = (self.ticks + 1) & M32
        spindle = self.spindle
        turns = self.turns
        counted = inputs.count_delta
        count = self.count
        if counted:
            self.count = count = count + counted
            if counted < 0 or count >= turns.end or self.went_back or spindle.mode != RUN:
                board_watch.counted(self, counted)
        if inputs.pins != self.pins:
            board_watch.pins_changed(self, inputs.pins)
        if inputs.index:
            board_watch.index_seen(self, counted)
        if inputs.received:
            self.dialogue.hear(self, inputs.received)
            count = self.count
        guide_steps = 0
        mode = spindle.mode
        if mode == RUN:
            spindle.step(inputs.steps_issued, count)
            if spindle.mode != RUN:
                self._arrived()
            if counted and self.fitted & FITTED_GUIDE:
                guide_steps = self.line.follow(counted)
        elif mode == BRAKE:
            spindle.step(inputs.steps_issued, count)
            if spindle.mode == REST:
                self._rests()
            if ticks == self.pedal_at:
                board_watch.pedal_pressed(self)
            if counted and self.fitted & FITTED_GUIDE:
                if self.trip == Trip.GUIDE_LIMIT:
                    self.line.wait(counted)
                else:
                    guide_steps = self.line.follow(counted)
        else:
            guide_steps = self._at_rest(counted)
        if guide_steps:
            guide_steps = self._guide_moved(guide_steps)
        turns.tension_sum += inputs.tension
        if ticks == self.check_at:
            board_watch.check(self)
        if ticks == self.silent_at:
            board_watch.silence(self)
        if self._status_due or ticks == self._status_at:
            self._tell_status(inputs.celsius_centi)
        if self.mean.active and self.mean.sample(inputs.contact, ticks, count, self.spindle_moves):
            self.dialogue.tell(board_reports.reading(self, inputs.celsius_centi))
        outputs.sent = self.dialogue.out
        self.dialogue.out = b""
        outputs.rate = spindle.v
        outputs.guide_steps = guide_steps
        outputs.rotation = self.rotation
        outputs.drive_enable = 1 if self.powered and self.fitted & FITTED_DRIVE else 0
        outputs.guide_enable = 1 if self.powered and self.fitted & FITTED_GUIDE else 0

    # ------------------------------------------------------------ what commands and inputs do to the motion

    def target(self) -> int:
        """The nearest of stop point, queue end (if a guide is fitted) and hard limit; never passed."""
        setup = self.setup
        assert setup is not None  # nothing asks before a Setup
        nearest = setup.max_count
        if self.stop_point < nearest:
            nearest = self.stop_point
        if self.fitted & FITTED_GUIDE and self.line.end < nearest:
            nearest = self.line.end
        return nearest

    def aim(self) -> None:
        """The target may have moved: a running spindle is told."""
        if self.spindle.mode == RUN:
            self.spindle.aim(self.count, self.target())

    def set_up(self, setup: Setup, crc: int) -> None:
        """Take another Setup: place, program, pace and stop point are void."""
        self.setup = setup
        self.setup_crc = crc
        self.fitted = setup.fitted
        self.rotation = setup.rotation
        self.counts_per_turn = setup.counts_per_turn
        self.mean.counts_per_turn = setup.counts_per_turn
        driven = bool(setup.fitted & FITTED_DRIVE)
        self.still_ticks = still_ticks(driven, setup.counts_per_turn)
        self.slip_limit = setup.slip_counts * setup.steps_per_turn
        # 64 ticks at 5/4 of max_pace: max_pace * counts_per_turn * (64 * 5 / 4) / (1000 * steps_per_turn)
        self.over_counts = setup.max_pace * setup.counts_per_turn * 80 // (1000 * setup.steps_per_turn)
        self.spindle.configure(setup.counts_per_turn, setup.steps_per_turn, setup.accel, setup.decel)
        self.stop_point = NO_STOP_POINT
        self.trust = 0
        self.line.datum(0, self.count, 0, 0)
        self.away = 0
        self.pedal_fresh = False
        self.turns.configure(setup.counts_per_turn, self.count)

    def set_datum(self, program: int, count: int, guide: int, first: int, into: int) -> None:
        """The host declares where the machine stands."""
        moved = count - self.count
        self.count = count
        self.turns.move(moved)
        self.seen_count += moved
        self.guide = guide
        self.away = 0
        self.line.datum(program, count, first, into)
        self.trust = KNOWN
        self.stop_point = NO_STOP_POINT

    def go(self) -> None:
        """Ready or held to turning."""
        self.state = TURNING
        self.cause = Cause.NONE
        self._status_due = True
        self.moves()
        self.silent_at = (self.ticks + SILENCE) & M32
        self.pedal_fresh = False
        self._hand_stop_told = False
        self.went_back = 0
        self.turns.start(self.ticks, self.count)
        self.seen_count = self.count
        if self.fitted & FITTED_DRIVE:
            self.spindle.set_out(self.count, self.target())

    def guide_to(self, guide: int, pace: int) -> None:
        """Start to move the guide, the spindle standing."""
        self.guide_target = guide
        self.guide_pace = pace
        self.guide_ramp = 0
        self.silent_at = (self.ticks + SILENCE) & M32
        self._not_standing()

    def hold(self, cause: int) -> None:
        """Stop under control and stay powered; also ends a GuideTo. Raises the epoch in every state."""
        self.raise_epoch()
        self.guide_pace = 0
        self.pedal_fresh = False
        if self.state == TURNING:
            self.state = HELD
            self.cause = cause
            self._brake(at_once=False)

    def enter(self, state: int, cause: int) -> None:
        """Change to a state in which nothing is driven."""
        self.state = state
        self.cause = cause
        self.powered = state in (READY, HELD)
        self.raise_epoch()

    def raise_epoch(self) -> None:
        """Every permission given before is void; the host hears of it at once."""
        self.epoch = (self.epoch + 1) & 0xFFFF
        self._status_due = True

    def stop_for(self, trip: int) -> None:
        rule = TRIPS[trip]
        if self.state == TRIPPED and (rule.category != 0 or TRIPS[self.trip].category == 0):
            return  # already stopping; only removed power overrides that
        self.state = TRIPPED
        self.cause = Cause.TRIP
        self.trip = trip
        if not rule.count:
            self.trust &= ~Trust.COUNT
        if not rule.guide:
            self.trust &= ~Trust.GUIDE
        self.guide_pace = 0
        self.pedal_fresh = False
        self.raise_epoch()
        self.notice(NoticeKind.TRIPPED, trip, self.count)
        if rule.category == 0:
            self.powered = False
            self._brake(at_once=True)
        elif self.spindle.mode == REST:
            self.powered = False
        else:
            self._brake(at_once=False)

    def _brake(self, at_once: bool) -> None:
        if self.spindle.mode != REST:
            if at_once:
                self.spindle.cut()
            else:
                self.spindle.brake()
            if self.spindle.mode == REST:
                self._rests()

    def _rests(self) -> None:
        """No more steps are issued; the spindle stands when counts have stayed away for a while."""
        self.moves()
        self._off_at = (self.ticks + STILL) & M32

    def moves(self) -> None:
        """The spindle moves, or may be about to."""
        self.spindle_moves = True
        self._not_standing()

    def _not_standing(self) -> None:
        self.standing = False
        self._still_at = (self.ticks + self.still_ticks) & M32

    def _arrived(self) -> None:
        """The last step before the target is out."""
        goal = self.spindle.goal
        setup = self.setup
        assert setup is not None
        if goal == self.stop_point:
            self._settled_cause = Cause.STOP_POINT
        elif goal == setup.max_count:
            self._settled_cause = Cause.MAX_COUNT
        else:
            self._settled_cause = Cause.QUEUE_END
        self._rests()

    # ------------------------------------------------------------ ticks in which no step is issued

    def _at_rest(self, counted: int) -> int:
        """Spindle at rest, settling or turned by hand. Returns guide steps."""
        ticks = self.ticks
        steps = 0
        if self.powered and self.fitted & FITTED_GUIDE:
            if counted:
                self.line.wait(counted)
            if self.guide_pace:
                steps = self._guide_to()
            elif self.line.lagging and self.trip != Trip.GUIDE_LIMIT:
                steps = self.line.catch_up()
                self._not_standing()
        elif counted and self.fitted & FITTED_GUIDE:
            self.line.wait(counted)
        if not self.standing and ticks == self._still_at:
            self._came_to_rest()
        if self.state == TRIPPED and self.powered and ticks == self._off_at:
            self.powered = False
            self._status_due = True
        if ticks == self.pedal_at:
            board_watch.pedal_pressed(self)
        by_hand = self.state == TURNING and not self.fitted & FITTED_DRIVE
        if by_hand and not self._hand_stop_told and self.count >= self.target():
            self._hand_stop_told = True
            self.notice(NoticeKind.HAND_STOP_DUE, self.count, 0)
        return steps

    def _came_to_rest(self) -> None:
        if self.spindle.mode == SETTLE and self.spindle.creep(self.count):
            return
        self.spindle.mode = REST
        self.standing = True
        self.spindle_moves = False
        self._status_due = True
        if self.state == TURNING:
            if self.fitted & FITTED_DRIVE:
                self.enter(HELD, self._settled_cause)
            elif self._hand_stop_told:
                at_stop_point = self.stop_point <= self.count
                self.enter(HELD, Cause.STOP_POINT if at_stop_point else Cause.MAX_COUNT)
        self.notice(NoticeKind.STANDING, self.count, self.guide)

    def _guide_to(self) -> int:
        ramp = self.guide_ramp + self.guide_pace
        steps = 0
        while ramp >= 1000:
            ramp -= 1000
            if self.guide + steps < self.guide_target:
                steps += 1
            elif self.guide + steps > self.guide_target:
                steps -= 1
        self.guide_ramp = ramp
        self.away += steps
        if self.guide + steps == self.guide_target:
            self.guide_pace = 0
        self._not_standing()
        return steps

    def _guide_moved(self, steps: int) -> int:
        """Steps that may be issued: none if they would leave the limits."""
        setup = self.setup
        assert setup is not None
        guide = self.guide + steps
        if (steps > 0 and guide > setup.guide_max) or (steps < 0 and guide < setup.guide_min):
            self.away -= steps
            self.stop_for(Trip.GUIDE_LIMIT)
            return 0
        self.guide = guide
        return steps

    def beat(self) -> None:
        """The host is alive."""
        self.silent_at = (self.ticks + SILENCE) & M32

    # ------------------------------------------------------------ messages

    def notice(self, kind: int, a: int, b: int) -> None:
        """Say that something happened."""
        self.dialogue.tell(Notice(self.ticks, kind, a, b))

    def _tell_status(self, celsius: int) -> None:
        if self.ticks == self._status_at:
            self._status_at = (self._status_at + STATUS_EVERY) & M32
        self._status_due = False
        if not self._boot_told:
            self._boot_told = True
            self.notice(NoticeKind.BOOTED, self.boot, 0)
        self.dialogue.tell(board_reports.status(self, celsius))
