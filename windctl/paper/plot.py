"""A chart with axes: values in, SVG out.

    x = axis_over(turns, "turns")
    y = axis_over([0.0, *kohms], "resistance, kohm at 20 °C")
    plot = Plot("curve", x, y)
    svg = plot.drawn(
        "Resistance over turns",
        "From 0 to 7.9 kohm over 8 000 turns, nearly straight.",
        plot.band(fan, svg.SAND),
        plot.polyline(points),
        plot.across(target, svg.DASHED),
        legend=[Entry("reading", svg.SOLID)],
        beside=[Beside(target, "target")],
    )

What is drawn by a plot's functions is in the values' own units and is cut at the plot's frame.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from windctl.numbers import grouped
from windctl.paper import svg
from windctl.paper.svg import INK, MUTED, Pen, Point

_GAP = 6.0  # between the frame and the words beside it
_LINE = 13.0  # from one line of words to the next
_STEPS = (1.0, 2.0, 2.5, 5.0, 10.0)


@dataclass(frozen=True, slots=True)
class Tick:
    """A place on an axis, and what stands there."""

    value: float
    text: str


@dataclass(frozen=True, slots=True)
class Axis:
    """From `low` to `high`, low < high; `label` with the unit, such as "tension, cN"."""

    low: float
    high: float
    label: str
    ticks: tuple[Tick, ...]


def nice_step(span: float, most: int) -> float:
    """The smallest of 1, 2, 2.5, 5 times a power of ten that fits at most `most` times into `span` (> 0)."""
    if not (math.isfinite(span) and span > 0 and most >= 1):
        raise ValueError(f"no steps for a span of {span} in {most} parts")
    power: float = 10.0 ** math.floor(math.log10(span / most))
    for factor in _STEPS:
        if factor * power * most >= span * (1 - 1e-9):
            return factor * power
    return 10.0 * power


def nice_ticks(low: float, high: float, most: int = 6) -> tuple[Tick, ...]:
    """Round values within low..high, all with as many decimals as their step has; thousands are parted."""
    step = nice_step(high - low, most)
    first, last = math.ceil(low / step - 1e-9), math.floor(high / step + 1e-9)
    decimals = _decimals(step)
    return tuple(Tick(n * step, grouped(n * step, decimals)) for n in range(first, last + 1))


def axis(low: float, high: float, label: str, *, most: int = 6, widen: bool = True) -> Axis:
    """An axis that shows low..high; `widen` lets it begin and end at ticks. Equal ends are parted."""
    if high <= low:
        spread = abs(low) * 0.01 or 1.0
        low, high = low - spread, high + spread
    if widen:
        step = nice_step(high - low, most)
        low, high = math.floor(low / step + 1e-9) * step, math.ceil(high / step - 1e-9) * step
    return Axis(low, high, label, nice_ticks(low, high, most))


def axis_over(values: Iterable[float], label: str, *, most: int = 6, widen: bool = True) -> Axis:
    """An axis that shows all of `values`. Raises ValueError where there are none."""
    seen = list(values)
    return axis(min(seen), max(seen), label, most=most, widen=widen)


def categories(texts: Sequence[str], label: str, *, most: int = 12) -> Axis:
    """An axis of things in a row, such as coils by number: the n-th stands at n, from 0.

    Where there are more than `most`, only every k-th is named.
    """
    every = max(1, math.ceil(len(texts) / most))
    named = tuple(Tick(float(n), texts[n]) for n in range(0, len(texts), every))
    return Axis(-0.5, max(len(texts), 1) - 0.5, label, named)


@dataclass(frozen=True, slots=True)
class Entry:
    """One line of a legend: a sample of its line, its point, or its area."""

    text: str
    pen: Pen | None = None
    form: str | None = None
    fill: str | None = None


@dataclass(frozen=True, slots=True)
class Beside:
    """Words to a level y, right of the frame, where no line of the data runs: `Plot.right` must have room
    for them (`room_beside`)."""

    y: float
    words: str
    colour: str = INK


def room_beside(words: Iterable[str]) -> float:
    """How wide the margin must be for these."""
    return max((svg.text_width(each) for each in words), default=0.0) + 3 * _GAP


@dataclass(frozen=True, slots=True)
class Plot:
    """A frame with two axes. `ident` names the drawing within its page (see `svg.document`)."""

    ident: str
    x: Axis
    y: Axis
    width: float = 720
    height: float = 300
    left: float = 62
    right: float = 16
    top: float = 30
    bottom: float = 44

    def at(self, x: float, y: float) -> Point:
        """Where the values x, y stand in the drawing."""
        across = (x - self.x.low) / (self.x.high - self.x.low)
        up = (y - self.y.low) / (self.y.high - self.y.low)
        return (
            self.left + across * (self.width - self.left - self.right),
            self.height - self.bottom - up * (self.height - self.top - self.bottom),
        )

    def polyline(self, points: Iterable[tuple[float, float | None]], pen: Pen = svg.SOLID) -> str:
        """A line through the points; a y of None breaks it."""
        runs: list[list[Point]] = [[]]
        for x, y in points:
            if y is None:
                runs.append([])
            else:
                runs[-1].append(self.at(x, y))
        return "".join(svg.polyline(run, pen) for run in runs)

    def steps(self, points: Sequence[tuple[float, float]], pen: Pen = svg.SOLID) -> str:
        """A line that keeps each y until the next x."""
        cornered: list[tuple[float, float | None]] = []
        for n, (x, y) in enumerate(points):
            if n:
                cornered.append((x, points[n - 1][1]))
            cornered.append((x, y))
        return self.polyline(cornered, pen)

    def band(
        self, spans: Sequence[tuple[float, float, float]], fill: str = svg.SAND, pen: Pen | None = None
    ) -> str:
        """The area between low and high over x: `spans` holds (x, low, high). `pen` draws both edges."""
        low = [self.at(x, bottom) for x, bottom, _ in spans]
        high = [self.at(x, top) for x, _, top in spans]
        area = svg.polygon([*low, *reversed(high)], fill)
        return area if pen is None else area + svg.polyline(low, pen) + svg.polyline(high, pen)

    def marks(
        self, points: Iterable[tuple[float, float]], form: str = "dot", size: float = 3.0, colour: str = INK
    ) -> str:
        """A mark at each point; its forms are those of `svg.mark`."""
        return "".join(svg.mark(*self.at(x, y), form, size, colour) for x, y in points)

    def bars(self, spans: Iterable[tuple[float, float, float]], pen: Pen = svg.FINE, cap: float = 3.0) -> str:
        """Upright bars with caps, as for intervals: (x, low, high)."""
        drawn = []
        for x, low, high in spans:
            (px, bottom), (_, top) = self.at(x, low), self.at(x, high)
            drawn.append(svg.line(px, bottom, px, top, pen))
            drawn.extend(svg.line(px - cap, end, px + cap, end, pen) for end in (bottom, top))
        return "".join(drawn)

    def across(self, y: float, pen: Pen = svg.DASHED) -> str:
        """A level line over the whole width; for words to it see `Beside`."""
        (left, py), (right, _) = self.at(self.x.low, y), self.at(self.x.high, y)
        return svg.line(left, py, right, py, pen)

    def upright(self, x: float, pen: Pen = svg.DOTTED, words: str = "", *, row: int = 0) -> str:
        """An upright line over the whole height; its words beside its head, on the `row`-th line of text,
        left of it where the right half begins."""
        (px, bottom), (_, top) = self.at(x, self.y.low), self.at(x, self.y.high)
        drawn = svg.line(px, bottom, px, top, pen)
        if words:
            late = x > (self.x.low + self.x.high) / 2
            place = px + (-4 if late else 4)
            anchor = "end" if late else "start"
            drawn += svg.text(place, top + 12 + 13 * row, words, anchor=anchor, size=10, fill=pen.stroke)
        return drawn

    def words(self, x: float, y: float, text: str, *, anchor: str = "start", size: float = 10) -> str:
        """A text at a place given in values."""
        px, py = self.at(x, y)
        return svg.text(px, py, text, anchor=anchor, size=size)

    def drawn(
        self,
        title: str,
        desc: str,
        *layers: str,
        legend: Sequence[Entry] = (),
        beside: Sequence[Beside] = (),
    ) -> str:
        """The whole chart: grid, then the layers in order, cut at the frame, then axes, words and legend.

        `title` and `desc` are for whoever does not see it; what is to be read above it belongs to the page.
        """
        left, top = self.at(self.x.low, self.y.high)
        right, bottom = self.at(self.x.high, self.y.low)
        clip = f"{self.ident}-frame"
        parts = [
            svg.element("clipPath", svg.rect(left - 1, top - 1, right - left + 2, bottom - top + 2), id=clip),
            self._grid(),
            svg.group(*layers, clip_path=f"url(#{clip})"),
            svg.line(left, bottom, right, bottom, Pen(INK, 1.0)),
            svg.line(left, top, left, bottom, Pen(INK, 1.0)),
            self._labels(),
            self._beside(beside),
            self._legend(legend),
        ]
        return svg.document(self.width, self.height, parts, title=title, desc=desc, ident=self.ident)

    def _grid(self) -> str:
        lines = []
        for tick in self.y.ticks:
            (left, y), (right, _) = self.at(self.x.low, tick.value), self.at(self.x.high, tick.value)
            lines.append(svg.line(left, y, right, y, svg.GRID))
        return svg.group(*lines)

    def _labels(self) -> str:
        parts = []
        bottom = self.height - self.bottom
        for tick in self.x.ticks:
            x, _ = self.at(tick.value, self.y.low)
            parts.append(svg.line(x, bottom, x, bottom + 4, Pen(INK, 0.8)))
            parts.append(svg.text(x, bottom + 16, tick.text, anchor="middle"))
        for tick in self.y.ticks:
            _, y = self.at(self.x.low, tick.value)
            parts.append(svg.line(self.left - 4, y, self.left, y, Pen(INK, 0.8)))
            parts.append(svg.text(self.left - 7, y + 4, tick.text, anchor="end"))
        middle = (self.left + self.width - self.right) / 2
        parts.append(svg.text(middle, self.height - 8, self.x.label, anchor="middle", fill=MUTED))
        centre = (self.top + self.height - self.bottom) / 2
        parts.append(svg.text(14, centre, self.y.label, anchor="middle", fill=MUTED, upright=True))
        return svg.group(*parts)

    def _beside(self, levels: Sequence[Beside]) -> str:
        """Each at the height of its level, or as near to it as the others leave room."""
        right, bottom = self.at(self.x.high, self.y.low)
        _, top = self.at(self.x.high, self.y.high)
        wanted = [(self.at(self.x.high, one.y)[1], one) for one in levels]
        placed: list[float] = []
        ordered = sorted(wanted, key=lambda each: each[0])
        for py, _ in ordered:
            placed.append(max(py, top, placed[-1] + _LINE if placed else top))
        limit = bottom
        for at in reversed(range(len(placed))):
            placed[at] = min(placed[at], limit)
            limit = placed[at] - _LINE
        words = [
            svg.text(right + _GAP, py + 4, one.words, fill=one.colour)
            for py, (_, one) in zip(placed, ordered, strict=True)
        ]
        return svg.group(*words) if words else ""

    def _legend(self, entries: Sequence[Entry]) -> str:
        """In a row above the frame, from the left, into a second row where the first is full."""
        parts: list[str] = []
        rows = [[]] if not entries else _rowed(entries, self.width - self.left - self.right)
        for n, row in enumerate(rows):
            x, y = self.left, self.top - 12 - 14 * (len(rows) - 1 - n)
            for entry in row:
                parts.append(_sample(x, y, entry))
                parts.append(svg.text(x + 30, y + 4, entry.text))
                x += _wide(entry)
        return svg.group(*parts)


def _wide(entry: Entry) -> float:
    return 48 + svg.text_width(entry.text)


def _rowed(entries: Sequence[Entry], width: float) -> list[list[Entry]]:
    rows: list[list[Entry]] = [[]]
    used = 0.0
    for entry in entries:
        if rows[-1] and used + _wide(entry) > width:
            rows.append([])
            used = 0.0
        rows[-1].append(entry)
        used += _wide(entry)
    return rows


def _sample(x: float, y: float, entry: Entry) -> str:
    drawn = ""
    if entry.fill is not None:
        drawn += svg.rect(x, y - 5, 24, 10, entry.fill)
    if entry.pen is not None:
        drawn += svg.line(x, y, x + 24, y, entry.pen)
    if entry.form is not None:
        drawn += svg.mark(x + 12, y, entry.form, colour=INK if entry.pen is None else entry.pen.stroke)
    return drawn


def _decimals(step: float) -> int:
    """How many decimals multiples of a nice step need."""
    for decimals in range(12):
        if abs(step * 10**decimals - round(step * 10**decimals)) < 1e-6 * step * 10**decimals:
            return decimals
    return 12
