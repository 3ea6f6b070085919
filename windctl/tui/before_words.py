"""What is said before a coil: its figures, what to check at the machine, and what it repeats. Pure."""

from __future__ import annotations

import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

from windctl.desk.numbers import counted, duration, grouped, ohm, turns
from windctl.recipe.orientation import Orientation, orientation

if TYPE_CHECKING:
    from windctl.book.heads import CoilHead
    from windctl.plan.model import Plan
    from windctl.profile.model import MachineProfile
    from windctl.recipe.model import Recipe
    from windctl.tui.recipes import Preview

_Z95 = 1.959964
_LEADS_SHOW_REL = 0.0005  # of the coil's resistance: a fiftieth of a tolerance of 2.5 %; our judgement


def figures_of(plan: Plan) -> tuple[tuple[str, str], ...]:
    """The plan in a few rows."""
    resistance = ohm(plan.dcr_20c_ohm, _Z95 * plan.dcr_sd_ohm).replace("kohm", "kΩ").replace("ohm", "Ω")
    return (
        ("spool", _spool(plan)),
        ("turns", turns(plan.turns, _Z95 * plan.turns_sd).removesuffix(" turns")),
        ("resistance", f"{resistance} at 20 °C"),
        ("wire", f"{grouped(plan.wire_length_m)} m, {plan.wire_mass_g:.1f} g"),
        ("build", f"{plan.build_mm:.2f} mm, {plan.peak_build_mm:.2f} at its highest"),
        ("time", duration(plan.duration_s)),
        ("wire speed", f"{plan.wire_speed_mean_m_s:.1f} m/s, peaks of {plan.wire_speed_peak_m_s:.1f}"),
        ("program", f"{grouped(plan.program.segments)} segments, {plan.program.digest[:8]}"),
    )


def _spool(plan: Plan) -> str:
    learnt = plan.learnt
    if not learnt.spool:
        return "none is named: F7 takes one"
    left = "" if learnt.left is None else f", {grouped(max(learnt.left.metres, 0.0))} m left"
    coils = f", {counted(learnt.spool_coils, 'coil')} taught" if learnt.spool_coils else ""
    return f"{learnt.spool}{left}{coils}"


def orientation_of(recipe: Recipe) -> Orientation:
    """How the bobbin sits."""
    coil = recipe.coil
    return orientation(coil.direction_from_face, coil.mounted, coil.start_flange)


@dataclass(frozen=True, slots=True)
class First:
    """What is to be done on the machine itself before the first turn."""

    zero: bool = False  # leads and contact are read by themselves
    dry_pass: bool = False  # the guide is seen at both of its turn-rounds

    @property
    def words(self) -> str:
        """In their order; empty where there is nothing."""
        steps = (("contact zeroed", self.zero), ("dry pass of the guide", self.dry_pass))
        return ", ".join(words for words, wanted in steps if wanted)


def first_of(plan: Plan, profile: MachineProfile, simulated: bool) -> First:
    """What a real machine begins with unless somebody takes it out: the dry pass where a motor guides, and a
    zeroing where the coil is stopped to be read and the leads may be off by something that shows. A contact
    that follows the wire learns its leads from the first turns."""
    leads = plan.prior.offset_sd > _LEADS_SHOW_REL * plan.dcr_20c_ohm
    stopped = profile.readings.mode == "checks" and profile.readings.contact
    return First(
        zero=stopped and leads and not simulated,
        dry_pass=profile.guide.kind == "step" and not simulated,
    )


