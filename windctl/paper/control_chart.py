"""A control chart drawn: individual values above, their moving ranges below, what is out marked and named."""

from __future__ import annotations

from windctl.paper import svg
from windctl.paper.plot import Beside, Entry, Plot, axis_over, categories, room_beside
from windctl.shop.lot import Lot, name_of, out_of, says, unit_of, written

_WIDE, _UPPER, _LOWER = 720.0, 260.0, 180.0
_LEFT, _HEAD = 16.0, 26.0
_LIMIT = svg.Pen(svg.INK, 1.0, "7 3")
_OUT = Entry("out by a rule", pen=svg.Pen(svg.COPPER, 0.0), form="triangle")


def chart_svg(lot: Lot, ident: str = "lot", heading: str = "") -> str:
    """Both as one drawing; `ident` names it within a page, `heading` stands above them."""
    parts = ((individuals_svg(lot, f"{ident}-values"), _UPPER), (ranges_svg(lot, f"{ident}-ranges"), _LOWER))
    stacked, down = [], 0.0
    if heading:
        stacked, down = [svg.text(_LEFT, 20, heading, size=13, bold=True)], _HEAD
    for part, height in parts:
        stacked.append(svg.element("svg", part, y=down, width=_WIDE, height=height))
        down += height
    return svg.document(
        _WIDE,
        down,
        stacked,
        title=f"Control chart: {name_of(lot.quantity)}",
        desc=". ".join(says(lot)),
        ident=ident,
    )


def individuals_svg(lot: Lot, ident: str = "lot-values") -> str:
    """The values in order about their centre, with limits; out of order ones are triangles."""
    chart, out = lot.chart, out_of(lot)
    scale, unit = unit_of(lot.quantity, chart.centre)
    values = [value / scale for value in chart.values]
    ends = [chart.low / scale, chart.high / scale]
    x = categories([coil.number for coil in lot.coils], "coil", most=5)
    y = axis_over([*values, *ends], f"{name_of(lot.quantity)}, {unit}")
    plot = Plot(ident, x, y, width=_WIDE, height=_UPPER, right=_margin(lot))
    points = list(enumerate(values))
    upper, mean, lower, _, _ = _words(lot)
    return plot.drawn(
        f"Individual values: {name_of(lot.quantity)} of {len(values)} coils",
        ". ".join(says(lot)),
        plot.across(ends[1], _LIMIT),
        plot.across(ends[0], _LIMIT),
        plot.across(chart.centre / scale, svg.FINE),
        plot.polyline(points, svg.Pen(svg.INK, 0.8)),
        plot.marks((point for point in points if point[0] not in out), "dot", 3.0),
        plot.marks((point for point in points if point[0] in out), "triangle", 5.0, svg.COPPER),
        legend=[Entry("coil", form="dot"), *([_OUT] if out else [])],
        beside=(
            Beside(ends[1], upper),
            Beside(chart.centre / scale, mean, svg.MUTED),
            Beside(ends[0], lower),
        ),
    )


def ranges_svg(lot: Lot, ident: str = "lot-ranges") -> str:
    """By how much each coil differs from the one before."""
    chart = lot.chart
    scale, unit = unit_of(lot.quantity, chart.high_range)  # as its words have it
    points = [(float(at), step / scale) for at, step in enumerate(chart.ranges, 1)]
    limit = chart.high_range / scale
    x = categories([coil.number for coil in lot.coils], "coil", most=5)
    y = axis_over([0.0, limit, *(step for _, step in points)], f"moving range, {unit}")
    plot = Plot(ident, x, y, width=_WIDE, height=_LOWER, right=_margin(lot))
    *_, upper, mean = _words(lot)
    return plot.drawn(
        "Moving ranges",
        f"By how much each coil differs from the one before; {len(lot.wide)} beyond the limit.",
        plot.across(limit, _LIMIT),
        plot.across(chart.mean_range / scale, svg.FINE),
        plot.polyline(points, svg.Pen(svg.INK, 0.8)),
        plot.marks((point for point in points if int(point[0]) not in lot.wide), "dot", 3.0),
        plot.marks((point for point in points if int(point[0]) in lot.wide), "triangle", 5.0, svg.COPPER),
        beside=(Beside(limit, upper), Beside(chart.mean_range / scale, mean, svg.MUTED)),
    )


def _words(lot: Lot) -> tuple[str, str, str, str, str]:
    """Of the values: upper limit, mean, lower limit; of the ranges: limit, mean."""
    chart = lot.chart
    upper, mean, lower, widest, wide = (
        written(lot.quantity, value, chart.sigma)
        for value in (chart.high, chart.centre, chart.low, chart.high_range, chart.mean_range)
    )
    return f"limit {upper}", f"mean {mean}", f"limit {lower}", f"limit {widest}", f"mean {wide}"


def _margin(lot: Lot) -> float:
    """The same for both charts, so that coils stand above each other."""
    return room_beside(_words(lot))
