"""What leads the wire along the gap: a carriage on a screw with some play, or a hand."""

from __future__ import annotations

from windctl.machine.plant.draws import Draws
from windctl.machine.plant.spec import PlantSpec
from windctl.machine.twin.signals import GUIDE_HIGH_OK, GUIDE_LOW_OK

_OVERRUN_MM = 2.0  # past a limit switch the carriage meets a hard stop


class Carriage:
    """A guide motor's carriage. `motor` counts its steps from where the operator set the guide to its start.

    The start is reached moving away from the start flange, so the play is taken up that way: the carriage
    follows forward at once, and backward only after the play.
    """

    __slots__ = (
        "_far",
        "_high",
        "_low",
        "_near",
        "_play",
        "_screw",
        "_start_mm",
        "_steps_per_mm",
        "motor",
        "switches",
    )

    def __init__(self, spec: PlantSpec, zero_mm: float) -> None:
        per_mm = spec.steps_per_mm
        self._steps_per_mm = per_mm
        self._start_mm = spec.margin_mm + zero_mm
        self._play = spec.backlash_mm * per_mm
        aside = max(spec.travel_mm - spec.gap_mm, 2.0) / 2.0
        self._low = -round((aside + spec.margin_mm) * per_mm)
        self._high = round((aside + spec.gap_mm - spec.margin_mm) * per_mm)
        self._near = self._low - round(_OVERRUN_MM * per_mm)
        self._far = self._high + round(_OVERRUN_MM * per_mm)
        self._screw = 0.0
        self.motor = 0
        self.switches = GUIDE_LOW_OK | GUIDE_HIGH_OK

    def move(self, steps: int) -> None:
        """Signed motor steps within one tick."""
        motor = self.motor + steps
        if not self._low < motor < self._high:
            motor = min(max(motor, self._near), self._far)
            self._watch(motor)
        elif self.switches != GUIDE_LOW_OK | GUIDE_HIGH_OK:
            self._watch(motor)
        self.motor = motor
        if motor > self._screw:
            self._screw = motor
        elif motor < self._screw - self._play:
            self._screw = motor + self._play

    def set_to(self, motor: int) -> None:
        """Somebody moves the carriage by hand and calls its place `motor` steps."""
        self.motor = motor
        self._screw = float(motor)
        self._watch(motor)

    def next_mm(self) -> float:
        """Where the guide stands as a turn begins: mm from the start flange."""
        return self._start_mm + self._screw / self._steps_per_mm

    def _watch(self, motor: int) -> None:
        low = GUIDE_LOW_OK if motor > self._low else 0
        high = GUIDE_HIGH_OK if motor < self._high else 0
        self.switches = low | high


class Hand:
    """A hand that leads the wire to and fro: its speed wanders, and it turns round near the flange."""

    __slots__ = (
        "_draws",
        "_lean",
        "_mm",
        "_pitch",
        "_span",
        "_start",
        "_turn_at",
        "_way",
        "motor",
        "switches",
    )

    def __init__(self, spec: PlantSpec, seed: int) -> None:
        self._draws = Draws(seed, "guiding hand")
        self._start = spec.margin_mm
        self._span = max(spec.gap_mm - 2.0 * spec.margin_mm, 0.1)
        self._pitch = self._span / max(spec.turns_per_pass, 1.0)
        self._mm = 0.0
        self._way = 1.0
        self._lean = 0.0
        self._turn_at = self._span
        self.motor = 0
        self.switches = GUIDE_LOW_OK | GUIDE_HIGH_OK

    def move(self, steps: int) -> None:
        """No motor is fitted: steps lead nowhere, the port only counts them."""
        self.motor += steps

    def set_to(self, motor: int) -> None:
        """The hand goes back to the start flange; there is no motor whose place could be called `motor`."""
        del motor
        self._mm = 0.0
        self._way = 1.0
        self._turn_at = self._span

    def next_mm(self) -> float:
        """Where the hand is as a turn begins: mm from the start flange. Each call is one turn further."""
        draws = self._draws
        self._lean = 0.95 * self._lean + draws.normal(0.0, 0.1)
        self._mm += self._way * self._pitch * max(0.2, 1.0 + self._lean)
        if (self._turn_at - self._mm) * self._way <= 0.0:
            self._way = -self._way
            spread = abs(draws.normal(0.0, 0.3))
            self._turn_at = self._span - spread if self._way > 0.0 else spread
        return self._start + self._mm
