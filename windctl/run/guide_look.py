"""What is shown and said of a dry pass of the guide. Pure."""

from __future__ import annotations

import tomllib
from dataclasses import dataclass
from functools import lru_cache

from windctl.numbers import apart, signed_mm
from windctl.record.dry_pass import FAR, HOME, START, agreed, goal
from windctl.record.state import State

NEAR_MM = 1.5  # of an end: no nudge leads further, the drive's play included
APART_MM = 0.05  # from which on it is said that no datum suits both ends


@dataclass(frozen=True, slots=True)
class GuideLook:
    """The guide at one of its ends, or on its way there. Millimetres; positive: towards the far flange."""

    end: str  # "far", "start"; "home": seen at both, on its way back
    near: bool  # it stands there, or is nudged there
    shift_mm: float  # nudged so far, from where the guide was put
    again: bool  # it was seen here before, and the datum was nudged since
    way_mm: float  # from one end to the other
    apart: str  # where the two ends do not suit one datum: by how much, and what to do


def guide_look(state: State, steps_per_mm: float) -> GuideLook | None:
    """How far the pass is; None where none is under way."""
    if agreed(state) is None or not steps_per_mm:
        return None
    shown = state.shown
    at = shown.far_at if shown.end == FAR else shown.start_at
    return GuideLook(
        end=shown.end,
        near=shown.end != HOME and abs(_off(state)) <= NEAR_MM * steps_per_mm,
        shift_mm=shown.shift / steps_per_mm,
        again=at is not None,
        way_mm=0.0 if state.started is None else state.started.setup.guide_max / steps_per_mm,
        apart=_apart(state, steps_per_mm),
    )


def _off(state: State) -> int:
    """Steps from where the guide is to be seen, as the board reports it."""
    return 0 if state.status is None else state.status.guide - goal(state)


def says_pass(state: State, asks: str | None) -> str:
    """The dry pass in words."""
    if asks == "pass":
        if state.guide_lost:
            return (
                "the board has lost the guide's place: the drives are off, put the guide inside the start "
                "flange by hand; then a dry pass shows it, nothing turns"
            )
        return "a dry pass: the guide will move, nothing turns"
    shown = state.shown
    if shown.end == HOME:
        return "seen at both ends: the guide goes back to its start, nothing turns"
    end = "its start" if shown.end == START else "its far end"
    if asks == "look":
        at = shown.start_at if shown.end == START else shown.far_at
        again = "" if at is None else " again, nudged since"
        return f"the guide stands at {end}{again}: is it inside the flange, and free?"
    return f"the guide moves to {end}, nothing turns"


def _apart(state: State, steps_per_mm: float) -> str:
    started, shown = state.started, state.shown
    mm = shown.apart / steps_per_mm
    if started is None or shown.end == HOME or abs(mm) <= APART_MM + 1e-9:
        return ""
    half = mm / 2.0 if shown.end == FAR else -mm / 2.0
    to = "far" if half > 0 else "start"
    way = started.setup.guide_max / steps_per_mm
    return (
        f"The ends, as you saw them right, are {apart(mm)} than the program's {way:.2f} mm. "
        f"{_recipe_says(started.recipe_text)} Correct the gap by {signed_mm(mm)} or each margin by "
        f"{signed_mm(-mm / 2.0)} and begin anew; or share it: nudge {abs(half):.2f} mm towards the {to} "
        "flange here; or leave it."
    )


@lru_cache(maxsize=4)
def _recipe_says(text: str) -> str:
    try:
        recipe = tomllib.loads(text)
        gap, margin = recipe["bobbin"]["flange_gap_mm"], recipe["lay"]["margin_mm"]
    except (tomllib.TOMLDecodeError, KeyError, TypeError):
        return "Look at the recipe's gap and margin."
    return f"The recipe says bobbin.flange_gap_mm = {gap:g}, lay.margin_mm = {margin:g}."
