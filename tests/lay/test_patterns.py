"""The three patterns at amount 0, a half and 1, on whole programs: what they are defined to do, measured with
general statistics (scipy), and what no guide may ever be asked for."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy.typing import NDArray
from scipy import signal, stats

from tests.lay.recipes import WANDER, machine, recipe
from windctl.errors import PlanRefused
from windctl.lay.limits import check, guide_speeds, jumps
from windctl.lay.make import make_program
from windctl.lay.program import Program
from windctl.profile.builtin import VIRTUAL
from windctl.profile.model import MachineProfile

F64 = NDArray[np.float64]

PATTERNS = ("wander", "stagger", "ripple")
AMOUNTS = (0.0, 0.5, 1.0)
TURNS = 60_000
PER_PASS = 42.0
STEPS_PER_MM = 200.0
STROKE_MM = 10.8
MEAN_PITCH = STROKE_MM / PER_PASS

GOLDEN = {
    ("wander", 0.0): "5cc4b284294bfb00a9222ce1e2b38db0a1fde8588f8f1a867094bf78b972f3ca",
    ("wander", 0.5): "6cc83e0d9130320b3bf6364afddd9d4a31779d806e4f59c7fd3d3eae2ffda6ca",
    ("wander", 1.0): "c34ba9cc5e9bfc9d4c3526a5b19c9b56f7f860fc8bc696787462517b3588b2c0",
    ("stagger", 0.0): "2f16b0abbd82c19d370422239ab39c1221c4e1730a6adba2a96819a0f78f6d0c",
    ("stagger", 0.5): "d08658e6fe13ffb9ecdfcfda644520818188bbcf86170665d82d016bb6aa533f",
    ("stagger", 1.0): "9703377239e7db7315ba7583badac213c4ccba9744846236154045b3d198cdf8",
    ("ripple", 0.0): "5cc4b284294bfb00a9222ce1e2b38db0a1fde8588f8f1a867094bf78b972f3ca",
    ("ripple", 0.5): "016e0e1319280a342e9347c63d4a892bcc9db0be23ab3ae1d2243f0f1f41d620",
    ("ripple", 1.0): "29a6004ae495b571677007e50460add52455887777b0996b4e0710f9f0689b2e",
}

both = pytest.mark.parametrize("amount", AMOUNTS)
every = pytest.mark.parametrize("pattern", PATTERNS)


def program(pattern: str, amount: float, turns: int = TURNS, **changes: str | None) -> Program:
    asked = recipe(
        WANDER, lay__pattern=f'"{pattern}"', lay__amount=str(amount), stop__turns=str(turns), **changes
    )
    return make_program(asked, VIRTUAL)


def turn_round_counts(of: Program) -> NDArray[np.int64]:
    """Counts at which the guide has gone as far as it goes, first to last."""
    moving = np.flatnonzero(of.guide)
    outward = of.guide[moving] > 0
    return of.count_marks[moving[1:][outward[1:] != outward[:-1]]]


def passes(of: Program) -> F64:
    """Turns of every whole pass."""
    return np.diff(turn_round_counts(of)) / of.counts_per_turn


def pitches(of: Program) -> F64:
    """The guide's way in each turn, mm, whichever way it goes: turns that hold a turn-round are left out."""
    at = np.arange(0, of.total_counts + 1, of.counts_per_turn)
    way = np.diff(np.interp(at, of.count_marks, of.guide_marks)) / STEPS_PER_MM
    turned = np.unique(turn_round_counts(of) // of.counts_per_turn)
    return np.abs(np.delete(way, turned))


@every
@both
def test_the_same_program_for_ever(pattern: str, amount: float) -> None:
    """A digest that changes means that coils can no longer be wound again as their records say."""
    assert program(pattern, amount, turns=8000).digest == GOLDEN[pattern, amount]


@every
@both
def test_the_mean_pass_is_the_recipe_s(pattern: str, amount: float) -> None:
    turns = passes(program(pattern, amount))
    # 1400 passes; those of a wander go together over a dozen turns of 42
    error = 4 * max(float(turns.std()), 1 / 400) / math.sqrt(len(turns))
    assert turns.mean() == pytest.approx(PER_PASS, abs=error + 1 / 400)


@every
def test_amount_zero_is_regular(pattern: str) -> None:
    regular = program(pattern, 0.0)
    assert passes(regular).std() <= 1 / 400  # whole counts
    # whole guide steps at the two ends of a turn
    assert np.abs(pitches(regular) - MEAN_PITCH).max() <= 1 / STEPS_PER_MM


@both
def test_the_pitch_of_a_wander_spreads_by_half_its_mean_times_amount(amount: float) -> None:
    """Standard deviation amount / 2 of the mean, the deviation cut at four fifths of the mean."""
    pitch = pitches(program("wander", amount)) / MEAN_PITCH
    cut = stats.norm(scale=max(amount / 2, 1e-12))
    drawn = np.clip(cut.rvs(400_000, random_state=3), -0.8, 0.8)
    # of correlated values: sd * sqrt(2 * 12 / turns); quick turns are more often those left out
    assert pitch.mean() == pytest.approx(1, abs=4 * amount / 2 * math.sqrt(24 / TURNS) + 0.01)
    assert pitch.std() == pytest.approx(drawn.std(), rel=0.03, abs=0.01)
    assert pitch.min() >= 0.2 - 0.02
    assert pitch.max() <= 1.8 + 0.02


def autocorrelation(values: F64, most: int) -> F64:
    """f64[most + 1]: by lag, through scipy's correlation of the series with itself."""
    centred = values - values.mean()
    whole = signal.correlate(centred, centred, method="fft")
    lags = signal.correlation_lags(len(centred), len(centred))
    kept = whole[(lags >= 0) & (lags <= most)]
    return np.asarray(kept / kept[0])


@pytest.mark.parametrize("amount", [0.5, 1.0])
@pytest.mark.parametrize("wander_turns", [6.0, 12.0, 40.0])
def test_a_wander_forgets_within_its_wander_turns(amount: float, wander_turns: float) -> None:
    """Ornstein-Uhlenbeck: the autocorrelation falls as exp(-lag / wander_turns). By Bartlett's formula its
    error is about sqrt(wander_turns / turns) at long lags, four of which are allowed; cutting the pitch at
    four fifths of its mean takes a little off at amount 1."""
    pitch = pitches(program("wander", amount, lay__wander_turns=str(wander_turns)))
    measured = autocorrelation(pitch, round(3 * wander_turns))
    lags = np.arange(len(measured))
    error = 4 * math.sqrt(wander_turns / TURNS) + (0.03 if amount == 1.0 else 0.01)
    assert measured == pytest.approx(np.exp(-lags / wander_turns), abs=error)


@both
def test_every_pass_of_a_stagger_has_its_own_turns(amount: float) -> None:
    """Uniform within 0.3 * amount of the mean, the standing before it included in the next pass: so bounded,
    of the standard deviation of that, and no pass knows of the one before."""
    turns = passes(program("stagger", amount))
    moving = 0.3 * amount * PER_PASS / math.sqrt(3)
    standing = amount / math.sqrt(12)  # up to `amount` of a turn
    assert turns.std() == pytest.approx(math.hypot(moving, standing), rel=0.06, abs=1 / 400)
    assert np.abs(turns - PER_PASS).max() <= 0.3 * amount * PER_PASS + amount + 1 / 100
    if amount:
        assert np.abs(autocorrelation(turns, 10)[1:]).max() < 4.5 / math.sqrt(len(turns))


@both
def test_a_ripple_is_two_waves_out_of_step(amount: float) -> None:
    """0.3 and 0.2 of the mean at amount 1, periods a pass times (5 + sqrt 5) / 10 and that times the golden
    ratio: their powers by a periodogram."""
    of = program("ripple", amount, lay__turns_per_pass="42")
    at = np.arange(0, of.total_counts + 1, of.counts_per_turn)
    # unfolded at the turn-rounds, the way goes on growing
    way = np.diff(np.interp(at, of.count_marks, np.abs(np.diff(of.guide_marks, prepend=0)).cumsum()))
    pitch = way / STEPS_PER_MM / MEAN_PITCH - 1
    frequency, power = signal.periodogram(pitch, window="hann", scaling="spectrum")
    if not amount:
        assert power.max() < 1e-4  # rounding to whole steps
        return
    period = PER_PASS * (5 + math.sqrt(5)) / 10
    golden = (1 + math.sqrt(5)) / 2
    peaks = np.sort(frequency[signal.find_peaks(power, height=power.max() / 10, distance=20)[0]])
    assert peaks == pytest.approx([1 / (golden * period), 1 / period], rel=2e-3)
    for place, size in zip(peaks, (0.2, 0.3), strict=True):
        near = np.abs(frequency - place) < 5 / TURNS
        # a window spreads a line over three bins, whose powers add up to 1.5 times its own
        assert power[near].sum() / 1.5 == pytest.approx((size * amount) ** 2 / 2, rel=0.05)


@every
@both
def test_turn_rounds_are_spread_evenly_within_their_spread(pattern: str, amount: float) -> None:
    spread = 0.4
    of = program(pattern, amount, lay__reversal_spread_mm=str(spread))
    places = np.interp(turn_round_counts(of), of.count_marks, of.guide_marks) / STEPS_PER_MM
    far, near = places[::2], places[1::2]
    assert far.max() <= STROKE_MM
    assert near.min() >= 0.0
    for inside in (STROKE_MM - far, near):
        # whole steps of 0.005 mm against a continuous law
        assert (
            stats.kstest(inside, stats.uniform(0, spread).cdf).statistic
            < 1.95 / math.sqrt(len(inside)) + 0.013
        )


@every
@both
def test_the_guide_stays_between_its_turn_rounds_and_within_its_speeds(pattern: str, amount: float) -> None:
    asked = recipe(
        WANDER, lay__pattern=f'"{pattern}"', lay__amount=str(amount), lay__reversal_spread_mm="0.15"
    )
    profile = machine(guide__backlash_mm="0.05")
    made = make_program(asked, profile)
    found = check(made, asked, profile)
    assert made.guide_marks.min() >= -0.05 * STEPS_PER_MM
    assert made.guide_marks.max() <= STROKE_MM * STEPS_PER_MM
    assert (np.abs(made.guide.astype(int)) <= made.counts).all()
    assert found.guide_mm_per_s <= profile.guide.max_mm_per_s
    assert found.jump_mm_per_s <= profile.guide.start_stop_mm_per_s
    assert found.travel_mm <= profile.guide.travel_mm


@st.composite
def machines(draw: st.DrawFn) -> MachineProfile:
    """Machines of every quality, many of them too slow or too coarse for the lay."""
    return machine(
        spindle__counts_per_turn=str(draw(st.sampled_from([40, 100, 400]))),
        guide__steps_per_mm=str(draw(st.sampled_from([50, 100, 200, 640]))),
        guide__max_mm_per_s=str(draw(st.sampled_from([2.0, 8.0, 20.0]))),
        guide__start_stop_mm_per_s=str(draw(st.sampled_from([0.5, 1.5, 2.0]))),
        guide__backlash_mm=str(draw(st.sampled_from([0.0, 0.03, 0.2]))),
        guide__travel_mm=str(draw(st.sampled_from([9.0, 10.9, 60.0]))),
    )


@settings(max_examples=80)
@given(
    machines(),
    st.sampled_from(PATTERNS),
    st.floats(0, 1),
    st.floats(8, 90),
    st.sampled_from([0.0, 0.1, 1.0]),
    st.sampled_from([200, 800]),
    st.integers(0, 2**40),
)
def test_a_program_is_within_its_machine_s_limits_or_refused(
    profile: MachineProfile,
    pattern: str,
    amount: float,
    turns_per_pass: float,
    spread: float,
    rpm: int,
    seed: int,
) -> None:
    """Reckoned here from the segments alone."""
    asked = recipe(
        WANDER,
        lay__pattern=f'"{pattern}"',
        lay__amount=str(amount),
        lay__turns_per_pass=str(turns_per_pass),
        lay__reversal_spread_mm=str(spread),
        lay__seed=str(seed),
        spindle__cruise_rpm=str(rpm),
        spindle__start_rpm="100",
        spindle__finish_rpm="100",
        stop__turns="400",
    )
    try:
        made = make_program(asked, profile)
        check(made, asked, profile)
    except PlanRefused:
        return
    guide, per_turn = profile.guide, profile.spindle.counts_per_turn
    steps, counts = made.guide.astype(float), made.counts.astype(float)
    speeds = steps / guide.steps_per_mm / (counts / per_turn) * rpm / 60
    assert np.abs(steps / counts).max() <= 1.0
    assert np.abs(speeds).max() <= guide.max_mm_per_s
    assert speeds == pytest.approx(guide_speeds(made, rpm))
    assert jumps(speeds).max(initial=0.0) <= guide.start_stop_mm_per_s
    assert np.ptp(made.guide_marks) / guide.steps_per_mm <= guide.travel_mm
    assert made.total_counts == 400 * per_turn
