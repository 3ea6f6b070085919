"""The tables of a recipe, each with the checks that need no other table."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated, Any, Literal

from windctl.forms.faults import Fault, shorten
from windctl.forms.form import Form, Line, about, check, quantity
from windctl.material.enamel import Grade, increase_mm
from windctl.material.wire import bare_mm_of
from windctl.recipe.orientation import Flange, Mounted, Orientation, Way, orientation

# Upper limits far above any pickup coil: they catch a slipped decimal point, not an unusual design.
LONGEST_MM = 500.0
MOST_TURNS = 1_000_000
FASTEST_RPM = 10_000.0
DENSEST_PACKING = 0.91  # circles in a plane fill at most pi / (2 * sqrt(3)) = 0.9069


def _turns(meaning: str) -> Any:
    return quantity("turns", meaning, ge=1, le=MOST_TURNS)


def _rpm(meaning: str) -> Any:
    return quantity("rpm", meaning, gt=0, le=FASTEST_RPM)


class Bobbin(Form):
    """The former that the wire is wound on."""

    core_length_mm: Annotated[float, quantity("mm", "outside length of the core", gt=0, le=LONGEST_MM)]
    core_width_mm: Annotated[
        float, quantity("mm", "outside width of the core, at most its length", gt=0, le=LONGEST_MM)
    ]
    corner_radius_mm: Annotated[
        float,
        quantity("mm", "radius of the core's corners; half the width is a racetrack", ge=0, le=LONGEST_MM),
    ]
    core_perimeter_mm: Annotated[
        float | None,
        quantity("mm", "measured length round the core; beats the computed one", gt=0, le=100_000),
    ] = None
    flange_gap_mm: Annotated[float, quantity("mm", "free height between the flanges", gt=0, le=LONGEST_MM)]
    flange_depth_mm: Annotated[
        float, quantity("mm", "from the core's surface to the flange's edge", gt=0, le=LONGEST_MM)
    ]

    @check
    def _length_is_the_longer_side(self) -> Iterator[Fault]:
        if self.core_width_mm > self.core_length_mm:
            yield Fault(
                ("core_width_mm",),
                f"is {self.core_width_mm:g} mm, more than the core's length of {self.core_length_mm:g} mm",
            )

    @check
    def _corners_fit_the_width(self) -> Iterator[Fault]:
        half = self.core_width_mm / 2
        if self.corner_radius_mm > half * (1 + 1e-9):
            yield Fault(
                ("corner_radius_mm",),
                f"is {self.corner_radius_mm:g} mm, more than half the core's width, {half:g} mm",
            )

    @check
    def _perimeter_belongs_to_the_core(self) -> Iterator[Fault]:
        """A convex outline of this length and width is never shorter than there and back, nor longer than the
        rectangle round it; a tenth is left for measuring over wire or tape."""
        if self.core_perimeter_mm is None:
            return
        least = 0.9 * 2 * self.core_length_mm
        most = 1.1 * 2 * (self.core_length_mm + self.core_width_mm)
        if not least <= self.core_perimeter_mm <= most:
            yield Fault(
                ("core_perimeter_mm",),
                f"is {self.core_perimeter_mm:g} mm, which a core of {self.core_length_mm:g} by "
                f"{self.core_width_mm:g} mm cannot have: {least:.1f} to {most:.1f} mm; "
                "give the length of one turn, not of all that were wrapped",
            )


class Coil(Form):
    """The finished coil's handedness."""

    direction_from_face: Annotated[
        Way,
        about("The wire's way round from start to finish, seen from the side that faces the strings."),
    ]
    mounted: Annotated[
        Mounted,
        about("face out: the face looks away from the motor, at the operator. face in: at the motor."),
    ]
    start_flange: Annotated[Flange, about("The flange at which the lay starts.")]
    magnet_up: Annotated[
        Literal["north", "south"] | None,
        about("Polarity towards the strings; part of the record and of pairing."),
    ] = None

    @property
    def orientation(self) -> Orientation:
        """How the bobbin turns and where the lay starts, seen from the operator's side."""
        return orientation(self.direction_from_face, self.mounted, self.start_flange)


