"""A plan that draws on a spool and on experience."""

from __future__ import annotations

from dataclasses import replace
from math import log

import pytest

from tests.lay.recipes import WANDER, machine, recipe
from windctl.errors import UsageError
from windctl.plan.experience.fold import Experience, learn
from windctl.plan.experience.keys import asked_for, bobbin_key, lay_key
from windctl.plan.experience.lesson import Lesson, Resistance
from windctl.plan.experience.reel import Weighing, coils_left, left_on
from windctl.plan.experience.spool import PieceMeasured, Spool
from windctl.plan.experience.supply import Left, Supply
from windctl.plan.make import make_plan
from windctl.profile.builtin import VIRTUAL

SPOOL = Spool("s1", gauge="AWG 42", enamel="grade 1")
SCATTER = recipe(WANDER, wire__ohm_per_m_20c=None, wire__overall_mm=None, wire__enamel='"grade 1"')
PLAN = make_plan(SCATTER, VIRTUAL, supply=Supply(SPOOL))


def taught(off: float, coils: int = 3) -> Experience:
    """After coils of the recipe that had so much more than planned."""
    ohm = PLAN.dcr_20c_ohm * (1.0 + off)
    lessons = [
        Lesson(f"v1-2026-{n:04d}", "v1", "s1", PLAN.basis, 8000.0, 0.004, (Resistance(ohm, 0.002),))
        for n in range(coils)
    ]
    return learn(lessons, [SPOOL])


def test_coils_from_the_spool_move_and_narrow_the_plan() -> None:
    after = make_plan(SCATTER, VIRTUAL, supply=Supply(SPOOL, taught(0.05)))
    assert after.dcr_20c_ohm == pytest.approx(1.05 * PLAN.dcr_20c_ohm, rel=0.004)
    assert after.dcr_sd_ohm < 0.3 * PLAN.dcr_sd_ohm
    assert (after.learnt.spool, after.learnt.spool_coils, after.learnt.lay_coils) == ("s1", 3, 3)
    assert after.program.digest == PLAN.program.digest
    crown, growth = after.basis.crown, after.basis.growth_rel  # these go with the build
    assert after.basis == replace(PLAN.basis, crown=crown, growth_rel=growth)
    prior = after.prior
    whole = prior.ohm_per_turn * 8000 + prior.growth * 8000**2 / 2
    assert whole == pytest.approx(after.dcr_20c_ohm)
    assert prior.meter_cov < 0.0  # the same meter that taught will read


def test_a_resistance_target_takes_fewer_turns_of_wire_that_has_more() -> None:
    to_ohm = recipe(
        WANDER, wire__ohm_per_m_20c=None, wire__overall_mm=None, wire__enamel='"grade 1"',
        stop__turns=None, stop__dcr_20c_ohm="5800", stop__min_turns="6500", stop__max_turns="9500",
    )  # fmt: skip
    before = make_plan(to_ohm, VIRTUAL, supply=Supply(SPOOL))
    after = make_plan(to_ohm, VIRTUAL, supply=Supply(SPOOL, taught(0.05)))
    assert after.turns / before.turns == pytest.approx(
        1 / 1.05, abs=0.008
    )  # longer turns count a little less
    assert after.turns_sd < 0.3 * before.turns_sd


def test_the_spool_beats_what_the_recipe_once_measured() -> None:
    """Ohm per metre and thickness belong to a spool; the recipe outlives it."""
    measured = recipe(WANDER, wire__ohm_per_m_20c="5.2", wire__ohm_per_m_sd="0.01")
    on_spool = make_plan(measured, VIRTUAL, supply=Supply(SPOOL))
    assert on_spool.ohm_per_m == pytest.approx(5.4716, rel=1e-4)  # AWG 42 by the gauge law
    piece = learn([PieceMeasured("s1", 5.4716 * 1.02, 0.005)], [SPOOL])
    known = make_plan(measured, VIRTUAL, supply=Supply(SPOOL, piece))
    assert known.ohm_per_m == pytest.approx(5.4716 * 1.02, rel=1e-3)
    assert known.dcr_sd_ohm < 0.5 * on_spool.dcr_sd_ohm


