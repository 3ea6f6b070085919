"""Every key of a recipe, wrong in every way: one problem, at its place, with value, limit and unit."""

from __future__ import annotations

import pytest

from tests.forms.every_field import Case, Key, cases, placed
from tests.recipe.samples import GOOD, problems, without
from windctl.forms.messages import form_in
from windctl.recipe.load import parse_recipe
from windctl.recipe.model import Recipe

_OHMS = ("min_turns = 7000", "max_turns = 9000", "dcr_20c_ohm = 5900")


def mm(name: str, good: str, most: str = "500", **more: object) -> Key:
    return Key(name, "number", good, "mm", most=most, **({"above": "0"} | more))  # type: ignore[arg-type]  # limits


def rpm(name: str, good: str) -> Key:
    return Key(name, "number", good, "rpm", above="0", most="10000")


def turns(name: str, good: str, **more: object) -> Key:
    return Key(name, "whole", good, "turns", least="1", most="1000000", **more)  # type: ignore[arg-type]  # limits


KEYS = (
    Key("name", "text", '"Sample"'),
    Key("notes", "text", '"a note"'),
    mm("bobbin.core_length_mm", "56"),
    mm("bobbin.core_width_mm", "6"),
    mm("bobbin.corner_radius_mm", "3", above="", least="0"),
    mm("bobbin.core_perimeter_mm", "119", most="100000"),
    mm("bobbin.flange_gap_mm", "11"),
    mm("bobbin.flange_depth_mm", "8.5"),
    Key("coil.direction_from_face", "choice", '"cw"', choices=("cw", "ccw")),
    Key("coil.mounted", "choice", '"face out"', choices=("face out", "face in")),
    Key("coil.start_flange", "choice", '"base"', choices=("face", "base")),
    Key("coil.magnet_up", "choice", '"north"', choices=("north", "south")),
    Key("wire.gauge", "text", '"AWG 42"'),
    mm("wire.diameter_mm", "0.063", most="1", above="", least="0.01", instead_of=("gauge",)),
    Key("wire.enamel", "choice", '"grade 1"', choices=("grade 1", "grade 2"), instead_of=("overall_mm",)),
    mm("wire.overall_mm", "0.072", most="1.2", above="", least="0.01"),
    Key("wire.insulation", "text", '"polyurethane"'),
    Key("wire.ohm_per_m_20c", "number", "5.4", "ohm/m", above="0", most="10000"),
    Key("wire.ohm_per_m_sd", "number", "0.02", "ohm/m", above="0", most="10000",
        needs=("ohm_per_m_20c = 5.4",)),
    Key("lay.style", "choice", '"scatter"', choices=("even", "scatter")),
    mm("lay.pitch_mm", "0.22"),
    Key("lay.turns_per_pass", "number", "47", "turns", above="0", most="1000000", instead_of=("pitch_mm",)),
    mm("lay.margin_mm", "0.3", above="", least="-500"),
    Key("lay.pattern", "choice", '"wander"', choices=("wander", "stagger", "ripple")),
    Key("lay.amount", "number", "0.4", least="0", most="1"),
    Key("lay.seed", "whole", "7", least="0", most="9223372036854775807"),
    mm("lay.reversal_spread_mm", "0.2", above="", least="0"),
    Key("lay.wander_turns", "number", "12", "turns", above="0", most="1000000"),
    Key("lay.packing", "number", "0.63", above="0", most="0.91"),
    Key("lay.packing_sd", "number", "0.05", above="0", most="0.91", needs=("packing = 0.63",)),
    rpm("spindle.start_rpm", "150"),
    turns("spindle.start_turns", "20"),
    rpm("spindle.cruise_rpm", "1000"),
    rpm("spindle.finish_rpm", "120"),
    turns("spindle.finish_turns", "40"),
    Key("spindle.ramp_rpm_per_s", "number", "60", "rpm/s", above="0", most="100000"),
    Key("tension.set_cn", "number", "12", "cN", above="0", most="1000"),
    Key("tension.band_cn", "number", "5", "cN", above="0", most="1000", needs=("set_cn = 12",)),
    turns("stop.turns", "8000"),
    Key("stop.dcr_20c_ohm", "number", "5900", "ohm", above="0", most="10000000", needs=_OHMS[:2],
        instead_of=("turns",)),
    Key("stop.tolerance_pct", "number", "2", "%", above="0", most="100"),
    turns("stop.min_turns", "7000", needs=_OHMS[1:], instead_of=("turns",)),
    turns("stop.max_turns", "9000", needs=(_OHMS[0], _OHMS[2]), instead_of=("turns",)),
)  # fmt: skip
NEEDED = {
    "name", "bobbin.core_length_mm", "bobbin.core_width_mm", "bobbin.corner_radius_mm",
    "bobbin.flange_gap_mm", "bobbin.flange_depth_mm", "coil.direction_from_face", "coil.mounted",
    "coil.start_flange", "lay.style",
    "lay.margin_mm", "lay.pattern", "lay.amount", "lay.seed", "spindle.start_rpm", "spindle.start_turns",
    "spindle.cruise_rpm", "spindle.finish_rpm", "spindle.finish_turns", "spindle.ramp_rpm_per_s",
    "stop.tolerance_pct",
}  # fmt: skip
CASES = list(cases(GOOD, KEYS))


