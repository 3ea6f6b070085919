"""A wound bobbin, drawn to scale: cut through the middle of its long sides, and seen from the strings."""

from __future__ import annotations

from windctl.numbers import grouped
from windctl.paper import svg
from windctl.paper.layers import Growth, Layer, outline, shares
from windctl.paper.recorded import Bobbin
from windctl.paper.svg import COPPER, INK, MUTED, PAPER, Pen

_TONES = ("#a9703f", "#bd8a5d", "#cfa47d", "#debd9d", "#ead3bc", "#f4e7da")  # inside out, paler
_EDGE = Pen(INK, 0.8)
_LAYER = Pen("#5b3a1c", 0.6)
_FLANGE_MM = 1.6  # drawn so thick; no record says
_WIDTH, _HEIGHT = 720.0, 300.0


def section(bobbin: Bobbin, growth: Growth, ident: str = "section") -> str:
    """The cut across the core, the strings' side up: core, flanges, and the winding on both sides, in layers
    of equal numbers of turns."""
    wide = bobbin.core_width + 2 * max(bobbin.depth, growth.highest_mm)
    tall = bobbin.gap + 2 * _FLANGE_MM
    scale = min(360.0 / wide, (_HEIGHT - 44.0) / tall)
    middle, top = 230.0, 20.0
    core = bobbin.core_width / 2 * scale
    first = top + _FLANGE_MM * scale  # where the gap begins, on the strings' side
    parts = []
    for tone, layer in reversed(list(zip(_TONES, growth.layers, strict=False))):
        for side in (-1, 1):
            parts.append(svg.polygon(_surface(bobbin, layer, side, middle, core, first, scale), tone, _LAYER))
    parts.append(svg.rect(middle - core, first, 2 * core, bobbin.gap * scale, "#f2f0ec", _EDGE))
    parts.append(_hatched(middle - core, first, 2 * core, bobbin.gap * scale))
    flange = (bobbin.core_width / 2 + bobbin.depth) * scale
    for y in (top, first + bobbin.gap * scale):
        parts.append(svg.rect(middle - flange, y, 2 * flange, _FLANGE_MM * scale, "#d9d5cd", _EDGE))
    parts.append(_dimensions(bobbin, middle, core, first, scale))
    parts.append(_key(growth))
    start = "face" if bobbin.starts_at_face else "base"
    desc = (
        f"Cross-section to scale. Between flanges {bobbin.gap:g} mm apart and {bobbin.depth:g} mm deep the "
        f"winding stands {growth.highest_mm:.2f} mm high at its highest; the lay starts at the {start}."
    )
    bottom = first + (bobbin.gap + _FLANGE_MM) * scale + 24
    return svg.document(_WIDTH, bottom, parts, title="Section through the bobbin", desc=desc, ident=ident)


def face(bobbin: Bobbin, build_mm: float, ident: str = "face") -> str:
    """The coil as the strings see it: core, winding, the flange's edge, and the way the wire runs."""
    width = 300.0
    long = bobbin.core_length + 2 * bobbin.depth
    short = bobbin.core_width + 2 * bobbin.depth
    scale = (width - 4) / long
    height = short * scale + 24
    x, y = width / 2, 2 + short * scale / 2
    build = min(build_mm, bobbin.depth)
    parts = [_racetrack(bobbin, bobbin.depth, x, y, scale, PAPER, Pen(MUTED, 0.8, "3 2"))]
    rings = 7
    for n in range(rings, 0, -1):
        fill = "#ead3bc" if n == rings else "none"
        pen = Pen(COPPER, 1.3 if n == rings else 0.6)
        parts.append(_racetrack(bobbin, build * n / rings, x, y, scale, fill, pen))
    parts.append(_racetrack(bobbin, 0.0, x, y, scale, PAPER, Pen(INK, 1.2)))
    words = {"north": "N", "south": "S"}.get(bobbin.pole, "")
    if words:
        parts.append(svg.text(x, y + 4.5, words, anchor="middle", size=13, bold=True))
    parts.append(_arrow(bobbin, x, y, scale))
    way = "clockwise" if bobbin.clockwise else "counter-clockwise"
    said = f"seen from the strings: the wire runs {way}"
    parts.append(svg.text(x, height - 4, said, anchor="middle", size=10.5, fill=MUTED))
    pole = f" The {bobbin.pole} pole faces the strings." if bobbin.pole else ""
    desc = f"The coil to scale, {said} from start to finish.{pole}"
    return svg.document(width, height, parts, title="The coil from the strings' side", desc=desc, ident=ident)


