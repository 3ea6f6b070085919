"""What is known of a spool, in words; every face says it alike. Pure."""

from __future__ import annotations

from math import exp
from typing import TYPE_CHECKING

from windctl.desk.numbers import counted, grouped, with_uncertainty

if TYPE_CHECKING:
    from windctl.desk.spools import SpoolState

_Z95 = 1.959964


def wire(state: SpoolState) -> str:
    """`AWG 42, grade 1, polyurethane`."""
    return state.wire + (f", {state.insulation}" if state.insulation else "")


def ohm_per_m(state: SpoolState) -> str:
    """At 20 degrees C, with its 95 % half-width."""
    return with_uncertainty(state.ohm_per_m, _Z95 * state.ohm_per_m_sd, "ohm/m", most_decimals=4)


def known_from(state: SpoolState) -> str:
    """What taught that: `3 coils and 1 measured piece`."""
    parts = [counted(state.taught_by, "coil")] if state.taught_by else []
    if state.pieces:
        parts.append(counted(state.pieces, "measured piece"))
    return " and ".join(parts) or "the table only"


def left(state: SpoolState) -> str:
    """Metres of wire; empty where it was never weighed."""
    if state.left_m is None or state.left_sd_m is None:
        return ""
    return with_uncertainty(max(state.left_m, 0.0), _Z95 * state.left_sd_m, "m", most_decimals=0)


def enough(state: SpoolState) -> str:
    """For how many coils; empty where that is not known."""
    if state.coils_left is None or state.metres_each is None:
        return ""
    coils, each = counted(state.coils_left, "coil"), grouped(state.metres_each)
    return f"{coils} of {each} m, what coil {state.coil_each} took"


def told(state: SpoolState) -> tuple[str, ...]:
    """Coils that taught nothing, and why."""
    piece = "the piece that was measured, " if state.pieces else ""
    return tuple(
        f"coil {one.coil} was {100 * (exp(one.off) - 1):+.1f} % off and taught nothing: look at the spool's "
        f"label, {piece}the count, the coil"
        for one in state.unfit
    ) + tuple(f"coil {coil} was withdrawn: {reason}" for coil, reason in state.withdrawn)
