"""The spindle: follows its step motor while powered, coasts when power goes, and can be turned by hand."""

from __future__ import annotations

_COAST_STEPS_PER_S = 12  # lost each tick without power, in steps of 1/400 turn: about 1 800 rpm per second
_HAND_STEPS_PER_TICK = 2


class Spindle:
    """All in motor steps. Powered, it makes the motor's own; without power it goes on by itself."""

    __slots__ = (
        "_acc",
        "_by_hand",
        "_coast",
        "_coast_acc",
        "_motor",
        "_motor_ramp",
        "_odd",
        "_slip_acc",
        "_slip_grip",
        "issued",
        "speed",
    )

    def __init__(self, steps_per_turn: int) -> None:
        self._acc = 0  # thousandths of a step the port owes
        self._coast_acc = 0
        self._coast = max(1, _COAST_STEPS_PER_S * steps_per_turn // 400)
        self._motor_ramp = max(1, steps_per_turn * 300 // 60_000)
        self._motor = 0  # steps/s, a person's own motor
        self._by_hand = 0  # steps still to go, signed
        self._slip_grip = 1000  # per mille of the motor's steps that the belt carries
        self._slip_acc = 0
        self._odd = False
        self.issued = 0  # motor steps put out in the last tick
        self.speed = 0  # steps/s the spindle really has

    def advance(self, rate: int, powered: bool | int) -> int:
        """One tick. Returns the signed steps the spindle moved; `issued` tells what the port put out."""
        if rate:
            acc = self._acc + rate
            self.issued = steps = acc // 1000
            self._acc = acc - steps * 1000
            if powered and not self._odd:
                self.speed = rate
                return steps
            return self._otherwise(steps, rate, powered)
        self.issued = 0
        if self._odd or self.speed:
            return self._otherwise(0, 0, powered)
        return 0

    def slip(self, grip: float) -> None:
        """From now on the belt carries only this share of the motor's steps; 1 is a good belt."""
        self._slip_grip = round(grip * 1000)
        self._mark()

    def turn_by_hand(self, steps: int) -> None:
        """Somebody turns the spindle by `steps` (negative: unwinds), slowly, once no drive holds it."""
        self._by_hand += steps
        self._mark()

    def own_motor(self, rate: int) -> None:
        """Somebody's own motor turns the spindle towards `rate` steps/s (no drive fitted)."""
        self._motor = rate
        self._mark()

    def _mark(self) -> None:
        self._odd = bool(self._by_hand or self._motor or self._slip_grip != 1000)

    def _otherwise(self, steps: int, rate: int, powered: bool | int) -> int:
        if powered:
            self.speed = rate * self._slip_grip // 1000
            self._slip_acc += steps * self._slip_grip
            moved = self._slip_acc // 1000
            self._slip_acc -= moved * 1000
            return moved
        if self._by_hand:
            moved = max(-_HAND_STEPS_PER_TICK, min(_HAND_STEPS_PER_TICK, self._by_hand))
            self._by_hand -= moved
            self._mark()
            return moved
        if self._motor > self.speed:
            self.speed = min(self.speed + self._motor_ramp, self._motor)
        else:
            self.speed = max(self.speed - self._coast, self._motor)
        self._coast_acc += self.speed
        moved = self._coast_acc // 1000
        self._coast_acc -= moved * 1000
        return moved
