"""How two coils are joined, drawn: as text, and as SVG. Both coils are seen from the strings' side.

Leads are told apart by their names and by dot and ring, never by colour, so that the drawing reads in black
and white and clashes with no maker's code.
"""

from __future__ import annotations

from collections.abc import Sequence
from html import escape

from windctl.shop.joining import Handed, Joined, Lead

_WIDE = 34
_HIGH = 220
_WAYS = {"cw": "clockwise", "ccw": "counter-clockwise"}
# seen from the strings: the way along the upper side, and along the lower
_ARROWS = {"cw": (">", "<"), "ccw": ("<", ">")}
_SIGNS: dict[Lead, str] = {"start": "*", "finish": "o"}


def as_text(joined: Joined) -> list[str]:
    """Lines. The first coil stands on the left, its finish to the right; the second with its joined lead to
    the left."""
    left = _coil(joined.first)
    right = _coil(joined.second)
    rows = [f"{a:<{_WIDE}}   {b}" for a, b in zip(left, right, strict=True)]
    first = _leads("start", "finish")
    second = _leads(joined.joint, joined.end)
    rows.append(f"{first}==={second}")
    rows.append(f"end{'(both seen from the strings)':^{2 * _WIDE - 3}}end")
    return [row.rstrip() for row in rows]


def _coil(coil: Handed) -> list[str]:
    upper, lower = _ARROWS[coil.way]
    inside = f"{coil.pole} to the strings"
    return [
        f"{coil.name}, {_WAYS[coil.way]}".center(_WIDE),
        f".-----------{upper * 3}----------.".center(_WIDE),
        f"|{inside:^24}|".center(_WIDE),
        f"'-----------{lower * 3}----------'".center(_WIDE),
    ]


def _leads(left: Lead, right: Lead) -> str:
    """One coil's two leads: its line from end to end."""
    begin, end = f"{_SIGNS[left]} {left} ", f" {right} {_SIGNS[right]}"
    return begin + "-" * (_WIDE - len(begin) - len(end)) + end


def as_svg(pairs: Sequence[Joined]) -> str:
    """A drawing of its own, black on white: the pairs below each other, 640 by 220 units each."""
    high = _HIGH * len(pairs)
    parts = [
        f'<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 640 {high}" font-family="sans-serif" '
        'font-size="13" role="img">',
        f"<title>{escape('. '.join(joined.in_series for joined in pairs))}</title>",
        f'<rect width="640" height="{high}" fill="white"/>',
    ]
    for at, joined in enumerate(pairs):
        parts += [f'<g transform="translate(0 {_HIGH * at})">', *_pair(joined), "</g>"]
    return "\n".join([*parts, "</svg>"]) + "\n"


def _pair(joined: Joined) -> list[str]:
    return [
        '<path d="M270 160 H370" stroke="black" stroke-width="3" fill="none"/>',
        *_drawn(joined.first, 30, "start", "finish"),
        *_drawn(joined.second, 350, joined.joint, joined.end),
        _label(320, 152, "joined"),
        *_end(50, "end"),
        *_end(590, "end"),
        _label(320, 186, "both seen from the strings"),
        _label(320, 212, joined.polarity),
    ]


def _drawn(coil: Handed, x: int, left: Lead, right: Lead) -> list[str]:
    """One coil in a field 260 wide from x, its leads 20 and 240 from there."""
    upper, lower = (_arrow(x + 130, 42, coil.way == "cw"), _arrow(x + 130, 106, coil.way == "ccw"))
    round_it = '" rx="32" fill="none" stroke="black" stroke-width="'
    return [
        _label(x + 130, 24, f"{coil.name}, {_WAYS[coil.way]}"),
        f'<rect x="{x + 20}" y="42" width="220" height="64{round_it}2"/>',
        f'<rect x="{x + 30}" y="52" width="200" height="44{round_it}0.7"/>',
        upper,
        lower,
        _label(x + 130, 79, f"{coil.pole} to the strings"),
        f'<path d="M{x + 20} 160 V120 L{x + 40} 102 M{x + 240} 160 V120 L{x + 220} 102" stroke="black" '
        'fill="none"/>',
        _dot(x + 20, left),
        _dot(x + 240, right),
        _label(x + 44, 150, left),
        _label(x + 214, 150, right),
    ]


def _arrow(x: int, y: int, to_the_right: bool) -> str:
    tip, back = (x + 9, x - 9) if to_the_right else (x - 9, x + 9)
    return f'<path d="M{back} {y - 7} L{tip} {y} L{back} {y + 7} Z" fill="black"/>'


def _dot(x: int, lead: Lead) -> str:
    """Start: a dot. Finish: a ring."""
    fill = "black" if lead == "start" else "white"
    return f'<circle cx="{x}" cy="160" r="5" fill="{fill}" stroke="black" stroke-width="1.5"/>'


def _end(x: int, text: str) -> list[str]:
    return [
        f'<path d="M{x} 165 V186" stroke="black" stroke-width="3" fill="none"/>',
        _label(x, 200, text),
    ]


def _label(x: int, y: int, text: str) -> str:
    return f'<text x="{x}" y="{y}" text-anchor="middle">{escape(text)}</text>'
