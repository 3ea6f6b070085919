"""Spools as the interface shows them. Pure."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from windctl.desk import spool_words as words
from windctl.desk.numbers import counted
from windctl.tui.looks import Look

if TYPE_CHECKING:
    from windctl.desk.spools import SpoolState

_COLUMNS = ("", "spool", "wire", "left", "enough for", "wound", "known from")
_WIDE = 110  # cells, from which the last column has room
_WIRE = 22  # cells for a wire on a narrower screen
CHOSEN = Look("next", "▶", "good")

_FEW = 2  # coils: time to order wire
_Z95 = 1.959964


def stock(state: SpoolState) -> Look:
    """For how many coils it lasts, with how good that is."""
    if state.left_m is None:
        return Look("not weighed", "○", "unsure")
    if state.coils_left is None:
        return Look("not known yet", "○", "unsure")
    role, glyph = ("good", "✔") if state.coils_left > _FEW else ("unsure", "◇")
    if state.coils_left == 0:
        role, glyph = "bad", "✖"
    return Look(counted(state.coils_left, "coil"), glyph, role)


def columns(width: int) -> tuple[str, ...]:
    """The table's columns on a screen of so many cells."""
    return _COLUMNS if width >= _WIDE else _COLUMNS[:-1]


def row(state: SpoolState, chosen: bool, width: int) -> tuple[str | Look, ...]:
    """One spool in the table."""
    cells = (
        CHOSEN if chosen else "",
        state.id,
        state.wire if width >= _WIDE or len(state.wire) <= _WIRE else state.wire[: _WIRE - 1] + "…",
        words.left(state),
        stock(state),
        str(state.coils),
        words.known_from(state),
    )
    return cells[: len(columns(width))]


def details(state: SpoolState) -> tuple[tuple[str, str], ...]:
    """Everything known of one, in rows."""
    rows = (
        ("wire", words.wire(state)),
        ("per metre", f"{in_ohm(words.ohm_per_m(state))}; table {state.nominal_ohm_per_m:.4g} Ω/m"),
        ("known from", words.known_from(state)),
        ("left", words.left(state) or "not weighed: G keeps what the wire on it weighs"),
        ("enough for", words.enough(state) or "not known before a coil was wound from it and it was weighed"),
        ("notes", state.notes),
        *(("", line) for line in words.told(state)),
    )
    return tuple((name, value) for name, value in rows if value)


def parts(state: SpoolState) -> tuple[float, float, float]:
    """(table's half-width, how far what is known lies beside it, its half-width), parts of the table's."""
    nominal = state.nominal_ohm_per_m
    return (
        _Z95 * state.nominal_ohm_per_m_sd / nominal,
        state.ohm_per_m / nominal - 1.0,
        _Z95 * state.ohm_per_m_sd / nominal,
    )


def facts(state: SpoolState) -> tuple[tuple[str, str], ...]:
    """(when, what) was said of it, in order."""
    return tuple((str(fact["wall_time"])[:10], _fact(fact)) for fact in state.facts)


def _fact(fact: dict[str, Any]) -> str:
    by = f", by {fact['by']}" if fact.get("by") else ""
    match fact["kind"]:
        case "spool_added":
            return f"came to the shop{by}"
        case "spool_weighed":
            return f"weighed {fact['grams']:g} g ± {_Z95 * fact['grams_sd']:.2g} g{by}"
        case "spool_measured":
            return f"a piece: {fact['ohm_per_m']:.4g} Ω/m ± {_Z95 * 100 * fact['rel']:.2g} %{by}"
        case kind:
            return f"{str(kind).replace('_', ' ')}{by}"


def in_ohm(text: str) -> str:
    """With the sign that meters show."""
    return text.replace("kohm", "kΩ").replace("ohm", "Ω")