class WireTable(Form):
    """The wire. Either a size and a grade, from which the tables give the rest, or what was measured."""

    gauge: Annotated[
        str | None, about('Bare size by number, "AWG 42". Exactly one of gauge, diameter_mm.')
    ] = None
    diameter_mm: Annotated[float | None, quantity("mm", "bare conductor, metric size", ge=0.01, le=1)] = None
    enamel: Annotated[Grade | None, about("Enamel by grade. Exactly one of enamel, overall_mm.")] = None
    overall_mm: Annotated[
        float | None, quantity("mm", "diameter over the enamel, by micrometer", ge=0.01, le=1.2)
    ] = None
    insulation: Annotated[
        Line | None,
        about("The enamel's kind, such as polyurethane (solderable); decides how an end is bared."),
    ] = None
    ohm_per_m_20c: Annotated[
        float | None, quantity("ohm/m", "measured on this wire, at 20 degrees C", gt=0, le=10_000)
    ] = None
    ohm_per_m_sd: Annotated[
        float | None, quantity("ohm/m", "standard deviation of ohm_per_m_20c", gt=0, le=10_000)
    ] = None

    @check
    def _one_bare_size(self) -> Iterator[Fault]:
        yield from exactly_one("gauge", self.gauge, "diameter_mm", self.diameter_mm)

    @check
    def _one_thickness(self) -> Iterator[Fault]:
        yield from exactly_one("enamel", self.enamel, "overall_mm", self.overall_mm)

    @check
    def _wire_exists(self) -> Iterator[Fault]:
        if (self.gauge is None) == (self.diameter_mm is None):
            return
        try:
            bare = bare_mm_of(self.gauge, self.diameter_mm)
        except ValueError as error:
            yield Fault(("gauge",), f'is "{shorten(str(self.gauge))}", {error}')
            return
        yield from self._coat_fits(bare)

    def _coat_fits(self, bare: float) -> Iterator[Fault]:
        overall, grade = self.__dict__.get("overall_mm"), self.__dict__.get("enamel")
        if overall is not None and overall < bare:
            yield Fault(
                ("overall_mm",), f"is {overall:g} mm, less than the bare wire's diameter of {bare:.4g} mm"
            )
        if grade is not None:
            try:
                increase_mm(bare, grade)
            except ValueError as error:
                yield Fault(("enamel",), f'is "{grade}", but {error}')

    @check
    def _sd_of_what(self) -> Iterator[Fault]:
        if self.ohm_per_m_sd is not None and self.ohm_per_m_20c is None:
            yield Fault(("ohm_per_m_sd",), "stands alone; give wire.ohm_per_m_20c, whose uncertainty it is")


class Lay(Form):
    """Where the wire goes between the flanges."""

    style: Annotated[
        Literal["even", "scatter"], about("even: turn beside turn. scatter: loose, like a hand's.")
    ]
    pitch_mm: Annotated[
        float | None, quantity("mm", "guide travel per turn (the mean, for a scatter)", gt=0, le=LONGEST_MM)
    ] = None
    turns_per_pass: Annotated[
        float | None,
        quantity("turns", "turns from one turn-round to the next (the mean)", gt=0, le=float(MOST_TURNS)),
    ] = None
    margin_mm: Annotated[
        float,
        quantity(
            "mm",
            "the guide turns round this far inside each flange; negative: beyond it",
            ge=-LONGEST_MM,
            le=LONGEST_MM,
        ),
    ]
    pattern: Annotated[
        Literal["wander", "stagger", "ripple"] | None,
        about(
            "Scatter only. wander: the guide's speed wanders around the pitch like a hand's. stagger: every "
            "pass has a pitch and a starting offset of its own. ripple: the pitch swings by two sine waves."
        ),
    ] = None
    amount: Annotated[
        float | None, quantity("", "Scatter only: how strong the pattern is, 0 to 1.", ge=0, le=1)
    ] = None
    seed: Annotated[
        int | None,
        quantity("", "Scatter only: another seed, another scatter of the same kind.", ge=0, le=2**63 - 1),
    ] = None
    reversal_spread_mm: Annotated[
        float | None, quantity("mm", "Scatter only: spread of the turn-round points", ge=0, le=LONGEST_MM)
    ] = None
    wander_turns: Annotated[
        float | None,
        quantity("turns", "Scatter only: correlation length of the wander", gt=0, le=float(MOST_TURNS)),
    ] = None
    packing: Annotated[
        float | None,
        quantity("", "Enamelled wire area over window area; else learnt.", gt=0, le=DENSEST_PACKING),
    ] = None
    packing_sd: Annotated[
        float | None, quantity("", "Standard deviation of packing.", gt=0, le=DENSEST_PACKING)
    ] = None

    @check
    def _one_pitch(self) -> Iterator[Fault]:
        yield from exactly_one("pitch_mm", self.pitch_mm, "turns_per_pass", self.turns_per_pass)

    @check
    def _scatter_is_described(self) -> Iterator[Fault]:
        if self.style == "scatter":
            for key in ("pattern", "amount", "seed"):
                if key in self.__dict__ and getattr(self, key) is None:
                    yield Fault((key,), 'is missing; a lay of style "scatter" needs it', missing=True)

    @check
    def _even_has_no_pattern(self) -> Iterator[Fault]:
        if self.style != "even":
            return
        for key in ("pattern", "amount", "seed", "reversal_spread_mm", "wander_turns"):
            if key in self.__dict__ and getattr(self, key) is not None:
                yield Fault(
                    (key,), 'is only for a lay of style "scatter", and lay.style is "even"', at_key=True
                )

    @check
    def _sd_of_what(self) -> Iterator[Fault]:
        if self.packing_sd is not None and self.packing is None:
            yield Fault(("packing_sd",), "stands alone; give lay.packing, whose uncertainty it is")


