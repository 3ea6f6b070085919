"""The patterns of a lay: one module each, and this table of them."""

from __future__ import annotations

from collections.abc import Callable, Mapping

from windctl.lay.patterns import even, ripple, stagger, wander
from windctl.lay.spec import LaySpec
from windctl.lay.travel import Travel

Pattern = Callable[[LaySpec], Travel]

PATTERNS: Mapping[str, Pattern] = {
    "even": even.travel,
    "wander": wander.travel,
    "stagger": stagger.travel,
    "ripple": ripple.travel,
}
