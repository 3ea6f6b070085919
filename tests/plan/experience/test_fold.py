"""The fold over lessons: withdrawing is exact, forgetting does no harm, what does not fit is left out."""

from __future__ import annotations

from dataclasses import replace
from math import log

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from tests.forecast.truth import DEFAULT
from tests.plan.experience.lots import TURNS, basis, lesson, lot, settled
from windctl.plan.beliefs import Believed
from windctl.plan.experience.fold import Experience, Teaching, at_coil, learn
from windctl.plan.experience.lesson import Build, Lesson, Mass, Resistance, Share
from windctl.plan.experience.outlook import Outlook, outlook
from windctl.plan.experience.spool import PieceMeasured, Spool

SPOOLS = (Spool("s1", gauge="AWG 42", enamel="grade 1"), Spool("s2", gauge="AWG 42", enamel="grade 1"))
BASIS = basis()
OHM = BASIS.ohm_per_m * BASIS.coil.wire_length_m(TURNS)

near = st.floats(-0.08, 0.08)


@st.composite
def lessons(draw: st.DrawFn) -> Lesson:
    """A coil of any of two spools, two lays and two benches, measured in any of four ways, or not at all."""
    based = replace(BASIS, lay=draw(st.sampled_from(["scatter a", "scatter b"])))
    measured = []
    if draw(st.booleans()):
        measured.append(Resistance(OHM * (1.0 + draw(near)), 0.002))
    if draw(st.booleans()):
        measured.append(Share(0.107 * (1.0 + draw(near)), 0.003))
    if draw(st.booleans()):
        measured.append(Mass(32.0 * (1.0 + draw(near)), 0.02))
    if draw(st.booleans()):
        measured.append(Build(4.8 * (1.0 + draw(near)), 0.1))
    return Lesson(
        coil=draw(st.uuids()).hex,
        bench=draw(st.sampled_from(["b1", "b2"])),
        spool=draw(st.sampled_from(["s1", "s2", ""])),
        basis=based,
        turns=draw(st.floats(1000.0, 9000.0)),
        meter_rel=0.004,
        measured=tuple(measured),
    )


pieces = st.builds(PieceMeasured, st.sampled_from(["s1", "s2"]), st.floats(5.2, 5.8), st.just(0.005))
histories = st.lists(st.one_of(lessons(), pieces), max_size=6)
FEW = settings(max_examples=40)


def coming(spool: str = "s1", lay: str = "scatter a") -> Lesson:
    return Lesson("next", "b1", spool, replace(BASIS, lay=lay), float(TURNS), 0.004, ())


@FEW
@given(before=histories, one=lessons(), after=histories)
def test_a_withdrawn_coil_leaves_nothing_behind(
    before: list[Teaching], one: Lesson, after: list[Teaching]
) -> None:
    """What is known is the fold over the others, to the last bit: there is no state that could remember."""
    former = outlook(learn(before, SPOOLS), coming())
    taught = outlook(learn([*before, one], SPOOLS), coming())
    assert outlook(learn(before, SPOOLS), coming()) == former
    without = [teaching for teaching in [*before, one, *after] if teaching is not one]
    assert outlook(learn(without, SPOOLS), coming()) == outlook(learn([*before, *after], SPOOLS), coming())
    if one.measured and one.spool == "s1" and not learn([*before, one], SPOOLS).unfit:
        assert taught != former


@FEW
@given(
    history=histories, spool=st.sampled_from(["s1", "s2"]), lay=st.sampled_from(["scatter a", "scatter b"])
)
def test_to_forget_what_is_not_asked_for_changes_no_bit_of_what_is(
    history: list[Teaching], spool: str, lay: str
) -> None:
    keep = {(what, spool) for what in ("level", "slope", "area", "metal")}
    keep |= {("lay", lay), ("jaws", lay), ("style", "scatter"), ("core", BASIS.bobbin), ("meter", "b1")}
    whole, thrifty = learn(history, SPOOLS), learn(history, SPOOLS, keep)
    assert outlook(thrifty, coming(spool, lay)) == outlook(whole, coming(spool, lay))
    assert set(thrifty.belief.names) <= keep


@FEW
@given(history=histories)
def test_a_belief_stays_one(history: list[Teaching]) -> None:
    belief = learn(history, SPOOLS).belief
    if belief.names:
        cov = np.array(belief.cov)
        assert (cov == cov.T).all()
        scale = np.sqrt(np.diag(cov))
        assert (scale > 0.0).all()
        assert np.linalg.eigvalsh(cov / np.outer(scale, scale)).min() > -1e-9


def resistance(off: float) -> tuple[Resistance]:
    return (Resistance(OHM * (1.0 + off), 0.002),)


def told(*offs: float, spool: str = "s1") -> list[Lesson]:
    return [
        replace(coming(spool), coil=f"{spool} {n}", measured=resistance(off)) for n, off in enumerate(offs)
    ]


