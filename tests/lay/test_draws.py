"""Draws have the moments and shape that they claim."""

from __future__ import annotations

from statistics import NormalDist

import numpy as np
import pytest

from windctl.lay.draws import ONE, Stream, normals, uniforms

N = 200_000


def test_normal_draws_are_close_to_normal() -> None:
    drawn = normals(1, Stream.WANDER, N) / ONE
    assert drawn.mean() == pytest.approx(0, abs=4 / N**0.5)
    assert drawn.std() == pytest.approx(1, abs=4 / (2 * N) ** 0.5)
    # The sum of eight uniforms has kurtosis 3 - 1.2/8 (its fourth cumulant is a uniform's, -1.2, over eight).
    assert (drawn**4).mean() == pytest.approx(3 - 1.2 / 8, abs=4 * (96 / N) ** 0.5)
    shares = [0.01, 0.1, 0.25, 0.5, 0.75, 0.9, 0.99]
    ideal = [NormalDist().inv_cdf(share) for share in shares]
    assert np.quantile(drawn, shares) == pytest.approx(ideal, abs=0.06)


def test_draws_are_not_correlated() -> None:
    drawn = normals(5, Stream.WANDER, N) / ONE
    for lag in (1, 2, 3, 10):
        assert (drawn[lag:] * drawn[:-lag]).mean() == pytest.approx(0, abs=4.5 / N**0.5)


def test_uniform_draws_fill_their_range_evenly() -> None:
    drawn = uniforms(1, Stream.REVERSAL, N)
    assert drawn.min() >= 0
    assert drawn.max() < ONE
    counts = np.bincount(drawn * 16 // ONE, minlength=16)
    chi2 = ((counts - N / 16) ** 2 / (N / 16)).sum()
    assert chi2 < 37.7  # 99.9 % point of chi-squared with 15 degrees of freedom, from memory


def test_streams_and_words_are_independent() -> None:
    a = uniforms(1, Stream.REVERSAL, N) / ONE - 0.5
    for b in (uniforms(1, Stream.WANDER, N), uniforms(1, Stream.REVERSAL, N, word=1)):
        assert (a * (b / ONE - 0.5)).mean() == pytest.approx(0, abs=4.5 / 12 / N**0.5)
