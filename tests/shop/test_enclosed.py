"""What coils enclose, against coils whose turns are known one by one, and against the model's own chances."""

from __future__ import annotations

import math
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from numpy.typing import NDArray

from tests.machine.plant.worlds import to_and_fro
from windctl.coil.geometry import Core, core_of
from windctl.coil.turns_area import mean_area_mm2, third_moment
from windctl.machine.plant.coil_growing import Coil, Spool
from windctl.machine.plant.fate import draw_fate
from windctl.machine.plant.made_for import plant_for
from windctl.plan.experience.basis import Basis
from windctl.plan.experience.fold import Experience, learn
from windctl.plan.experience.lesson import Build, Lesson, Measured, Resistance, Share
from windctl.plan.make import make_plan
from windctl.profile.builtin import VIRTUAL
from windctl.recipe.load import load_recipe
from windctl.recipe.model import Recipe
from windctl.shop.enclosed import Known, enclosed, unknowns_of

ROOT = Path(__file__).parents[2]
F64 = NDArray[np.float64]

CORE = Core(26.5, 0.0, 2.5)
TURNS = 5000.0
BASIS = Basis(
    bobbin="bobbin", lay="lay", style="scatter", wire="AWG 42", ohm_per_m=5.47, ohm_per_m_rel=0.04,
    overall_mm=0.0715, overall_rel=0.02, perimeter_mm=CORE.perimeter_mm, perimeter_rel=0.003,
    mould_rel=0.004, build_per_turn_mm=math.pi / 4 * 0.0715**2 / (0.63 * 6.5), crown=1.05,
    growth_rel=0.09, bed_rel=0.035,
)  # fmt: skip


def lesson(
    name: str, *measured: Measured, spool: str = "s1", turns: float = TURNS, basis: Basis = BASIS
) -> Lesson:
    return Lesson(name, "b1", spool, basis, turns, 0.004, measured)


def known(*lessons: Lesson) -> list[Known]:
    return [Known(CORE, one) for one in lessons]


def ohm_of(perimeter: float, growth: float, level: float) -> float:
    """R = rho*(P0*n + pi*c*k*n^2), each with its deviation."""
    grown = math.pi * BASIS.build_per_turn_mm * BASIS.crown * math.exp(growth) * TURNS**2
    flat = BASIS.perimeter_mm * math.exp(perimeter) * TURNS
    return BASIS.ohm_per_m * math.exp(level) * (flat + grown) / 1000


def area_of(perimeter: float, growth: float, bow: float, third: float) -> float:
    grown = CORE.grown(CORE.perimeter_mm * math.expm1(perimeter) / (2 * math.pi))
    mm = BASIS.build_per_turn_mm * BASIS.crown * TURNS * math.exp(growth)
    return mean_area_mm2(grown, mm, third, bow)


def test_with_nothing_measured_only_the_count_tells_coils_apart() -> None:
    a, b = lesson("a"), lesson("b", turns=5050.0)
    told = enclosed(known(a, b), [a, b], Experience())
    assert told.mismatch(0, 0).mean == 0.0
    # more turns stand higher, too: turns-area grows faster than turns
    ratio = told.turns_area_m2(1) / told.turns_area_m2(0)
    assert 1.01 < ratio < 1.01**2
    assert told.mismatch(0, 1).mean == pytest.approx((1 - ratio) / (1 + ratio))


def test_a_coil_that_reads_more_on_the_same_wire_encloses_more() -> None:
    plain = ohm_of(0.0, 0.0, 0.0)
    one, more = lesson("a", Resistance(plain, 0.001)), lesson("b", Resistance(1.01 * plain, 0.001))
    told = enclosed(known(one, more), [one, more], Experience())
    assert told.turns_area_m2(1) > 1.005 * told.turns_area_m2(0)
    elsewhere = replace(more, spool="s2")
    apart = enclosed(known(one, elsewhere), [one, elsewhere], Experience())
    # another spool's wire may be as much thicker or thinner: the same reading says next to nothing
    gained = math.log(told.turns_area_m2(1) / told.turns_area_m2(0))
    assert abs(math.log(apart.turns_area_m2(1) / apart.turns_area_m2(0))) < 0.2 * gained
    assert apart.mismatch(0, 1).sd > told.mismatch(0, 1).sd


