"""A control chart drawn: individual values above, their moving ranges below, what is out marked and named."""

from __future__ import annotations

from windctl.paper import svg
from windctl.paper.plot import Entry, Plot, axis_over, categories
from windctl.shop.lot import Lot, name_of, out_of, says, unit_of, written

_WIDE, _UPPER, _LOWER = 720.0, 260.0, 180.0
_LIMIT = svg.Pen(svg.INK, 1.0, "7 3")


def chart_svg(lot: Lot, ident: str = "lot") -> str:
    """Both as one drawing; `ident` names it within a page."""
    parts = ((individuals_svg(lot, f"{ident}-values"), _UPPER), (ranges_svg(lot, f"{ident}-ranges"), _LOWER))
    stacked, down = [], 0.0
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
    plot = Plot(
        ident, x, axis_over([*values, *ends], f"{name_of(lot.quantity)}, {unit}"), width=_WIDE, height=_UPPER
    )
    points = list(enumerate(values))
    spread = chart.sigma
    return plot.drawn(
        f"Individual values: {name_of(lot.quantity)} of {len(values)} coils",
        ". ".join(says(lot)),
        plot.across(ends[1], _LIMIT, f"limit {written(lot.quantity, chart.high, spread)}"),
        plot.across(ends[0], _LIMIT, f"limit {written(lot.quantity, chart.low, spread)}", below=True),
        plot.across(chart.centre / scale, svg.FINE, f"mean {written(lot.quantity, chart.centre, spread)}"),
        plot.polyline(points, svg.Pen(svg.INK, 0.8)),
        plot.marks((point for point in points if point[0] not in out), "dot", 3.0),
        plot.marks((point for point in points if point[0] in out), "triangle", 5.0, svg.COPPER),
        legend=(
            Entry("coil", form="dot"),
            Entry("out by a rule", pen=svg.Pen(svg.COPPER, 0.0), form="triangle"),
        ),
    )


def ranges_svg(lot: Lot, ident: str = "lot-ranges") -> str:
    """By how much each coil differs from the one before."""
    chart = lot.chart
    scale, unit = unit_of(lot.quantity, chart.centre)
    points = [(float(at), step / scale) for at, step in enumerate(chart.ranges, 1)]
    limit = chart.high_range / scale
    x = categories([coil.number for coil in lot.coils], "coil", most=5)
    plot = Plot(
        ident, x, axis_over([0.0, limit, *(y for _, y in points)], f"moving range, {unit}"), height=180
    )
    return plot.drawn(
        "Moving ranges",
        f"By how much each coil differs from the one before; {len(lot.wide)} beyond the limit.",
        plot.across(limit, _LIMIT, f"limit {written(lot.quantity, chart.high_range, chart.sigma)}"),
        plot.across(chart.mean_range / scale, svg.FINE),
        plot.polyline(points, svg.Pen(svg.INK, 0.8)),
        plot.marks((point for point in points if int(point[0]) not in lot.wide), "dot", 3.0),
        plot.marks((point for point in points if int(point[0]) in lot.wide), "triangle", 5.0, svg.COPPER),
    )
