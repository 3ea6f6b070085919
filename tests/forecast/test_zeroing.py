"""Leads read by themselves: what they are known to, against numpy; and small coils that gain by it."""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import hypot, sqrt

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.forecast.priors import certain, shop
from tests.forecast.scoring import Floats, Score
from tests.forecast.truth import FINE, Instruments, Truth, draw, prior_for
from windctl.forecast.belief import GROWTH, LEADS, PER_TURN, SHOWN, first_belief, resistance
from windctl.forecast.estimator import Estimate, begin, update
from windctl.forecast.finish import finish_at
from windctl.forecast.reading import Reading
from windctl.forecast.zeroing import CONTACT_SD_OHM, LEAST_READINGS, leads_of, most_leads_ohm, zeroed

FIRST_SEED = 90_000

# ---------------------------------------------------------------- leads from readings


def test_mean_and_its_uncertainty_are_the_guides() -> None:
    """JCGM 100:2008, 4.2, and JCGM 101:2008, 6.4.9.4, from memory: s^2/n times (n - 1)/(n - 3)."""
    ohms = [0.61, 0.58, 0.66, 0.60, 0.63, 0.59, 0.62, 0.64, 0.61]
    found = leads_of(ohms, 0.05)
    n = len(ohms)
    own = float(np.std(ohms, ddof=1)) / sqrt(n) * sqrt((n - 1) / (n - 3))
    assert found.ohm == pytest.approx(float(np.mean(ohms)))
    assert found.sd == pytest.approx(hypot(own, 0.05))
    assert found.steady


def test_what_scatters_more_than_the_meter_is_not_steady() -> None:
    assert not leads_of([0.5, 0.9] * 4, 0.1).steady
    assert leads_of([0.5, 0.9] * 4, 0.2).steady


@pytest.mark.parametrize("ohms", [[0.5] * (LEAST_READINGS - 1), [0.5] * 7 + [float("inf")]])
def test_too_few_or_open_ones_are_none(ohms: list[float]) -> None:
    with pytest.raises(ValueError, match="8 finite ones are needed"):
        leads_of(ohms, 0.2)


def test_a_coil_is_beyond_the_limit_and_leads_that_are_somewhat_long_are_not() -> None:
    """A default machine: 0.5 ohm, give or take 0.3, from a meter with a floor of 0.2 ohm."""
    assert most_leads_ohm(shop()) == pytest.approx(3 * 1.1 + 2 * 0.2)
    assert most_leads_ohm(certain(0.7, 1e-5)) == pytest.approx(2 * CONTACT_SD_OHM)  # nothing is allowed


# ---------------------------------------------------------------- the belief


def observed(
    turns: list[float], ohms: list[float], sd: float, leads: tuple[float, float]
) -> tuple[Floats, Floats]:
    """Ohm per turn, growth and leads from all observations at once, the leads' own among them (numpy).

    Weighted least squares with what is known before as information: of the leads, nothing.
    """
    prior = shop()
    known = np.zeros((3, 3))
    known[:2, :2] = np.linalg.inv([[prior.var_ohm_per_turn, prior.cov], [prior.cov, prior.var_growth]])
    before = np.array([prior.ohm_per_turn, prior.growth, 0.0])
    n = np.array(turns)
    design = np.vstack([np.column_stack([n, n * n / 2, np.ones_like(n)]), [[0.0, 0.0, 1.0]]])
    weights = np.array([1.0 / sd**2] * len(turns) + [1.0 / leads[1] ** 2])
    information = known + design.T @ (weights[:, None] * design)
    cov = np.linalg.inv(information)
    return cov @ (known @ before + design.T @ (weights * np.array([*ohms, leads[0]]))), cov


