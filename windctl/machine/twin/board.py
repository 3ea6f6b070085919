"""The board: what the firmware's core does, tick for tick, in plain integers.

`tick` is called once a millisecond. What it does is specified in firmware_protocol/README.md; a core in
another language is right if it gives the same outputs for the same inputs. So everything here is
arithmetic that C has: each field's width stands beside it, a quiet tick divides nothing, and no number
leaves its width. Order within a tick: inputs, commands, motion, guide, checks, messages.
"""

from __future__ import annotations

from typing import Final

from windctl.machine.twin import motion, reports, rest, watch
from windctl.machine.twin.contact_mean import ContactMean
from windctl.machine.twin.dialogue import Dialogue
from windctl.machine.twin.guide_line import GuideLine
from windctl.machine.twin.rules import CHECK_EVERY, NO_STOP_POINT, STATUS_EVERY, STILL
from windctl.machine.twin.signals import ALL_OK, Inputs, Outputs
from windctl.machine.twin.spindle import BRAKE, REST, RUN, Spindle
from windctl.machine.twin.turns import Turns
from windctl.protocol.messages import Capability, Cause, Notice, NoticeKind, Setup, State, Trip

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
M32: Final = 0xFFFFFFFF

# The bits that are used every tick, as the plain integers they are.
FITTED_DRIVE = int(Capability.DRIVE_STEP)
FITTED_GUIDE = int(Capability.GUIDE_STEP)


class Board:
    """One board. `capabilities`, `queue` and the scales are those of its Identity."""

    __slots__ = (
        "_boot_told",
        "_status_at",
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
        "hand_stop_told",
        "line",
        "mean",
        "off_at",
        "over_counts",
        "pedal_at",
        "pedal_fresh",
        "pins",
        "powered",
        "queue",
        "rotation",
        "seen_count",
        "settled_cause",
        "setup",
        "setup_crc",
        "silent_at",
        "slip_limit",
        "speed",
        "spindle",
        "spindle_moves",
        "standing",
        "state",
        "status_due",
        "still_at",
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
        self.state: int = State.DRIVES_OFF  # u8
        self.cause: int = Cause.BOOT  # u8
        self.trip: int = Trip.NONE  # u8
        self.trust = 0  # u8
        self.pins = ALL_OK  # u8, as of the last tick
        # the conversation
        self.dialogue = Dialogue()
        self._boot_told = False
        self._status_at = STATUS_EVERY
        self.check_at = CHECK_EVERY
        self.status_due = True
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
        self.off_at = 0  # tick at which a tripped board's drives go off
        self.count = 0  # i32
        self.seen_count = 0  # i32, at the last check
        self.speed = 0  # u16, counts/s over the last 64 ticks
        self.standing = True  # spindle and guide are at rest
        self.spindle_moves = False
        self.still_ticks = STILL  # u16
        self.still_at = 0  # tick
        self.settled_cause: int = Cause.NONE
        self.hand_stop_told = False
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
                watch.counted(self, counted)
        if inputs.pins != self.pins:
            watch.pins_changed(self, inputs.pins)
        if inputs.index:
            watch.index_seen(self, counted)
        if inputs.received:
            self.dialogue.hear(self, inputs.received)
            count = self.count
        guide_steps = 0
        mode = spindle.mode
        if mode == RUN:
            spindle.step(inputs.steps_issued, count)
            if spindle.mode != RUN:
                motion.arrived(self)
            if counted and self.fitted & FITTED_GUIDE:
                guide_steps = self.line.follow(counted)
        elif mode == BRAKE:
            spindle.step(inputs.steps_issued, count)
            if spindle.mode == REST:
                motion.rests(self)
            if ticks == self.pedal_at:
                watch.pedal_pressed(self)
            if counted and self.fitted & FITTED_GUIDE:
                if self.trip == Trip.GUIDE_LIMIT:
                    self.line.wait(counted)
                else:
                    guide_steps = self.line.follow(counted)
        else:
            guide_steps = rest.at_rest(self, counted)
        if guide_steps:
            guide_steps = rest.guide_moved(self, guide_steps)
        turns.tension_sum += inputs.tension
        if ticks == self.check_at:
            watch.check(self)
        if ticks == self.silent_at:
            watch.silence(self)
        if self.status_due or ticks == self._status_at:
            self._tell_status(inputs.celsius_centi)
        if self.mean.active and self.mean.sample(inputs.contact, ticks, count, self.spindle_moves):
            self.dialogue.tell(reports.reading(self, inputs.celsius_centi))
        outputs.sent = self.dialogue.out
        self.dialogue.out = b""
        outputs.rate = spindle.v
        outputs.guide_steps = guide_steps
        outputs.rotation = self.rotation
        outputs.drive_enable = 1 if self.powered and self.fitted & FITTED_DRIVE else 0
        outputs.guide_enable = 1 if self.powered and self.fitted & FITTED_GUIDE else 0

    # ------------------------------------------------------------ messages

    def notice(self, kind: int, a: int, b: int) -> None:
        """Say that something happened."""
        self.dialogue.tell(Notice(self.ticks, kind, a, b))

    def _tell_status(self, celsius: int) -> None:
        if self.ticks == self._status_at:
            self._status_at = (self._status_at + STATUS_EVERY) & M32
        self.status_due = False
        if not self._boot_told:
            self._boot_told = True
            self.notice(NoticeKind.BOOTED, self.boot, 0)
        self.dialogue.tell(reports.status(self, celsius))