def checklist(recipe: Recipe, profile: MachineProfile, simulated: bool, first: First) -> tuple[str, ...]:
    """What to do and to confirm before anything turns, in order; as many lines whatever is done `first`."""
    coil, where = recipe.coil, orientation_of(recipe)
    way = "clockwise" if where.spindle == "cw" else "counter-clockwise"
    face = "face towards you" if coil.mounted == "face out" else "face towards the motor"
    items = [
        f"bobbin mounted, {face}; it will turn {way}",
        f"start of the wire at the {coil.start_flange} flange, on the {where.start_side}'s side",
        f"wire: {_wire(recipe)}",
    ]
    if recipe.tension is not None and recipe.tension.set_cn is not None:
        items.append(f"tension set to {recipe.tension.set_cn:g} cN")
    if profile.by_eye:
        items.append("the counter shows 0; windctl cannot start, slow or stop this machine")
    if profile.guide.kind == "step":
        items.append("guide inside the start flange, free to travel")
    if profile.readings.mode == "live":
        contact = "off the wire until it is zeroed" if first.zero else "touches the wire"
        items.append(f"meter leads on, contact {contact}")
    if profile.readings.by_contact:
        items.append(f"contact zeroed: {_yes(first.zero)} (Z)")
    if profile.guide.kind == "step":
        items.append(f"dry pass of guide: {_yes(first.dry_pass)} (P)")
    if not simulated:
        items += [
            "guard closed; hands off; hair, sleeves, jewellery away; no gloves",
            "eye protection on: fine wire whips when it breaks",
            "hardware stop within reach; this program is no safety function",
        ]
    return tuple(items)


def _yes(wanted: bool) -> str:
    return "yes" if wanted else "no"


def _wire(recipe: Recipe) -> str:
    wire = recipe.wire
    size = wire.gauge or f"{wire.diameter_mm:g} mm"
    coat = wire.enamel or f"{wire.overall_mm:g} mm overall"
    return ", ".join(part for part in (size, coat, wire.insulation or "") if part)


@dataclass(frozen=True, slots=True)
class Repeats:
    """What the book knows of a recipe before its next coil: its last coil, and the batch so far."""

    head: CoilHead | None = None
    recipe_text: str = ""
    in_batch: int = 0  # coils of the batch that are in the book


def repeats(last: Repeats, preview: Preview, text: str, batch: str, of: int) -> tuple[tuple[str, str], ...]:
    """What this coil repeats of the last one of its recipe, and what is different, in a few rows."""
    plan, head = preview.plan, last.head
    seed = preview.recipe.lay.seed
    seeded = "" if seed is None else f", seed {seed}"
    rows = [("batch", _place(batch, of, last.in_batch))] if batch else []
    if head is None:
        return (*rows, ("last", f"none: the first of this recipe in the book{seeded}"))
    rows.append(("last", f"{head.number}, {_ended(head)}"))
    same = head.program_digest == plan.program.digest
    rows.append(("program", f"{'the same to the last byte' if same else 'another one'}{seeded}"))
    spool = plan.learnt.spool
    if spool != head.spool:
        rows.append(("spool", f"{spool or 'none named'}; last time {head.spool or 'none'}"))
    changed = differences(last.recipe_text, text)
    rows.append(("recipe", f"changed: {changed}" if changed else "the same to the letter"))
    return tuple(rows)


def _place(batch: str, of: int, wound: int) -> str:
    if of and wound >= of:
        return f"{batch}: all {of} are begun already, this is one more"
    return f"{batch}: this is {wound + 1}{f' of {of}' if of else ''}"


def _ended(head: CoilHead) -> str:
    if head.outcome == "finished":
        return f"finished, {head.verdict}"
    return head.outcome


def differences(before: str, now: str, most: int = 2) -> str:
    """The keys of a recipe that differ between two texts, with both values; empty where none does."""
    try:
        was, is_ = (_flat(tomllib.loads(text)) for text in (before, now))
    except tomllib.TOMLDecodeError:
        return "" if before == now else "the recipe's text"
    keys = [key for key in sorted(was.keys() | is_.keys()) if was.get(key) != is_.get(key)]
    told = [f"{key} {_value(was.get(key))} → {_value(is_.get(key))}" for key in keys[:most]]
    more = [f"{len(keys) - most} more"] if len(keys) > most else []
    return ", ".join(told + more)


def _flat(table: Mapping[str, object], within: str = "") -> dict[str, object]:
    out: dict[str, object] = {}
    for name, value in table.items():
        if isinstance(value, dict):
            out |= _flat(value, f"{within}{name}.")
        else:
            out[f"{within}{name}"] = value
    return out


def _value(value: object) -> str:
    return "–" if value is None else str(value)