@given(st.floats(0.0, 5.0), st.floats(0.0, 0.5), st.integers(0, 2**32 - 1))
def test_equals_the_conditional_gaussian(ohm: float, sd: float, seed: int) -> None:
    """Nothing walks, nothing is warm, the meter is exact but for noise: all at once or reading by reading."""
    rng = np.random.default_rng(seed)
    prior = replace(
        shop(), gain_sd=0.0, celsius_sd=0.0, coil_over_air_k=0.0, coil_over_air_sd=0.0, growth_walk_rel=0.0,
        wire_walk_rel=0.0, wire_slope_rel=0.0, contact_length_ohm=0.0, turns=300.0,
    )  # fmt: skip
    turns = sorted(float(turn) for turn in rng.uniform(20.0, 300.0, 12))
    true = [prior.ohm_per_turn * 1.01 * n + prior.growth * n * n / 2 + ohm for n in turns]
    ohms = [float(one) for one in np.array(true) + rng.normal(0.0, 0.04, 12)]  # quiet: no reading is doubted
    estimate = zeroed(begin(prior), ohm, sd)
    for turn, read in zip(turns, ohms, strict=True):
        estimate, used = update(estimate, Reading(turn, read, 20.0, sd_ohm=0.1, resting=True))
        assert used
    mean, cov = observed(turns, ohms, 0.1, (ohm, hypot(sd, CONTACT_SD_OHM)))
    last, belief = turns[-1], estimate.belief
    to_now = np.array([[last, last * last / 2, 0.0], [1.0, last, 0.0], [0.0, 1.0, 0.0], [0.0, 0.0, 1.0]])
    kept = [SHOWN, PER_TURN, GROWTH, LEADS]
    np.testing.assert_allclose([belief.mean[i] for i in kept], to_now @ mean, rtol=1e-5, atol=2e-5)
    ours = np.array(belief.cov)[np.ix_(kept, kept)]
    theirs = to_now @ cov @ to_now.T
    sds = np.sqrt(np.diag(theirs))
    np.testing.assert_allclose(ours / np.outer(sds, sds), theirs / np.outer(sds, sds), atol=2e-3)


def test_a_settled_reading_is_as_sure_as_its_inputs() -> None:
    """R = V / (1 + gain) / (1 + alpha dT) - leads, of a coil of which nothing was known: by the GUM's sum of
    squares, with the leads as zeroed in place of the profile's."""
    prior = replace(
        shop(), var_ohm_per_turn=(0.5 * shop().ohm_per_turn) ** 2, cov=0.0, turns=300.0, coil_over_air_k=0.0,
        floor_ohm=0.05, gain_sd=0.001, celsius_sd=0.1, coil_over_air_sd=0.1,
    )  # fmt: skip
    true = prior.ohm_per_turn * 300.0
    for sd_zero, estimate in ((None, begin(prior)), (0.06, zeroed(begin(prior), 0.5, 0.06))):
        raw = true + prior.offset_ohm + prior.contact_length_ohm
        after, used = update(estimate, Reading(300.0, raw, 20.0, resting=True))
        assert used
        leads = prior.offset_sd if sd_zero is None else hypot(sd_zero, 0.05)
        kelvin = 0.00393 * true
        whole = hypot(0.001 * true, kelvin * 0.1, kelvin * 0.1, leads, 0.001 * raw, 0.05)
        ohm, sd = resistance(after.belief)
        assert ohm == pytest.approx(true, rel=1e-3)
        assert sd == pytest.approx(whole, rel=0.02)


def test_it_is_never_surer_than_a_contact_comes_back_and_alone_in_the_belief() -> None:
    prior = shop()
    estimate = zeroed(begin(prior), 0.8, 0.0)
    belief, before = estimate.belief, first_belief(prior)
    assert belief.mean[LEADS] == 0.8
    assert belief.cov[LEADS][LEADS] == pytest.approx(CONTACT_SD_OHM**2)
    for i in range(7):
        for j in range(7):
            if (i, j) != (LEADS, LEADS):
                assert belief.cov[i][j] == before.cov[i][j]
    assert zeroed(estimate, 0.6, 0.1).belief == zeroed(begin(prior), 0.6, 0.1).belief  # the last one counts


@pytest.mark.parametrize(("ohm", "sd"), [(-0.1, 0.1), (float("inf"), 0.1), (0.5, float("nan")), (0.5, -0.1)])
def test_figures_that_cannot_be_are_refused(ohm: float, sd: float) -> None:
    with pytest.raises(ValueError, match="cannot be"):
        zeroed(begin(shop()), ohm, sd)


def test_after_a_reading_it_is_too_late() -> None:
    estimate, _ = update(begin(shop()), Reading(100.0, 72.0, 20.0))
    with pytest.raises(ValueError, match="before the first reading"):
        zeroed(estimate, 0.5, 0.1)


# ---------------------------------------------------------------- coils of 200 ohm

SMALL_TURNS = 280
PARTS = (0.25, 0.5, 0.75, 1.0)
LONG_LEADS = replace(
    FINE, lead_ohm=2.0, lead_sd=0.5
)  # a fine meter behind leads and a slip ring that nobody measured


@dataclass(frozen=True)
class Pair:
    """The same coils, as the profile has the leads and zeroed: a score for each part of the coil."""

    plain: list[Score]
    zeroed: list[Score]