def test_what_coils_have_in_common_falls_out_of_their_difference() -> None:
    ohm = Resistance(ohm_of(0.0, 0.0, 0.0), 0.001)
    a, b = lesson("a", ohm), lesson("b", ohm)
    told = enclosed(known(a, b), [a, b], Experience())
    assert told.rel(0) > 0.03  # packing and core of the kind are not known
    assert 2 * told.mismatch(0, 1).sd < told.rel(0)
    careless = [replace(one, meter_rel=0.05) for one in (a, b)]
    with_a_bad_meter = enclosed(known(*careless), careless, Experience())
    assert with_a_bad_meter.mismatch(0, 1).sd == pytest.approx(told.mismatch(0, 1).sd, rel=0.01)


def test_a_build_by_caliper_and_the_curve_tell_more_than_the_resistance() -> None:
    ohm = Resistance(ohm_of(0.0, 0.0, 0.0), 0.001)
    sds = []
    for more in ((), (Share(0.105, 0.001),), (Share(0.105, 0.001), Build(4.9, 0.05))):
        pair = [lesson("a", ohm, *more), lesson("b", ohm, *more)]
        sds.append(enclosed(known(*pair), pair, Experience()).mismatch(0, 1).sd)
    assert sds[0] > sds[1] > sds[2]


def test_what_other_coils_taught_of_the_lay_is_used() -> None:
    """Coils that read low for their turns, of spools measured by themselves: the lay packs densely."""
    others = [
        lesson(f"o{n}", Resistance(ohm_of(0.0, -0.1, 0.0), 0.001), Share(0.095, 0.001), spool=f"t{n}")
        for n in range(12)
    ]
    a, b = lesson("a"), lesson("b")
    names = unknowns_of(a) | unknowns_of(b)
    taught = learn(others, (), keep=names)
    before, after = enclosed(known(a, b), [a, b], Experience()), enclosed(known(a, b), [a, b], taught)
    assert after.turns_area_m2(0) < 0.97 * before.turns_area_m2(0)
    assert after.rel(0) < before.rel(0)


def test_coils_of_the_same_spools_can_be_taken_together_or_be_learnt_from_before() -> None:
    """The joint step and the shop's fold over lessons are two ways to the same: where spools are not shared,
    what is learnt first and what is told at once must agree, but for where slopes are taken."""
    rng = np.random.default_rng([8])
    others = [
        lesson(
            f"o{n}",
            Resistance(ohm_of(0.0, *(0.02 * rng.standard_normal(2))), 0.001),
            Build(4.9 * math.exp(0.02 * float(rng.standard_normal())), 0.1),
            spool=f"t{n}",
        )
        for n in range(5)
    ]
    ohm = ohm_of(0.001, 0.03, 0.01)
    a, b = lesson("a", Resistance(ohm, 0.001)), lesson("b", Resistance(1.004 * ohm, 0.001))
    together = enclosed(known(a, b), [*others, a, b], Experience())
    first = learn(others, (), keep=unknowns_of(a))
    then = enclosed(known(a, b), [a, b], first)
    for at in (0, 1):
        assert math.log(together.turns_area_m2(at) / then.turns_area_m2(at)) == pytest.approx(
            0.0, abs=0.05 * then.rel(at)
        )
        assert together.rel(at) == pytest.approx(then.rel(at), rel=0.03)
    assert together.mismatch(0, 1).sd == pytest.approx(then.mismatch(0, 1).sd, rel=0.01)


def test_a_typed_count_is_less_sure() -> None:
    a, b = lesson("a"), lesson("b")
    sure = enclosed(known(a, b), [a, b], Experience()).mismatch(0, 1).sd
    typed = enclosed([Known(CORE, a, 50.0), Known(CORE, b)], [a, b], Experience()).mismatch(0, 1).sd
    assert typed**2 - sure**2 == pytest.approx((50.0 / TURNS / 2) ** 2, rel=0.05)


