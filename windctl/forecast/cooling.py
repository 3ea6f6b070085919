"""How much of a coil's warmth is left: friction warms it while it turns, and it cools in minutes at rest."""

from __future__ import annotations

from math import exp, log

from windctl.material.copper import ALPHA_20C

COOLING_S = 180.0  # time constant of a wound bobbin in still air; common practice, no source
COOLING_REL = 0.35  # its relative sd from bobbin to bobbin; our judgement


def share_left(share: float, seconds: float, standing: bool) -> float:
    """The share of a winding coil's warmth over the air that is there `seconds` after `share` was."""
    fading = exp(-max(seconds, 0.0) / COOLING_S)
    return share * fading if standing else 1.0 - (1.0 - share) * fading


def cooling_variance(shown_ohm: float, over_air_square: float, share: float) -> float:
    """Variance, ohm^2, that a reading has because nobody knows exactly how fast this coil cools.

    `over_air_square`: mean square of coil over air while winding, K^2. With w = exp(-t/T) the share left, an
    error e of T moves w by w*log(1/w)*e/T.
    """
    if not 0.0 < share < 1.0:
        return 0.0
    by_share = COOLING_REL * share * log(share)
    return (ALPHA_20C * shown_ohm * by_share) ** 2 * over_air_square
