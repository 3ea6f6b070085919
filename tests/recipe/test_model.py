"""What a recipe says, and its digest."""

from __future__ import annotations

import hashlib
import typing

import pydantic
import pytest

from tests.recipe.samples import GOOD, replaced
from windctl.recipe.load import parse_recipe
from windctl.recipe.model import Recipe

# The keys of the outward form, format 1, table by table. A key that vanishes breaks every shop's files.
KEYS = {
    "": "format name notes bobbin coil wire lay spindle tension stop",
    "bobbin": "core_length_mm core_width_mm corner_radius_mm core_perimeter_mm flange_gap_mm flange_depth_mm",
    "coil": "direction_from_face mounted start_flange magnet_up",
    "wire": "gauge diameter_mm enamel overall_mm insulation ohm_per_m_20c ohm_per_m_sd",
    "lay": "style pitch_mm turns_per_pass margin_mm pattern amount seed reversal_spread_mm wander_turns "
    "packing packing_sd",
    "spindle": "start_rpm start_turns cruise_rpm finish_rpm finish_turns ramp_rpm_per_s",
    "tension": "set_cn band_cn",
    "stop": "turns dcr_20c_ohm tolerance_pct min_turns max_turns",
}


def test_the_keys_are_those_of_the_form() -> None:
    assert set(Recipe.model_fields) == set(KEYS[""].split())
    for table, keys in KEYS.items():
        if table:
            kinds = [
                Recipe.model_fields[table].annotation,
                *typing.get_args(Recipe.model_fields[table].annotation),
            ]
            (form,) = [
                kind for kind in kinds if isinstance(kind, type) and issubclass(kind, pydantic.BaseModel)
            ]
            assert set(form.model_fields) == set(keys.split())


def test_absent_tables_and_keys_are_none() -> None:
    recipe = parse_recipe(GOOD)
    assert recipe.tension is None
    assert recipe.notes is None
    assert recipe.bobbin.core_perimeter_mm is None
    assert recipe.stop.dcr_20c_ohm is None


def test_whole_numbers_are_taken_for_numbers() -> None:
    assert isinstance(parse_recipe(GOOD).bobbin.core_length_mm, float)


def test_a_recipe_cannot_be_changed() -> None:
    recipe = parse_recipe(GOOD)
    with pytest.raises(pydantic.ValidationError, match="frozen"):
        recipe.lay.pitch_mm = 0.3  # type: ignore[misc]  # refusing it is the point


def test_the_pitch_whichever_way_it_is_given() -> None:
    assert parse_recipe(GOOD).pitch_mm == 0.22
    by_turns = parse_recipe(replaced(GOOD, "pitch_mm", "turns_per_pass = 52"))
    assert by_turns.stroke_mm == pytest.approx(10.4)
    assert by_turns.pitch_mm == pytest.approx(0.2)


def test_the_program_covers_the_turns_or_the_most_turns() -> None:
    assert parse_recipe(GOOD).program_turns == 8000
    ohms = replaced(GOOD, "turns", "dcr_20c_ohm = 5900\nmin_turns = 7300\nmax_turns = 8700")
    assert parse_recipe(ohms).program_turns == 8700


def test_the_wire_is_what_the_table_says() -> None:
    """AWG 42 by the law of ASTM B258 and 1/58 ohm mm2/m: 5.4716 ohm/m (computed)."""
    wire = parse_recipe(GOOD).wire_data()
    assert wire.overall_mm == 0.072
    assert wire.ohm_per_m == pytest.approx(5.4716, abs=5e-5)
    measured = replaced(GOOD, "overall_mm", "overall_mm = 0.072\nohm_per_m_20c = 5.6\nohm_per_m_sd = 0.02")
    assert parse_recipe(measured).wire_data().ohm_per_m_sd == 0.02


def test_the_digest_does_not_see_layout_comments_or_order() -> None:
    recipe = parse_recipe(GOOD)
    tables = GOOD.split("[")
    shuffled = tables[0] + "".join(f"[{table}" for table in reversed(tables[1:]))
    other = parse_recipe(
        shuffled.replace(" = ", "=").replace("core_width_mm=6", "core_width_mm = 6.0 # wide")
    )
    assert other.digest == recipe.digest


@pytest.mark.parametrize(
    ("key", "line"),
    [
        ("name", 'name = "Other"'),
        ("seed", "seed = 8"),
        ("pitch_mm", "pitch_mm = 0.2200001"),
        ("turns", "turns = 8001"),
    ],
)
def test_the_digest_sees_every_value(key: str, line: str) -> None:
    assert parse_recipe(replaced(GOOD, key, line)).digest != parse_recipe(GOOD).digest


def test_the_digest_stays_what_it_is() -> None:
    """Records name recipes by it. The canonical text is written out by hand from its rule: sorted keys,
    no blanks, no absent keys."""
    recipe = parse_recipe(GOOD)
    assert recipe.canonical_json() == CANONICAL
    assert recipe.digest == hashlib.sha256(CANONICAL.encode("utf-8")).hexdigest()


def test_the_canonical_text_is_utf_8_not_escapes() -> None:
    assert '"name":"Prüfling"' in parse_recipe(replaced(GOOD, "name", 'name = "Prüfling"')).canonical_json()


def test_the_canonical_json_gives_the_recipe_back() -> None:
    recipe = parse_recipe(GOOD)
    assert Recipe.model_validate_json(recipe.canonical_json()) == recipe


CANONICAL = (
    '{"bobbin":{"core_length_mm":56.0,"core_width_mm":6.0,"corner_radius_mm":3.0,"flange_depth_mm":8.5,'
    '"flange_gap_mm":11.0},"coil":{"direction_from_face":"cw","mounted":"face out","start_flange":"base"},'
    '"format":1,"lay":{"amount":0.4,"margin_mm":0.3,"pattern":"wander","pitch_mm":0.22,"seed":7,'
    '"style":"scatter"},"name":"Sample","spindle":{"cruise_rpm":1000.0,"finish_rpm":120.0,"finish_turns":40,'
    '"ramp_rpm_per_s":60.0,"start_rpm":150.0,"start_turns":20},"stop":{"tolerance_pct":2.0,"turns":8000},'
    '"wire":{"gauge":"AWG 42","overall_mm":0.072}}'
)
