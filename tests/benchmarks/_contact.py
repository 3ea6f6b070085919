"""What a bad contact or a wrong spool does to the forecast."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from tests.forecast.scoring import follow
from tests.forecast.situations import GAUGE, live
from tests.forecast.test_alarm import NEXT_GAUGE, first_alarm
from tests.forecast.truth import FINE, TURNS, Truth, bounced, draw, prior_for
from windctl.forecast.estimator import begin, update
from windctl.forecast.finish import finish_at


def alarms(seeds: range) -> None:
    """AWG 43 where the recipe says 42, and right coils behind the same bouncing contact."""
    texts = [first_alarm(seed, NEXT_GAUGE, 500) for seed in seeds]
    told = [text for text in texts if text is not None]
    named = sum("one gauge number thinner" in text for text in told)
    false = sum(first_alarm(seed, 1.0, TURNS) is not None for seed in seeds)
    soon, name, wrong = (100 * count / len(seeds) for count in (len(told), named, false))
    print(
        f"  AWG 43 for 42, 2 % bounce: told by turn 500 in {soon:.1f} % (asked >= 99), named in {name:.1f} %"
    )
    print(f"  alarms on right coils, 2 % bounce: {wrong:.1f} % (asked < 1)")


def bad_first_reading(seeds: range) -> None:
    """The first reading spoilt as a bouncing contact spoils one, and half a coil of good ones after it."""
    turns, prior = live(0.5, 20.0), prior_for(Truth(), FINE)
    clean = follow(seeds, GAUGE, FINE, turns, [0.5 * TURNS]).stages[0]
    errors = []
    for seed in seeds:
        coil, estimate = draw(seed, GAUGE, FINE), begin(prior)
        for i, reading in enumerate(coil.readings(turns)):
            spoilt = replace(reading, ohm=bounced(np.random.default_rng(seed), reading.ohm))
            estimate, _ = update(estimate, reading if i else spoilt)
        errors.append(finish_at(estimate, TURNS).ohm / float(coil.ohm[TURNS]) - 1.0)
    worst = float(np.max(np.abs(errors))) / clean.rms
    print(
        f"  a bad first reading, {len(seeds)} coils: half way the worst error is {worst:.2f} times the clean "
        f"rms of {100 * clean.rms:.4f} % (asked <= 5)"
    )