def _surface(
    bobbin: Bobbin, layer: Layer, side: int, middle: float, core: float, first: float, scale: float
) -> list[svg.Point]:
    """The area between the core and a layer's surface on one side of it."""
    points = []
    for along, height in outline(layer.heights_mm, bobbin.gap):
        place = along if bobbin.starts_at_face else bobbin.gap - along
        points.append((middle + side * (core + height * scale), first + place * scale))
    foot = middle + side * core
    return [(foot, points[0][1]), *points, (foot, points[-1][1])]


def _hatched(x: float, y: float, width: float, height: float) -> str:
    """Slanting lines, as a cut through solid material is drawn."""
    lines = []
    apart, reach = 7.0, width
    down = -reach + apart
    while down < height:
        x0, y0, x1, y1 = x, y + down + reach, x + reach, y + down
        if y1 < y:
            x1, y1 = x1 - (y - y1), y
        if y0 > y + height:
            x0, y0 = x0 + (y0 - y - height), y + height
        lines.append(svg.line(x0, y0, x1, y1, Pen("#b5aea3", 0.6)))
        down += apart
    return svg.group(*lines)


def _dimensions(bobbin: Bobbin, middle: float, core: float, first: float, scale: float) -> str:
    left = middle - (bobbin.core_width / 2 + bobbin.depth) * scale
    bottom = first + bobbin.gap * scale
    thin = Pen(MUTED, 0.6)
    gap = [
        svg.line(left - 14, first, left - 14, bottom, thin),
        svg.line(left - 18, first, left - 4, first, thin),
        svg.line(left - 18, bottom, left - 4, bottom, thin),
        svg.text(left - 19, (first + bottom) / 2, f"{bobbin.gap:g} mm", anchor="middle", upright=True),
    ]
    y = bottom + _FLANGE_MM * scale + 16
    right = middle + core + bobbin.depth * scale
    depth = [
        svg.line(middle + core, y - 10, middle + core, y - 2, thin),
        svg.line(right, y - 10, right, y - 2, thin),
        svg.line(middle + core, y - 6, right, y - 6, thin),
        svg.text(middle + core - 6, y - 2, f"{bobbin.depth:g} mm deep", anchor="end"),
    ]
    face, base = ("face (start)", "base") if bobbin.starts_at_face else ("face", "base (start)")
    half = _FLANGE_MM * scale / 2
    names = [
        svg.text(right + 6, first - half + 4, face),
        svg.text(right + 6, bottom + half + 2, base),
    ]
    return svg.group(*gap, *depth, *names)


def _key(growth: Growth) -> str:
    """Which tone is which turns, the outermost on top."""
    x, y = 498.0, 40.0
    parts = [svg.text(x, y - 12, "wound in this order, the last on top", fill=MUTED)]
    rows = list(zip(_TONES, shares(growth.layers), strict=False))
    for n, (tone, (low, high)) in enumerate(reversed(rows)):
        top = y + 20 * n
        parts.append(svg.rect(x, top, 26, 14, tone, _LAYER))
        parts.append(svg.text(x + 34, top + 11, f"turns {grouped(low)} to {grouped(high)}"))
    below = y + 20 * len(rows) + 16
    parts.append(svg.text(x, below, f"{growth.highest_mm:.2f} mm at its highest"))
    parts.append(svg.text(x, below + 16, f"{growth.build_mm:.2f} mm in the mean"))
    if growth.by_hand:
        parts.append(svg.text(x, below + 32, "guided by hand: drawn even", fill=MUTED))
    return svg.group(*parts)


def _racetrack(bobbin: Bobbin, grown: float, x: float, y: float, scale: float, fill: str, pen: Pen) -> str:
    width = (bobbin.core_length + 2 * grown) * scale
    height = (bobbin.core_width + 2 * grown) * scale
    return svg.element(
        "rect",
        x=x - width / 2,
        y=y - height / 2,
        width=width,
        height=height,
        rx=(bobbin.corner_radius + grown) * scale,
        fill=fill,
        stroke=pen.stroke,
        stroke_width=pen.width,
        stroke_dasharray=pen.dash or None,
    )


def _arrow(bobbin: Bobbin, x: float, y: float, scale: float) -> str:
    """Over the upper long side: to the right is clockwise."""
    at = y - (bobbin.core_width / 2 + bobbin.depth * 0.5) * scale
    way = 1.0 if bobbin.clockwise else -1.0
    tip, tail = x + way * 26, x - way * 26
    head = [(tip + 7 * way, at), (tip - 3 * way, at - 4.5), (tip - 3 * way, at + 4.5)]
    halo = svg.line(tail, at, tip + 6 * way, at, Pen(_TONES[4], 5))
    return halo + svg.line(tail, at, tip, at, Pen(INK, 1.6)) + svg.polygon(head, INK)