def test_another_wire_than_the_recipe_s_is_refused() -> None:
    for spool, words in (
        (Spool("s2", gauge="AWG 43", enamel="grade 1"), "asks for AWG 42, and spool s2 has AWG 43"),
        (
            Spool("s3", gauge="AWG 42", enamel="grade 2"),
            "asks for enamel of grade 1, and spool s3 has grade 2",
        ),
        (Spool("s4", diameter_mm=0.063, enamel="grade 1"), r"spool s4 has 0\.063 mm"),
    ):
        with pytest.raises(UsageError, match=words):
            make_plan(SCATTER, VIRTUAL, supply=Supply(spool))


def test_wire_that_may_not_last_is_a_caution() -> None:
    takes = PLAN.wire_length_m
    for left, words in (
        (Left(2.0 * takes, 20.0), None),
        (Left(takes + 10.0, 20.0), "may run out before the stop: about"),
        (Left(0.5 * takes, 20.0), "is likely to run out before the stop"),
        (Left(-30.0, 20.0), "about 0 m are left"),
    ):
        said = [
            w for w in make_plan(SCATTER, VIRTUAL, supply=Supply(SPOOL, left=left)).warnings if "spool" in w
        ]
        assert (words is None) == (not said)
        assert words is None or words in said[0]


def test_what_is_left_on_a_spool() -> None:
    """Mass over mass per metre, less what was wound: AWG 42 with grade 1 has 29.2 g per kilometre."""
    wire = SPOOL.wire()
    left = left_on(SPOOL, Experience(), Weighing(100.0, 0.5, 1000.0))
    assert left.metres == pytest.approx(100.0 / wire.mass_g_per_m - 1000.0)
    assert left.sd == pytest.approx(0.041 * 100.0 / wire.mass_g_per_m, rel=0.05)  # the table's 4 %
    thin = left_on(SPOOL, taught(0.05), Weighing(100.0, 0.5, 1000.0))
    assert thin.metres + 1000.0 == pytest.approx(1.05 * (left.metres + 1000.0), rel=0.01)
    assert thin.sd < 0.5 * left.sd
    assert coils_left(Left(3500.0, 100.0), 1100.0) == 3
    assert coils_left(Left(3400.0, 100.0), 1100.0) == 2  # the third might not be finished
    assert coils_left(Left(-50.0, 100.0), 1100.0) == 0


def test_coils_share_what_their_keys_say() -> None:
    other_seed = recipe(WANDER, lay__seed="21")
    assert lay_key(recipe(WANDER)) == lay_key(other_seed)
    assert lay_key(recipe(WANDER)) == lay_key(recipe(WANDER, wire__ohm_per_m_20c="5.3"))
    assert lay_key(recipe(WANDER)) == lay_key(recipe(WANDER, stop__turns="7000"))
    for change in ({"bobbin__flange_gap_mm": "12.0"}, {"lay__amount": "0.6"}, {"wire__gauge": '"AWG 43"'}):
        assert lay_key(recipe(WANDER)) != lay_key(recipe(WANDER, **change))
    assert bobbin_key(recipe()) == bobbin_key(recipe(WANDER))
    assert bobbin_key(recipe()) != bobbin_key(recipe(bobbin__core_perimeter_mm="119.0"))
    assert ("level", "s1") in asked_for(recipe(), "s1", "b1")
    assert all(name[0] != "level" for name in asked_for(recipe(), "", "b1"))


def test_a_stated_packing_is_not_the_shop_s() -> None:
    stated = make_plan(recipe(WANDER, lay__packing="0.6", lay__packing_sd="0.02"), machine())
    assert stated.basis.style == ""
    assert stated.basis.growth_rel**2 + stated.basis.bed_rel**2 < 0.06**2
    assert log(stated.packing) == pytest.approx(log(0.6))