def test_the_stated_uncertainty_is_that_of_coils_drawn_by_the_model() -> None:
    """Levels that walk, coils that stretch, cores, packing and bow that differ as is stated, two spools, one
    meter: of the differences 95 in 100 lie within their intervals."""
    rng = np.random.default_rng([9, 2])

    def draw(sd: float) -> float:
        return sd * float(rng.standard_normal())

    inside, squares, absolute = 0, [], []
    for _ in range(250):
        style, lay = draw(0.0636), draw(0.0636)
        meter, core, common_bow = draw(0.004), draw(0.003), draw(0.03)
        guess, third_sd = third_moment(BASIS.crown)
        third = guess * math.exp(draw(third_sd))
        lessons, areas = [], []
        for spool in ("s1", "s2"):
            level, slope, section, walk = draw(0.04), draw(0.0018), draw(0.04), 0.0
            for n in range(3):
                km = 0.65 * (n + 0.5)
                walk += draw(0.0015 * math.sqrt(0.65 if n else 0.325))
                perimeter, growth = core + draw(0.004), style + lay + section + draw(0.035)
                wire = level + slope * km + walk + draw(0.002)
                ohm = ohm_of(perimeter, growth, wire) * math.exp(meter + draw(0.001))
                lessons.append(lesson(f"{spool}{n}", Resistance(ohm, 0.001), spool=spool))
                areas.append(area_of(perimeter, growth, 0.15 + common_bow + draw(0.04), third))
        told = enclosed(known(*lessons), lessons, Experience())
        for one, other in ((0, 1), (0, 4), (2, 5)):
            seen = told.mismatch(one, other)
            true = math.tanh(math.log(areas[one] / areas[other]) / 2)
            z = (true - seen.mean) / seen.sd
            inside += abs(z) < 1.96
            squares.append(z * z)
        absolute.append((math.log(TURNS * areas[0] * 1e-6 / told.turns_area_m2(0)) / told.rel(0)) ** 2)
    assert 0.93 <= inside / 750 <= 0.97
    assert np.mean(squares) == pytest.approx(1.0, abs=0.12)
    assert np.mean(absolute) == pytest.approx(1.0, abs=0.25)


def laid(recipe: Recipe, seed: int, coil: int) -> tuple[Coil, float]:
    """A coil that grows turn by turn by the plant's laws, and the mean area of its turns: each on its own
    outline, the long sides bowed."""
    spec = replace(plant_for(recipe, VIRTUAL), packing_sd=0.035 * 0.63)
    fate = draw_fate(spec, seed, coil=coil, spool_seed=seed)
    path = to_and_fro(spec.margin_mm, spec.gap_mm, spec.turns_per_pass)
    wound = Coil(spec, fate, seed, Spool(coil * 650.0), next(path))
    core = core_of(recipe.bobbin)
    bare = core.grown((fate.perimeter_mm - core.perimeter_mm) / (2 * math.pi))
    for _ in range(int(TURNS)):
        wound.end_turn(next(path))
    builds = [max(0.0, (turn.length_mm - fate.perimeter_mm) / (2 * math.pi)) for turn in wound._laid]
    bows = 4 / 3 * bare.straight_mm * fate.bulge * np.array(builds)
    return wound, float(np.mean([bare.grown(build).area_mm2 for build in builds]) + bows.mean())


def test_coils_laid_turn_by_turn_lie_within_their_intervals() -> None:
    """Two coils from each of ten spools, planned from the recipe and read at the end by a meter that errs.
    Loosening, slides, bows and walks are the plant's; only its packing is drawn as wide as coils of one shop
    are said to differ."""
    recipe = load_recipe(ROOT / "recipes/hum-pair-north.toml")
    basis = make_plan(recipe, VIRTUAL).basis
    rng = np.random.default_rng([10])
    zs, absolute = [], []
    for seed in range(10):
        gain = 1.0 + 0.003 * float(rng.standard_normal())
        lessons, areas = [], []
        for coil in (0, 1):
            wound, area = laid(recipe, seed, coil)
            read = wound.ohm * gain * (1.0 + 0.001 * float(rng.standard_normal()))
            lessons.append(lesson(f"{seed} {coil}", Resistance(read, 0.001), basis=basis))
            areas.append(area)
        core = core_of(recipe.bobbin)
        told = enclosed([Known(core, one) for one in lessons], lessons, Experience())
        seen = told.mismatch(0, 1)
        zs.append((math.tanh(math.log(areas[0] / areas[1]) / 2) - seen.mean) / seen.sd)
        absolute.append(math.log(TURNS * areas[0] * 1e-6 / told.turns_area_m2(0)) / told.rel(0))
    assert 0.3 < math.sqrt(np.mean(np.square(zs))) < 1.5
    assert max(map(abs, zs)) < 3.0
    assert math.sqrt(np.mean(np.square(absolute))) < 1.5


def test_no_measured_coil_at_all_is_no_trouble() -> None:
    bare = lesson("a", spool="")
    told = enclosed(known(bare), [bare], Experience())
    assert told.rel(0) > 0.03