def sd_of(known: Outlook) -> float:
    """Of the next coil's resistance, relative."""
    return Believed(BASIS, known).resistance_sd_ohm(TURNS) / OHM


def test_a_coil_teaches_its_spool_and_the_next_one_is_nearer() -> None:
    blank, after = outlook(Experience(), coming()), outlook(learn(told(0.04)), coming())
    assert blank.wire == blank.core == blank.growth == 0.0
    assert after.wire == pytest.approx(log(1.04), abs=0.006)  # nearly all of it is the wire's
    assert (after.spool_coils, after.lay_coils) == (1, 1)
    assert sd_of(after) < 0.3 * sd_of(blank)
    other = outlook(learn(told(0.04)), coming("s2"))  # of another spool the wire is as unsure as before
    assert abs(other.wire) < 0.001
    assert sd_of(other) > 0.95 * sd_of(blank)
    assert (other.spool_coils, other.lay_coils) == (0, 1)


def test_coils_of_which_nobody_said_from_which_spool_share_no_wire() -> None:
    after = outlook(learn(told(0.06, 0.05, 0.055, spool="")), coming(""))
    blank = outlook(Experience(), coming(""))
    assert abs(after.wire) < 0.002
    assert sd_of(after) > 0.95 * sd_of(blank)
    assert after.lay_coils == 3


def test_the_level_of_a_spool_grows_old_with_the_metres() -> None:
    """0.15 % per square root of a kilometre and a slope of 0.18 % per km, since the last coil's middle."""
    taught = learn(told(0.02))
    near, far = (outlook(taught.moved("s1", metres), coming()).var_flat for metres in (0.0, 8000.0))
    assert far - near > 0.8 * (0.0015**2 * 6.2 + 0.0018**2 * (7.4**2 - 1.2**2))
    untaught = replace(coming(), coil="unmeasured")  # it took wire, and says nothing
    older = outlook(learn([*told(0.02), untaught]), coming())
    assert sd_of(older) > sd_of(outlook(taught, coming()))


def test_a_piece_measured_from_the_spool_counts_as_it_is_sure() -> None:
    nominal = SPOOLS[0].wire().ohm_per_m
    known = learn([PieceMeasured("s1", nominal * 1.03, 0.005)], SPOOLS)
    level = known.of(("level", "s1"))
    assert level is not None
    # the table's 4 % against the piece's 0.5 %, weighed by their inverse squares
    weight = 0.005**-2 / (0.005**-2 + (SPOOLS[0].wire().ohm_per_m_sd / nominal) ** -2)
    assert level.mean == pytest.approx(weight * log(1.03))
    assert level.sd == pytest.approx(0.005 * weight**0.5)
    assert level.coils == 0
    nobody = learn([PieceMeasured("s9", nominal, 0.005)], SPOOLS)  # a spool that is not in the book
    assert nobody == Experience()


def test_a_coil_that_is_far_off_teaches_nothing_and_is_told() -> None:
    """A gauge number off is 26 % (ASTM B258's law); with a spool that is known, a shorted tenth is enough."""
    right = told(0.01, 0.012)
    for off in (0.26, -0.1):
        wrong = replace(coming(), coil="wrong", measured=resistance(off))
        taught = learn([*right, wrong])
        (unfit,) = taught.unfit
        assert (unfit.coil, unfit.spool) == ("wrong", "s1")
        assert unfit.off == pytest.approx(log((1.0 + off) / 1.011), abs=0.003)
        blank = replace(wrong, measured=())
        assert outlook(taught, coming()).wire == pytest.approx(outlook(learn([*right, blank]), coming()).wire)


def test_coils_that_differ_by_more_than_stated_widen_what_is_foreseen() -> None:
    steady = [0.01 + 0.004 * (-1) ** n for n in range(10)]
    wild = [0.01 + 0.025 * (-1) ** n for n in range(10)]
    quiet, loud = (outlook(learn(told(*offs)), coming()) for offs in (steady, wild))
    assert sd_of(loud) > 1.8 * sd_of(quiet)
    elsewhere = outlook(learn(told(*wild)), coming(lay="scatter b"))
    assert elsewhere.var_flat < loud.var_flat  # another lay's coils are not blamed


def test_the_same_coils_give_the_same_bits() -> None:
    def known() -> Outlook:
        coils = [lesson(i, (settled(one),), DEFAULT, BASIS) for i, one in enumerate(lot(3, 4))]
        return outlook(learn(coils), lesson(9, (), DEFAULT, BASIS))

    assert known() == known()


def test_a_coil_is_known_at_its_middle() -> None:
    there = at_coil(Experience(), coming())
    assert there.places == {"s1": pytest.approx(BASIS.coil.wire_length_m(TURNS) / 2.0)}