class Spindle(Form):
    """Speeds: slow first turns, cruise, slow last turns."""

    start_rpm: Annotated[float, _rpm("Speed of the first turns")]
    start_turns: Annotated[int, _turns("How many turns are wound at start_rpm")]
    cruise_rpm: Annotated[float, _rpm("Speed of the bulk of the coil")]
    finish_rpm: Annotated[float, _rpm("Speed of the last turns before the stop")]
    finish_turns: Annotated[int, _turns("How many turns are wound at finish_rpm")]
    ramp_rpm_per_s: Annotated[
        float, quantity("rpm/s", "how fast the speed changes between them", gt=0, le=100_000)
    ]

    @check
    def _slow_ends(self) -> Iterator[Fault]:
        for key in ("start_rpm", "finish_rpm"):
            speed = self.__dict__.get(key)
            if speed is not None and speed > self.cruise_rpm:
                yield Fault(
                    (key,), f"is {speed:g} rpm, more than spindle.cruise_rpm of {self.cruise_rpm:g} rpm"
                )


class Tension(Form):
    """Pull on the wire. 1 cN is about the weight of one gram."""

    set_cn: Annotated[float | None, quantity("cN", "set value", gt=0, le=1000)] = None
    band_cn: Annotated[
        float | None, quantity("cN", "allowed deviation of the mean per turn", gt=0, le=1000)
    ] = None

    @check
    def _band_of_what(self) -> Iterator[Fault]:
        if self.band_cn is not None and self.set_cn is None:
            yield Fault(("band_cn",), "stands alone; give tension.set_cn, around which it lies")


class Stop(Form):
    """When the coil is done, and what counts as a good one."""

    turns: Annotated[int | None, _turns("Target by turns. Exactly one of turns, dcr_20c_ohm.")] = None
    dcr_20c_ohm: Annotated[
        float | None, quantity("ohm", "target by DC resistance at 20 degrees C", gt=0, le=1e7)
    ] = None
    tolerance_pct: Annotated[
        float, quantity("%", "what counts as a good coil, of whichever quantity is the target", gt=0, le=100)
    ]
    min_turns: Annotated[int | None, _turns("Never fewer; required with a resistance target")] = None
    max_turns: Annotated[int | None, _turns("Never more; required with a resistance target")] = None

    @check
    def _one_target(self) -> Iterator[Fault]:
        yield from exactly_one("turns", self.turns, "dcr_20c_ohm", self.dcr_20c_ohm)

    @check
    def _limits_of_a_resistance_target(self) -> Iterator[Fault]:
        if self.dcr_20c_ohm is None:
            return
        for key in ("min_turns", "max_turns"):
            if key in self.__dict__ and getattr(self, key) is None:
                yield Fault(
                    (key,), "is missing; a resistance target (stop.dcr_20c_ohm) needs it", missing=True
                )

    @check
    def _limits_in_order(self) -> Iterator[Fault]:
        if self.min_turns is not None and self.max_turns is not None and self.min_turns > self.max_turns:
            yield Fault(
                ("min_turns",),
                f"is {self.min_turns} turns, more than stop.max_turns of {self.max_turns} turns",
            )

    @check
    def _target_within_limits(self) -> Iterator[Fault]:
        if self.turns is None:
            return
        least, most = self.__dict__.get("min_turns"), self.__dict__.get("max_turns")
        if least is not None and self.turns < least:
            yield Fault(("turns",), f"is {self.turns} turns, less than stop.min_turns of {least} turns")
        if most is not None and self.turns > most:
            yield Fault(("turns",), f"is {self.turns} turns, more than stop.max_turns of {most} turns")


def exactly_one(first: str, first_value: object, second: str, second_value: object) -> Iterator[Fault]:
    """Faults unless exactly one of two keys is given."""
    if first_value is None and second_value is None:
        yield Fault((first,), f"is missing, and so is {second}; exactly one of them is needed", missing=True)
    if first_value is not None and second_value is not None:
        yield Fault((second,), f"is given as well as {first}; exactly one of them may be", at_key=True)
