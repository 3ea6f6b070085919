"""Inline SVG, piece by piece: pure functions from numbers to text.

Every function returns markup that may stand inside `document`; coordinates are in user units (a drawing
of width 720 fills its column on paper), y downwards. Numbers are written with a fixed number of decimals
and attributes in the order they are given, so equal values give equal bytes. Everything that comes from
outside passes `escaped`. Lines differ by dash and weight and points by their form, so that a drawing loses
nothing in black and white; colour only helps. Nothing refers to anything outside: no font, no style sheet,
no script.

For a chart with axes take `windctl.paper.plot`, which draws with these.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from html import escape

Point = tuple[float, float]

INK, MUTED, RULE, PAPER = "#1f1b16", "#625b52", "#cdc6bb", "#ffffff"
COPPER, BLUE, GREEN = "#96470f", "#1d5a8a", "#3f6b2a"  # each dark enough to read as grey on white
SAND, HAZE = "#ecdfce", "#e4e4e1"  # for areas under lines; light enough for text upon them

FONT = "system-ui, 'Segoe UI', 'DejaVu Sans', 'Liberation Sans', Helvetica, Arial, sans-serif"
EM_WIDE = 0.56  # of a letter's size: how wide a letter is on average, for placing texts

_NOT_XML = re.compile("[^\t\n\r\x20-\ud7ff\ue000-\ufffd\U00010000-\U0010ffff]")


@dataclass(frozen=True, slots=True)
class Pen:
    """How a line is drawn. `dash`: lengths drawn and left out in turn (stroke-dasharray); "" is solid."""

    stroke: str = INK
    width: float = 1.2
    dash: str = ""


@dataclass(frozen=True, slots=True)
class Style:
    """How one of several series is drawn: a pen, and a form for its points (see `mark`)."""

    pen: Pen
    form: str


SOLID = Pen()
FINE = Pen(MUTED, 0.7)
GRID = Pen(RULE, 0.5)
DASHED = Pen(INK, 1.0, "6 3")
DOTTED = Pen(INK, 1.0, "1.5 2.5")

# Series side by side: told apart by dash and form in black and white, by colour besides.
STYLES = (
    Style(Pen(INK, 1.5), "dot"),
    Style(Pen(COPPER, 1.5, "7 2.5"), "square"),
    Style(Pen(BLUE, 1.5, "2 2"), "triangle"),
    Style(Pen(GREEN, 1.5, "8 2.5 2 2.5"), "diamond"),
    Style(Pen(INK, 0.9, "12 3"), "cross"),
    Style(Pen(COPPER, 0.9), "ring"),
    Style(Pen(BLUE, 0.9, "5 2 1 2 1 2"), "plus"),
    Style(Pen(MUTED, 2.2, "1 3"), "box"),
)


def style(n: int) -> Style:
    """The look of the n-th series, from 0; they come round again after eight."""
    return STYLES[n % len(STYLES)]


def escaped(text: str) -> str:
    """Text as it may stand between tags or within a quoted attribute.

    Characters that no XML document can hold (most control characters, lone surrogates) become U+FFFD.
    """
    return escape(_NOT_XML.sub("�", text), quote=True)


def number(value: float, decimals: int = 2) -> str:
    """A coordinate: at most `decimals` decimals, no exponent, no trailing zeros, no negative zero.

    Raises ValueError for NaN and infinities, which have no place on paper.
    """
    if not math.isfinite(value):
        raise ValueError(f"{value} cannot be drawn")
    text = f"{value:.{decimals}f}"
    if "." in text:
        text = text.rstrip("0").rstrip(".")
    return "0" if text in ("-0", "") else text


def element(name: str, *content: str, **attributes: str | float | None) -> str:
    """One element. `content` is markup already; attribute values are escaped here.

    `_` in an attribute's name stands for `-`, one at its end is dropped (`class_`), None leaves it out.
    """
    parts = [name]
    for key, value in attributes.items():
        if value is not None:
            said = escaped(value) if isinstance(value, str) else number(value)
            parts.append(f'{key.rstrip("_").replace("_", "-")}="{said}"')
    opened = " ".join(parts)
    return f"<{opened}>{''.join(content)}</{name}>" if content else f"<{opened}/>"


def group(*parts: str, **attributes: str | float | None) -> str:
    """Several pieces as one; attributes hold for all of them."""
    return element("g", *(parts or ("",)), **attributes)


def text(
    x: float,
    y: float,
    words: str,
    *,
    anchor: str = "start",
    size: float = 11,
    bold: bool = False,
    fill: str = INK,
    upright: bool = False,
) -> str:
    """Words with their baseline at y. `anchor`: "start", "middle" or "end" of the words stands at x.

    `upright` turns them to read from below upwards. Words are not broken into lines.
    """
    return element(
        "text",
        escaped(words),
        x=x,
        y=y,
        text_anchor=None if anchor == "start" else anchor,
        font_size=size,
        font_weight="600" if bold else None,
        fill=fill,
        transform=f"rotate(-90 {number(x)} {number(y)})" if upright else None,
    )


def text_width(words: str, size: float = 11) -> float:
    """About how wide words are: enough to keep texts from running into each other."""
    return EM_WIDE * size * len(words)


def line(x1: float, y1: float, x2: float, y2: float, pen: Pen = SOLID) -> str:
    """A straight line."""
    return element("line", x1=x1, y1=y1, x2=x2, y2=y2, **_stroke(pen))


def polyline(points: Sequence[Point], pen: Pen = SOLID) -> str:
    """Straight lines from point to point; nothing for fewer than two points."""
    if len(points) < 2:
        return ""
    return element("polyline", points=_listed(points), fill="none", stroke_linejoin="round", **_stroke(pen))


def polygon(points: Sequence[Point], fill: str, pen: Pen | None = None) -> str:
    """A closed area, filled; with `pen` outlined as well. Nothing for fewer than three points."""
    if len(points) < 3:
        return ""
    return element("polygon", points=_listed(points), fill=fill, **({} if pen is None else _stroke(pen)))


def rect(x: float, y: float, width: float, height: float, fill: str = "none", pen: Pen | None = None) -> str:
    """A rectangle, x and y of its upper left corner."""
    return element(
        "rect", x=x, y=y, width=width, height=height, fill=fill, **({} if pen is None else _stroke(pen))
    )


def mark(x: float, y: float, form: str = "dot", size: float = 3.0, colour: str = INK) -> str:
    """A point of a series, `size` its half-width.

    `form`: "dot", "square", "triangle" and "diamond" are filled; "ring" and "box" are hollow, with paper
    inside; "cross" and "plus" are strokes. Raises KeyError for another.
    """
    if form in ("dot", "ring"):
        hollow = form == "ring"
        return element(
            "circle",
            cx=x,
            cy=y,
            r=size,
            fill=PAPER if hollow else colour,
            **(_stroke(Pen(colour, 1.2)) if hollow else {}),
        )
    if form in ("cross", "plus"):
        strokes = ((dx * size, dy * size) for dx, dy in _STROKES[form])
        pen = Pen(colour, 1.4)
        return "".join(line(x - dx, y - dy, x + dx, y + dy, pen) for dx, dy in strokes)
    corners = [(x + size * dx, y + size * dy) for dx, dy in _CORNERS[form]]
    if form == "box":
        return polygon(corners, PAPER, Pen(colour, 1.2))
    return polygon(corners, colour)


_STROKES = {"cross": ((1, 1), (1, -1)), "plus": ((1, 0), (0, 1))}
_CORNERS = {
    "square": ((-0.9, -0.9), (0.9, -0.9), (0.9, 0.9), (-0.9, 0.9)),
    "box": ((-0.9, -0.9), (0.9, -0.9), (0.9, 0.9), (-0.9, 0.9)),
    "triangle": ((0, -1.2), (1.1, 0.9), (-1.1, 0.9)),
    "diamond": ((0, -1.25), (1.25, 0), (0, 1.25), (-1.25, 0)),
}


def document(
    width: float, height: float, parts: Iterable[str], *, title: str, desc: str, ident: str, size: str = ""
) -> str:
    """The drawing as one `<svg>` element that may stand in an HTML page or, after `standalone`, in a file.

    `title` names it and `desc` says in words what it shows, for whoever does not see it. `ident`: letters,
    digits and hyphens, different for each drawing of a page. `size`: the width and height on paper, such as
    "60mm 25mm"; without one the drawing takes the width that its place has.
    """
    across, _, down = size.partition(" ")
    return element(
        "svg",
        element("title", escaped(title), id=f"{ident}-title"),
        element("desc", escaped(desc), id=f"{ident}-desc"),
        *parts,
        xmlns="http://www.w3.org/2000/svg",
        viewBox=f"0 0 {number(width)} {number(height)}",
        width=across or None,
        height=down or None,
        role="img",
        aria_labelledby=f"{ident}-title {ident}-desc",
        font_family=FONT,
    )


def standalone(svg: str) -> str:
    """The text of an .svg file that holds this drawing."""
    return f'<?xml version="1.0" encoding="UTF-8"?>\n{svg}\n'


def _listed(points: Sequence[Point]) -> str:
    return " ".join(f"{number(x)},{number(y)}" for x, y in points)


def _stroke(pen: Pen) -> dict[str, str | float | None]:
    return {
        "stroke": pen.stroke,
        "stroke_width": pen.width,
        "stroke_dasharray": pen.dash or None,
    }
