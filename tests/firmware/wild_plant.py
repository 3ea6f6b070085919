"""A machine behind a board that mostly works, and now and then does what no machine should."""

from __future__ import annotations

import random
from collections import deque

from windctl.machine.twin.signals import (
    ALL_OK,
    GUARD_OK,
    GUIDE_HIGH_OK,
    GUIDE_LOW_OK,
    PEDAL_DOWN,
    STOP_OK,
    Inputs,
    Outputs,
)

PINS = (STOP_OK, GUARD_OK, GUIDE_LOW_OK, GUIDE_HIGH_OK, PEDAL_DOWN)
COUNTS_MOST = 2000  # a port hands over no more in a tick
FAULTS = (
    "slip", "stall", "backwards", "jump", "runaway", "no index", "stray index", "slack", "caught", "open",
)  # fmt: skip


class WildPlant:
    """Steps become counts, an index, tension, a contact's reading. `faults`: how often in 100 000 ticks."""

    def __init__(self, rng: random.Random, faults: int) -> None:
        self._rng = rng
        self._fault_share = faults / 100_000
        self._kinds = rng.sample(FAULTS, 3)
        self._fault = ""
        self._fault_left = 0
        self._pin_share = rng.choice((0.0, 0.0, 0.002))
        self._pin = 0  # bits that are not as they should be
        self._pin_left = 0
        self._owed = 0  # thousandths of a step
        self._units = 0  # steps * counts_per_turn, not yet a count
        self._position = 0
        self._lag: deque[int] = deque([0] * rng.choice((0, 0, 1, 3, 12)))
        self._hand = 0  # counts per 16 ticks, by hand or by a motor of one's own
        self._hand_left = 0
        self._hand_acc = 0
        self._tension = rng.choice((0, 10_000, 10_000, 10_000, 30_000))
        self._contact = rng.randrange(0, 0xFFFF)
        self.counts_per_turn = 400
        self.steps_per_turn = 400
        self.pedal = False

    def turn_by_hand(self, counts_per_16_ticks: int, ticks: int) -> None:
        """Somebody turns the spindle where nothing drives it."""
        self._hand = counts_per_16_ticks
        self._hand_left = ticks

    def step(self, outputs: Outputs, inputs: Inputs) -> None:
        """One tick: from what the board asked for to what it will find."""
        rng = self._rng
        self._spoil(rng)
        fault = self._fault
        self._owed += outputs.rate
        steps, self._owed = divmod(self._owed, 1000)
        inputs.steps_issued = steps
        counts = self._counts(steps, bool(outputs.drive_enable), fault, rng)
        counts = max(-COUNTS_MOST, min(counts, COUNTS_MOST))
        inputs.count_delta = counts
        before, self._position = self._position, self._position + counts
        passed = self._position // self.counts_per_turn > before // self.counts_per_turn
        inputs.index = 1 if (passed and fault != "no index") or fault == "stray index" else 0
        if fault == "stray index":
            self._fault_left = 0
        noise = rng.getrandbits(6)
        tension = {"slack": 0, "caught": 0xFFFF}.get(fault, self._tension + noise)
        inputs.tension = tension
        inputs.contact = 0xFFFF if fault == "open" and noise < 20 else min(self._contact + noise, 0xFFFE)
        inputs.celsius_centi = noise * 1000 - 32_768
        pins = ALL_OK | (PEDAL_DOWN if self.pedal else 0)
        inputs.pins = pins ^ self._pin

    def _counts(self, steps: int, driven: bool, fault: str, rng: random.Random) -> int:
        if fault == "jump":
            self._fault_left = 0
            return rng.choice((-2000, -500, -20, -1, 1, 20, 500, 2000))
        if fault == "backwards":
            return -rng.randrange(3)
        if driven:
            self._units += steps * self.counts_per_turn
            made, self._units = divmod(self._units, self.steps_per_turn)
            if fault == "stall":
                made = 0
            elif fault == "slip" and made and rng.random() < 0.5:
                made -= 1
            elif fault == "runaway":
                made = 2 * made + 1
        elif self._hand_left:
            self._hand_left -= 1
            self._hand_acc += self._hand
            made, self._hand_acc = divmod(self._hand_acc, 16)
        else:
            made = 0
        if self._lag:
            self._lag.append(made)
            return self._lag.popleft()
        return made

    def _spoil(self, rng: random.Random) -> None:
        if self._pin_left:
            self._pin_left -= 1
        elif self._pin:
            self._pin = 0
        elif rng.random() < self._pin_share:
            self._pin = rng.choice(PINS)
            self._pin_left = rng.choice((1, 15, 200))
        if self._fault_left:
            self._fault_left -= 1
        elif self._fault:
            self._fault = ""
        elif rng.random() < self._fault_share:
            self._fault = rng.choice(self._kinds)
            self._fault_left = rng.choice((1, 10, 100, 1000))
