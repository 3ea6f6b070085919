"""Keys that are each valid and do not go together: what is said, and where."""

from __future__ import annotations

import pytest

from tests.recipe.samples import GOOD, problems, replaced, without
from windctl.recipe.load import parse_recipe

EVEN = replaced(GOOD, "style", 'style = "even"')
for _key in ("pattern", "amount", "seed"):
    EVEN = without(EVEN, _key)
OHMS = replaced(GOOD, "turns", "dcr_20c_ohm = 5900\nmin_turns = 7300\nmax_turns = 8700")


def test_the_samples_are_good() -> None:
    for text in (GOOD, EVEN, OHMS):
        parse_recipe(text)


@pytest.mark.parametrize(
    ("key", "lines", "said"),
    [
        # the bobbin
        (
            "core_width_mm",
            "core_width_mm = 57",
            "5:17: bobbin.core_width_mm is 57 mm, more than the core's length of 56 mm",
        ),
        (
            "corner_radius_mm",
            "corner_radius_mm = 3.01",
            "6:20: bobbin.corner_radius_mm is 3.01 mm, more than half the core's width, 3 mm",
        ),
        (
            "flange_depth_mm",
            "flange_depth_mm = 8.5\ncore_perimeter_mm = 2377",
            "9:21: bobbin.core_perimeter_mm is 2377 mm, which a core of 56 by 6 mm cannot "
            "have: 100.8 to 136.4 mm; "
            "give the length of one turn, not of all that were wrapped",
        ),
        # the wire
        ("gauge", 'gauge = "AWG 420"', '14:9: wire.gauge is "AWG 420", not a gauge; write it like "AWG 42"'),
        ("gauge", 'gauge = "AWG 57"', '14:9: wire.gauge is "AWG 57", outside AWG 1 to AWG 56'),
        (
            "gauge",
            'gauge = "AWG 42"\ndiameter_mm = 0.063',
            "15:1: wire.diameter_mm is given as well as gauge; exactly one of them may be",
        ),
        ("gauge", "", "13:2: wire.gauge is missing, and so is diameter_mm; exactly one of them is needed"),
        (
            "overall_mm",
            'overall_mm = 0.072\nenamel = "grade 1"',
            "15:1: wire.overall_mm is given as well as enamel; exactly one of them may be",
        ),
        (
            "overall_mm",
            "",
            "13:2: wire.enamel is missing, and so is overall_mm; exactly one of them is needed",
        ),
        (
            "overall_mm",
            "overall_mm = 0.063",
            "15:14: wire.overall_mm is 0.063 mm, less than the bare wire's diameter of 0.06334 mm",
        ),
        (
            "gauge",
            "diameter_mm = 0.08",
            "15:14: wire.overall_mm is 0.072 mm, less than the bare wire's diameter of 0.08 mm",
        ),
        (
            "overall_mm",
            "overall_mm = 0.072\nohm_per_m_sd = 0.1",
            "16:16: wire.ohm_per_m_sd stands alone; give wire.ohm_per_m_20c, whose uncertainty it is",
        ),
        # the lay
        (
            "pitch_mm",
            "pitch_mm = 0.22\nturns_per_pass = 47",
            "19:1: lay.turns_per_pass is given as well as pitch_mm; exactly one of them may be",
        ),
        (
            "pitch_mm",
            "",
            "16:2: lay.pitch_mm is missing, and so is turns_per_pass; exactly one of them is needed",
        ),
        (
            "pitch_mm",
            "pitch_mm = 10.5",
            "18:12: lay.pitch_mm is 10.5 mm, more than the guide's whole stroke of 10.4 mm",
        ),
        (
            "pitch_mm",
            "turns_per_pass = 0.5",
            "18:18: lay.turns_per_pass is 0.5 turns, a pitch of 20.8 mm, more than the "
            "guide's whole stroke of 10.4 mm",
        ),
        (
            "margin_mm",
            "margin_mm = 5.5",
            "19:13: lay.margin_mm is 5.5 mm at each flange, which leaves the guide no stroke "
            "in the gap of 11 mm; "
            "must be less than 5.5 mm",
        ),
        (
            "margin_mm",
            "margin_mm = -12",
            "19:13: lay.margin_mm is -12 mm, further outside than the gap of 11 mm is high",
        ),
        ("pattern", "", '16:2: lay.pattern is missing; a lay of style "scatter" needs it'),
        ("amount", "", '16:2: lay.amount is missing; a lay of style "scatter" needs it'),
        ("seed", "", '16:2: lay.seed is missing; a lay of style "scatter" needs it'),
        (
            "seed",
            "seed = 7\nreversal_spread_mm = 5.2",
            "23:22: lay.reversal_spread_mm is 5.2 mm, not less than half the guide's stroke, 5.2 mm",
        ),
        (
            "seed",
            "seed = 7\npacking_sd = 0.05",
            "23:14: lay.packing_sd stands alone; give lay.packing, whose uncertainty it is",
        ),
        # the spindle
        (
            "start_rpm",
            "start_rpm = 1001",
            "24:13: spindle.start_rpm is 1001 rpm, more than spindle.cruise_rpm of 1000 rpm",
        ),
        (
            "finish_rpm",
            "finish_rpm = 1000.5",
            "27:14: spindle.finish_rpm is 1000.5 rpm, more than spindle.cruise_rpm of 1000 rpm",
        ),
        # tension and stop
        (
            "tolerance_pct",
            "tolerance_pct = 2\n[tension]\nband_cn = 5",
            "34:11: tension.band_cn stands alone; give tension.set_cn, around which it lies",
        ),
        ("turns", "", "30:2: stop.turns is missing, and so is dcr_20c_ohm; exactly one of them is needed"),
        (
            "turns",
            "turns = 8000\nmax_turns = 7999",
            "31:9: stop.turns is 8000 turns, more than stop.max_turns of 7999 turns",
        ),
        (
            "turns",
            "turns = 8000\nmin_turns = 8001",
            "31:9: stop.turns is 8000 turns, less than stop.min_turns of 8001 turns",
        ),
        (
            "turns",
            "dcr_20c_ohm = 5900\nmin_turns = 8000\nmax_turns = 7000",
            "32:13: stop.min_turns is 8000 turns, more than stop.max_turns of 7000 turns",
        ),
    ],
)
def test_one_fault(key: str, lines: str, said: str) -> None:
    assert problems(replaced(GOOD, key, lines)) == [f"x.toml:{said}"]


