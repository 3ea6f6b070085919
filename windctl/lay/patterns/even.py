"""Even: every turn advances by the pitch."""

from __future__ import annotations

import numpy as np

from windctl.lay.spec import LaySpec
from windctl.lay.travel import Travel, by_turn


def travel(spec: LaySpec) -> Travel:
    """A straight line: whole passes become single segments."""
    return by_turn(spec, np.full(spec.turns, spec.pitch, dtype=np.int64), bends=False)
