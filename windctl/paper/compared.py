"""Curves of several coils over turns, as differences from the first one's: drawn."""

from __future__ import annotations

from collections.abc import Sequence

from windctl.paper import svg
from windctl.paper.plot import Entry, Plot, axis, axis_over
from windctl.shop.compare import Compared, Curves


def compared_svg(coils: Sequence[Compared], curves: Curves, ident: str = "compared") -> str:
    """One drawing. Raises ValueError where no two curves meet."""
    if not curves.turns:
        raise ValueError("no two of these coils were read over the same turns")
    seen = [off for row in curves.differences for off in row if off is not None]
    x = axis(0.0, curves.turns[-1], "turns", most=8)
    y = axis_over(seen, f"ohm at 20 °C less that of {coils[0].number}")
    plot = Plot(ident, x, y, height=340, top=48)
    layers, legend = [], []
    for n, (coil, row) in enumerate(zip(coils, curves.differences, strict=True)):
        style = svg.style(n)
        layers.append(plot.polyline(tuple(zip(curves.turns, row, strict=True)), style.pen))
        last = curves.last(n)
        if n and last is not None:
            layers.append(plot.marks([last], style.form, 4.0, style.pen.stroke))
        legend.append(Entry(coil.number, pen=style.pen, form=style.form if n else None))
    ends = [
        f"{coil.number} has {last[1]:+.1f} ohm at {last[0]:.0f} turns"
        for n, coil in enumerate(coils)
        if n and (last := curves.last(n)) is not None
    ]
    return plot.drawn(f"{len(coils)} coils beside {coils[0].number}", ". ".join(ends), *layers, legend=legend)