def test_a_resistance_target_needs_its_limits_and_no_turns() -> None:
    text = replaced(GOOD, "turns", "turns = 8000\ndcr_20c_ohm = 5900")
    assert problems(text) == [
        "x.toml:30:2: stop.max_turns is missing; a resistance target (stop.dcr_20c_ohm) needs it",
        "x.toml:30:2: stop.min_turns is missing; a resistance target (stop.dcr_20c_ohm) needs it",
        "x.toml:32:1: stop.dcr_20c_ohm is given as well as turns; exactly one of them may be",
    ]


def test_an_even_lay_may_not_be_denser_than_the_wire_is_thick() -> None:
    """By the outward form: an error for an even lay, a warning later for a scatter."""
    assert problems(replaced(EVEN, "pitch_mm", "pitch_mm = 0.02")) == [
        "x.toml:18:12: lay.pitch_mm is 0.02 mm, less than the wire's overall diameter of 0.072 mm"
    ]
    assert problems(replaced(EVEN, "pitch_mm", "turns_per_pass = 150")) == [
        "x.toml:18:18: lay.turns_per_pass is 150 turns, a pitch of 0.0693 mm, "
        "less than the wire's overall diameter of 0.072 mm"
    ]
    parse_recipe(replaced(EVEN, "pitch_mm", "pitch_mm = 0.072"))
    parse_recipe(replaced(GOOD, "pitch_mm", "pitch_mm = 0.02"))


def test_patterns_are_only_for_a_scatter() -> None:
    scatter_only = 'pattern = "ripple"\namount = 0.1\nseed = 1\nreversal_spread_mm = 0.1\nwander_turns = 9'
    said = problems(replaced(EVEN, "margin_mm", "margin_mm = 0.3\n" + scatter_only))
    assert said == [
        f'x.toml:{line}:1: lay.{key} is only for a lay of style "scatter", and lay.style is "even"'
        for line, key in enumerate(
            ("pattern", "amount", "seed", "reversal_spread_mm", "wander_turns"), start=20
        )
    ]


def test_a_margin_may_be_negative_and_a_stroke_not_narrower_than_the_wire() -> None:
    assert parse_recipe(replaced(GOOD, "margin_mm", "margin_mm = -0.5")).stroke_mm == 12.0
    said = problems(
        replaced(replaced(GOOD, "margin_mm", "margin_mm = 5.47"), "pitch_mm", "turns_per_pass = 2")
    )
    assert said == [
        "x.toml:19:13: lay.margin_mm is 5.47 mm at each flange, which leaves the guide a stroke of 0.06 mm, "
        "less than the wire's overall diameter of 0.072 mm"
    ]


def test_an_enamel_grade_outside_the_table_asks_for_the_micrometer() -> None:
    text = replaced(replaced(GOOD, "gauge", 'gauge = "AWG 30"'), "overall_mm", 'enamel = "grade 1"')
    assert problems(text) == [
        'x.toml:15:10: wire.enamel is "grade 1", but no enamel range is known for 0.2546 mm bare, '
        "only for 0.05 to 0.1 mm; measure the wire and give wire.overall_mm"
    ]


def test_faults_between_tables_are_found_beside_faults_within_them() -> None:
    """The pitch is judged although other keys of its own table and of the wire's are wrong."""
    text = replaced(EVEN, "pitch_mm", "pitch_mm = 0.02\nsneed = 3\npacking = 0.95")
    text = replaced(text, "gauge", 'gauge = "AWG 42"\ninsulation = ""')
    text = replaced(text, "tolerance_pct", "tolerance_pct = 0")
    assert problems(text) == [
        "x.toml:15:14: wire.insulation is empty",
        "x.toml:19:12: lay.pitch_mm is 0.02 mm, less than the wire's overall diameter of 0.072 mm",
        "x.toml:20:1: lay.sneed is not a key of [lay]; did you mean seed?",
        "x.toml:21:11: lay.packing is 0.95, must be at most 0.91",
        "x.toml:32:17: stop.tolerance_pct is 0 %, must be more than 0 %",
    ]