def test_no_key_of_a_recipe_is_left_out() -> None:
    known = {"format"}
    for name, field in Recipe.model_fields.items():
        table = form_in(field.annotation)
        known |= {name} if table is None else {f"{name}.{key}" for key in table.model_fields}
    assert {key.name for key in KEYS} | {"format"} == known
    assert len(CASES) > 300


@pytest.mark.parametrize("key", KEYS, ids=lambda key: key.name)
def test_the_good_value_is_good(key: Key) -> None:
    parse_recipe(placed(GOOD, key, key.good)[0])


@pytest.mark.parametrize("case", CASES, ids=lambda case: case.name)
def test_one_problem_where_it_is(case: Case) -> None:
    assert problems(case.text) == [f"x.toml:{case.said}"]


@pytest.mark.parametrize("key", [key for key in KEYS if key.name in NEEDED], ids=lambda key: key.name)
def test_a_key_that_is_left_out_is_missed_at_its_table(key: Key) -> None:
    table, _, name = key.name.rpartition(".")
    line = GOOD.splitlines().index(f"[{table}]") + 1 if table else 1
    (said,) = problems(without(GOOD, name))
    moved = 1 if not table else line  # a key above the tables moves none of them down
    assert said.startswith(f"x.toml:{moved if table else 1}:{2 if table else 1}: {key.name} is missing")


@pytest.mark.parametrize("key", KEYS, ids=lambda key: key.name)
def test_a_slip_in_a_key_is_found_at_the_key_with_what_was_meant(key: Key) -> None:
    table, _, name = key.name.rpartition(".")
    slip = name[:-1] + "x" + name[-1] if len(name) > 4 else name + "x"
    text, line, _ = placed(GOOD, key, key.good)
    lines = text.splitlines()
    lines.insert(line, f"{slip} = {key.good}")
    where = f"a key of [{table}]" if table else "a key or table of this form"
    dotted = f"{table}.{slip}" if table else slip
    assert problems("\n".join(lines)) == [
        f"x.toml:{line + 1}:1: {dotted} is not {where}; did you mean {name}?"
    ]


def test_all_of_them_at_once_are_all_told_in_the_file_s_order() -> None:
    """One bad value in every table, and an unknown key: nothing hides behind anything else."""
    spoilt = GOOD
    for key in KEYS:
        if (
            key.kind == "number"
            and not key.instead_of
            and not key.needs
            and f"\n{key.name.split('.')[1]} = " in spoilt
        ):
            spoilt = placed(spoilt, key, "nan")[0]
    said = problems(spoilt + "zzz = 1\n")
    assert len(said) == 15
    assert [int(line.split(":")[1]) for line in said] == sorted(int(line.split(":")[1]) for line in said)
    assert sum("which is not a finite number" in line for line in said) == 14