def small_coils(number: int, meter: Instruments, turns: Floats, *, resting: bool = False) -> Pair:
    """Coils of about 200 ohm read live. What is zeroed is the leads put together: the contact on the wire is
    off that by `CONTACT_SD_OHM`, and the meter near zero by its floor."""
    truth = Truth()
    prior = prior_for(truth, meter, turns=SMALL_TURNS)
    errors: dict[bool, list[list[float]]] = {False: [], True: []}
    halves: dict[bool, list[list[float]]] = {False: [], True: []}
    for seed in range(FIRST_SEED, FIRST_SEED + number):
        coil = draw(seed, truth, meter, turns=SMALL_TURNS + 20)
        rng = np.random.default_rng([21, seed])
        near_zero = meter.floor_ohm * rng.standard_normal()
        joined = (1.0 + coil.gain) * (coil.lead + CONTACT_SD_OHM * rng.standard_normal()) + near_zero
        read = joined + meter.floor_ohm * rng.standard_normal(LEAST_READINGS)
        leads = leads_of([float(one) for one in read], meter.floor_ohm)
        readings, true = coil.readings(turns, resting=resting), float(coil.ohm[SMALL_TURNS])
        for with_it in (False, True):
            estimate = zeroed(begin(prior), leads.ohm, leads.sd) if with_it else begin(prior)
            off, half = _followed(estimate, readings, true)
            errors[with_it].append(off)
            halves[with_it].append(half)
    return Pair(*(_scores(errors[way], halves[way]) for way in (False, True)))


def _followed(estimate: Estimate, readings: list[Reading], true: float) -> tuple[list[float], list[float]]:
    errors, halves, at = [], [], 0
    for part in PARTS:
        while at < len(readings) and readings[at].turn <= part * SMALL_TURNS:
            estimate, _ = update(estimate, readings[at])
            at += 1
        finish = finish_at(estimate, float(SMALL_TURNS))
        errors.append(finish.ohm / true - 1.0)
        halves.append((finish.high - finish.ohm) / true)
    return errors, halves


def _scores(errors: list[list[float]], halves: list[list[float]]) -> list[Score]:
    return [
        Score(np.array(off), np.array(half))
        for off, half in zip(zip(*errors, strict=True), zip(*halves, strict=True), strict=True)
    ]


def live_from(first: float) -> Floats:
    """Four turns from reading to reading, as a contact takes them at 1000 rpm."""
    return np.arange(first, SMALL_TURNS + 1.0, 4.0)


def holds(score: Score, long_form: bool) -> bool:
    """The 95 % interval holds in 91 to 99 %; in the short form as far as so few coils can tell."""
    low, high = (0.91, 0.99) if long_form else (0.88, 1.0)
    return low <= score.held <= high


def test_a_small_coil_that_is_stopped_to_be_read_is_known_by_its_leads(long_form: bool) -> None:
    """One reading at rest: the leads are nearly all of its error, and no other reading tells them."""
    seen = small_coils(1000 if long_form else 150, LONG_LEADS, np.array([float(SMALL_TURNS)]), resting=True)
    plain, known = seen.plain[-1], seen.zeroed[-1]
    assert plain.rms == pytest.approx(LONG_LEADS.lead_sd / 200.0, rel=0.15 if long_form else 0.25)
    assert known.rms < 0.4 * plain.rms
    assert known.halves.mean() < 0.4 * plain.halves.mean()
    assert holds(plain, long_form)
    assert holds(known, long_form)


def test_live_with_the_contact_put_on_late_every_part_gains(long_form: bool) -> None:
    """From a quarter of the coil on."""
    seen = small_coils(1000 if long_form else 150, LONG_LEADS, live_from(0.25 * SMALL_TURNS))
    assert seen.zeroed[0].rms < 0.3 * seen.plain[0].rms
    assert seen.zeroed[1].rms < 0.75 * seen.plain[1].rms
    for part, plain, known in zip(PARTS, seen.plain, seen.zeroed, strict=True):
        assert known.rms < (0.95 if long_form else 1.0) * plain.rms, part
        assert known.halves.mean() < plain.halves.mean(), part
        assert holds(known, long_form), part


def test_live_from_the_first_turns_on_the_leads_are_learnt_anyway_and_nothing_is_lost(
    long_form: bool,
) -> None:
    """A coil without turns has no resistance: the first readings are hardly more than leads. The estimate
    takes their noise for less white than it is here, and so believes the zeroing a little too much beside
    them: up to a tenth at a quarter of the coil, nothing later."""
    seen = small_coils(1000 if long_form else 100, LONG_LEADS, live_from(4.0))
    for part, plain, known in zip(PARTS, seen.plain, seen.zeroed, strict=True):
        assert known.rms < (1.12 if part < 0.5 else 1.04) * plain.rms, part
        assert known.halves.mean() < plain.halves.mean(), part
        assert holds(known, long_form), part
