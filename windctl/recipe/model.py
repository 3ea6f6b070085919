"""A recipe: everything the winder decides about a coil, frozen, and checked as a whole."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Iterator
from typing import Annotated

from windctl.forms.faults import Fault
from windctl.forms.form import Form, FormatOne, Line, Lines, about, check
from windctl.material import wire as wires
from windctl.material.wire import Wire
from windctl.recipe.orientation import Orientation
from windctl.recipe.tables import Bobbin, Coil, Lay, Spindle, Stop, Tension, WireTable


class Recipe(Form):
    """A recipe file, format 1. Attributes are named as the file's keys; an absent optional key is None."""

    format: FormatOne
    name: Annotated[Line, about("What the coil is called on screens, labels and in the book.")]
    notes: Annotated[Lines | None, about("Anything the winder should know.")] = None
    bobbin: Bobbin
    coil: Coil
    wire: WireTable
    lay: Lay
    spindle: Spindle
    tension: Tension | None = None
    stop: Stop

    def wire_data(self) -> Wire:
        """The wire's diameters, resistance and mass, from the tables or as measured."""
        table = self.wire
        return wires.resolve(
            gauge=table.gauge,
            diameter_mm=table.diameter_mm,
            enamel=table.enamel,
            overall_mm=table.overall_mm,
            ohm_per_m=table.ohm_per_m_20c,
            ohm_per_m_sd=table.ohm_per_m_sd,
        )

    @property
    def stroke_mm(self) -> float:
        """Guide travel between its turn-round points, mm."""
        return self.bobbin.flange_gap_mm - 2 * self.lay.margin_mm

    @property
    def pitch_mm(self) -> float:
        """Mean guide travel per turn, mm, whichever way the recipe gives it."""
        if self.lay.pitch_mm is not None:
            return self.lay.pitch_mm
        assert self.lay.turns_per_pass is not None  # exactly one is given
        return self.stroke_mm / self.lay.turns_per_pass

    @property
    def program_turns(self) -> int:
        """The turns that the guide's program covers: the target, or the most a resistance target may take."""
        turns = self.stop.turns if self.stop.turns is not None else self.stop.max_turns
        assert turns is not None  # required with a resistance target
        return turns

    @property
    def orientation(self) -> Orientation:
        """How the bobbin turns and where the lay starts, seen from the operator's side."""
        return self.coil.orientation

    def canonical_json(self) -> str:
        """Sorted, compact, without absent keys: equal recipes give equal text whatever their layout or
        comments, and a key that a later version adds leaves the text of older recipes as it is."""
        content = self.model_dump(mode="json", exclude_none=True)
        return json.dumps(content, sort_keys=True, separators=(",", ":"), ensure_ascii=False, allow_nan=False)

    @property
    def digest(self) -> str:
        """SHA-256 of the canonical JSON, in hex."""
        return hashlib.sha256(self.canonical_json().encode()).hexdigest()

    @check
    def _margin_leaves_a_stroke(self) -> Iterator[Fault]:
        half = self.bobbin.flange_gap_mm / 2
        if self.lay.margin_mm >= half:
            yield Fault(
                ("lay", "margin_mm"),
                f"is {self.lay.margin_mm:g} mm at each flange, which leaves the guide no stroke in the gap "
                f"of {self.bobbin.flange_gap_mm:g} mm; must be less than {half:g} mm",
            )
        if self.lay.margin_mm < -self.bobbin.flange_gap_mm:
            yield Fault(
                ("lay", "margin_mm"),
                f"is {self.lay.margin_mm:g} mm, further outside than the gap of "
                f"{self.bobbin.flange_gap_mm:g} mm is high",
            )

    def _pitch_as_given(self) -> tuple[float, tuple[str, str], str]:
        """The pitch, the key that gives it, and how a message begins. ValueError while none or two do."""
        if (self.lay.pitch_mm is None) == (self.lay.turns_per_pass is None):
            raise ValueError("there is no one pitch")
        if self.lay.pitch_mm is not None:
            return self.lay.pitch_mm, ("lay", "pitch_mm"), f"is {self.lay.pitch_mm:g} mm"
        said = f"is {self.lay.turns_per_pass:g} turns, a pitch of {self.pitch_mm:.3g} mm"
        return self.pitch_mm, ("lay", "turns_per_pass"), said

    @check
    def _even_turns_lie_side_by_side(self) -> Iterator[Fault]:
        if self.lay.style != "even":
            return
        pitch, key, said = self._pitch_as_given()
        overall = self.wire_data().overall_mm
        if 0 < pitch < overall:
            yield Fault(key, f"{said}, less than the wire's overall diameter of {overall:.3g} mm")

    @check
    def _pitch_fits_the_stroke(self) -> Iterator[Fault]:
        pitch, key, said = self._pitch_as_given()
        if pitch > self.stroke_mm * (1 + 1e-9) > 0:
            yield Fault(key, f"{said}, more than the guide's whole stroke of {self.stroke_mm:g} mm")

    @check
    def _stroke_is_wider_than_the_wire(self) -> Iterator[Fault]:
        overall = self.wire_data().overall_mm
        if 0 < self.stroke_mm < overall:
            yield Fault(
                ("lay", "margin_mm"),
                f"is {self.lay.margin_mm:g} mm at each flange, which leaves the guide a stroke of "
                f"{self.stroke_mm:.3g} mm, less than the wire's overall diameter of {overall:.3g} mm",
            )

    @check
    def _turn_rounds_fit_the_stroke(self) -> Iterator[Fault]:
        spread = self.lay.reversal_spread_mm
        if spread is not None and spread >= self.stroke_mm / 2 > 0:
            yield Fault(
                ("lay", "reversal_spread_mm"),
                f"is {spread:g} mm, not less than half the guide's stroke, {self.stroke_mm / 2:g} mm",
            )
