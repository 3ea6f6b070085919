"""Dark and light. The hues are those of Okabe and Ito (2008), which people with any colour vision tell apart;
on paper they are darkened until text in them is readable. What matters is a word and a glyph besides.

A role's colour is the theme variable `wc-ROLE`.
"""

from __future__ import annotations

from collections.abc import Mapping

from textual.color import Color
from textual.theme import Theme

from windctl.tui.pictures.cells import Ink

# Okabe and Ito, "Color Universal Design", 2008
ORANGE, SKY, GREEN, YELLOW = "#E69F00", "#56B4E9", "#009E73", "#F0E442"
BLUE, VERMILLION, PURPLE = "#0072B2", "#D55E00", "#CC79A7"

_BANDS = {  # the ground under a state's word; the word itself is `on-band`
    "waiting": "#9AA5A9",
    "ready": PURPLE,
    "turning": "#1DB68A",
    "stopping": YELLOW,
    "held": ORANGE,
    "settling": SKY,
    "alarm": "#F2762E",
    "ended": "#7FA8D6",
    "on-band": "#0B0F11",
}

_DARK = {
    **_BANDS,
    "good": "#2BC39A",
    "bad": "#F2762E",
    "unsure": YELLOW,
    "flange": "#8D9CA3",
    "core": "#4B585E",
    "ghost": "#1F2A30",
    "guide": SKY,
    "past": ORANGE,
    "fan": "#3F7FA6",
    "target": "#2BC39A",
    "finish": SKY,
    "axis": "#55636A",
    "label": "#94A3A9",
    "over": VERMILLION,
    "digits": "#F4F1EA",
    "wire-first": "#4A2310",
    "wire-middle": "#B3601F",
    "wire-last": "#F6C983",
}

_LIGHT = {
    **_BANDS,
    "good": "#00694D",
    "bad": "#A84300",
    "unsure": "#6B5900",
    "flange": "#5B676C",
    "core": "#AEB6B8",
    "ghost": "#E3DDD0",
    "guide": "#005A8C",
    "past": "#A84300",
    "fan": "#7FB4D3",
    "target": "#00694D",
    "finish": "#005A8C",
    "axis": "#8B9599",
    "label": "#566268",
    "over": "#A84300",
    "digits": "#15191B",
    "wire-first": "#4A2310",
    "wire-middle": "#B3601F",
    "wire-last": "#EFB45E",
}


def _variables(colours: Mapping[str, str]) -> dict[str, str]:
    return {f"wc-{role}": colour for role, colour in colours.items()}


DARK = Theme(
    name="windctl-dark",
    primary=ORANGE,
    secondary=SKY,
    accent=ORANGE,
    foreground="#DDE4E6",
    background="#0F1518",
    surface="#151D21",
    panel="#1C262B",
    success="#2BC39A",
    warning=YELLOW,
    error="#F2762E",
    dark=True,
    variables={**_variables(_DARK), "footer-key-foreground": ORANGE, "footer-background": "#151D21"},
)

LIGHT = Theme(
    name="windctl-light",
    primary="#8A5A00",
    secondary="#005A8C",
    accent="#8A5A00",
    foreground="#1B2124",
    background="#F8F5EE",
    surface="#F1ECE1",
    panel="#E7E0D2",
    success="#00694D",
    warning="#6B5900",
    error="#A84300",
    dark=False,
    variables={**_variables(_LIGHT), "footer-key-foreground": "#8A5A00", "footer-background": "#E7E0D2"},
)


def colour_of(ink: Ink, variables: Mapping[str, str]) -> str | None:
    """The colour of an ink in a theme: a role's, or that of wire by its turn. None stays None."""
    if ink is None:
        return None
    if isinstance(ink, str):
        return variables.get(f"wc-{ink}")
    first, middle, last = (Color.parse(variables[f"wc-wire-{part}"]) for part in ("first", "middle", "last"))
    shade = first.blend(middle, ink * 2) if ink < 0.5 else middle.blend(last, ink * 2 - 1)
    return shade.hex6
