"""How the leads of two coils are joined so that their hum cancels and their signals add.

Look at the strings' side of a coil. Of its wire's way from start to finish let d be +1 where it runs
counter-clockwise, -1 where clockwise, and of its magnet m be +1 with north towards the strings, -1 with
south. The finish stands above the start by minus the rate of change of the flux through the turns, counted
towards the viewer, times d (Faraday). Hum's flux is the same for both coils, so hum goes with d. A string's
flux is the magnet's, changed by the string's moving, so the signal goes with d*m.

In series the second coil is gone through forwards (s = +1) or backwards (s = -1). Hum d1 + s*d2 is nothing
for s = -d1*d2, and then the signals d1*m1 + s*d2*m2 = d1*(m1 - m2): they add where the magnets are opposite,
whichever ways the wires run, and cancel as well where the magnets are alike.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from windctl.recipe.orientation import Way

Pole = Literal["north", "south"]
Lead = Literal["start", "finish"]

OTHER_POLE: dict[Pole, Pole] = {"north": "south", "south": "north"}
OTHER_LEAD: dict[Lead, Lead] = {"start": "finish", "finish": "start"}


@dataclass(frozen=True, slots=True)
class Handed:
    """What of a coil decides how it is joined: its wire's way from start to finish, seen from the strings,
    and the pole of its magnet towards them."""

    name: str
    way: Way
    pole: Pole

    @property
    def hum(self) -> int:
        """d: the sign of its hum from start to finish."""
        return 1 if self.way == "ccw" else -1

    @property
    def signal(self) -> int:
        """d*m: the sign of its signal from start to finish."""
        return self.hum * (1 if self.pole == "north" else -1)


@dataclass(frozen=True, slots=True)
class Joined:
    """Two coils in series: `first`'s finish is joined to the lead `joint` of `second`; `first`'s start and
    `second`'s lead `end` are the pair's two ends."""

    first: Handed
    second: Handed
    joint: Lead

    @property
    def end(self) -> Lead:
        """The second coil's free lead."""
        return OTHER_LEAD[self.joint]

    @property
    def through(self) -> int:
        """s: +1 where the second coil is gone through from start to finish."""
        return 1 if self.joint == "start" else -1

    @property
    def hum(self) -> int:
        """Sum of the two hums from end to end, for coils that match: 0."""
        return self.first.hum + self.through * self.second.hum

    @property
    def signal(self) -> int:
        """Sum of the two signals from end to end: 2 or -2."""
        return self.first.signal + self.through * self.second.signal

    @property
    def positive(self) -> tuple[Handed, Lead]:
        """The end that goes positive while a string comes nearer, which raises the magnet's flux: where the
        signals' sum is +2, the far end goes below the first coil's start."""
        return (self.first, "start") if self.signal > 0 else (self.second, self.end)

    @property
    def in_series(self) -> str:
        """In words."""
        return (
            f"join the finish of {self.first.name} to the {self.joint} of {self.second.name}; "
            f"the pair's ends are the start of {self.first.name} and the {self.end} of {self.second.name}"
        )

    @property
    def in_parallel(self) -> str:
        """In words: each end of one coil goes to the lead of the other that answers to it."""
        return (
            f"join the start of {self.first.name} to the {self.joint} of {self.second.name}, "
            f"and the finish of {self.first.name} to the {self.end} of {self.second.name}"
        )

    @property
    def polarity(self) -> str:
        """In words: what decides whether the pair adds to other pickups."""
        coil, lead = self.positive
        return f"the {lead} of {coil.name} goes positive while a string comes nearer"


def join(first: Handed, second: Handed) -> Joined:
    """The series connection. Raises ValueError for magnets that point alike: what cancels the hum then
    cancels the signal too."""
    if first.pole == second.pole:
        raise ValueError(
            f"{first.name} and {second.name} both have {first.pole} towards the strings: joined so that hum "
            "cancels, their signals cancel too"
        )
    return Joined(first, second, "start" if first.way != second.way else "finish")
