"""The report of a batch: its coils side by side, in numbers and drawn."""

from __future__ import annotations

from collections import Counter
from collections.abc import Collection, Sequence
from math import sqrt
from typing import TYPE_CHECKING

from windctl.numbers import counted, grouped, ohm
from windctl.paper import svg
from windctl.paper.control_chart import individuals_svg, ranges_svg
from windctl.paper.html import (
    Column,
    Markup,
    figure,
    page,
    section,
    table,
    tag,
    verdict_words,
)
from windctl.paper.look import report_css
from windctl.paper.plot import Entry, Plot, axis_over, categories
from windctl.paper.proof import META, Proof
from windctl.paper.svg import INK, Pen
from windctl.shop.lot import capability_words, says

if TYPE_CHECKING:
    from windctl.book.heads import CoilHead
    from windctl.shop.lot import Lot

_MEAN = Pen(INK, 0.9, "7 3")


def batch_report(
    batch: str,
    heads: Sequence[CoilHead],
    schema: int,
    simulated: Collection[str] = (),
    lot: Lot | None = None,
) -> str:
    """The page. `heads`: the batch's coils in the order in which they were begun, at least one;
    `simulated`: the numbers of those that no machine wound; `lot`: their control chart, where
    there are coils enough of one recipe."""
    return page(
        f"Batch {batch}",
        report_css(f"batch {batch} · {counted(len(heads), 'coil')}"),
        _head(batch, heads, simulated),
        tag(
            "main",
            _drawn(heads),
            Markup("") if lot is None else _control(lot),
            section("The coils", _table(heads)),
            _proofs(heads, schema),
        ),
        meta=[(META, Proof.of(head).line) for head in heads],
    )


def _head(batch: str, heads: Sequence[CoilHead], simulated: Collection[str]) -> Markup:
    recipes = list(dict.fromkeys(head.recipe for head in heads))
    names = tag(
        "div",
        tag("p", "Batch", class_="kind"),
        tag("h1", batch),
        tag("p", ", ".join(recipes), class_="sub"),
    )
    days = sorted(head.started[:10] for head in heads)
    when = days[0] if days[0] == days[-1] else f"{days[0]} to {days[-1]}"
    asked = max(head.of for head in heads)
    verdicts = Counter(head.verdict for head in heads)
    judged = ", ".join(f"{grouped(n)} {verdict}" for verdict, n in sorted(verdicts.items()))
    known = [head.dcr_20c_ohm for head in heads if head.dcr_20c_ohm]
    figures = tag(
        "dl",
        _key("coils", grouped(len(heads)), f"of {grouped(asked)}" if asked else ""),
        _key(
            "mean resistance at 20 °C", ohm(sum(known) / len(known)) if known else "not known", _spread(known)
        ),
        _key("judged within", f"{grouped(verdicts['within'])} of {grouped(len(heads))}", judged),
        _key("begun", days[0], "" if days[0] == days[-1] else when),
        class_="key",
    )
    parts = [tag("div", names, class_="title"), figures]
    if simulated:
        which = "these coils were" if len(simulated) == len(heads) else f"{', '.join(simulated)} were"
        words = f"Simulated: {which} wound by a simulated machine. There are no such coils."
        parts.append(tag("p", words, class_="warn"))
    return tag("header", *parts)


def _key(name: str, value: str, below: str) -> Markup:
    return tag("div", tag("dt", name), tag("dd", value, tag("small", below) if below else Markup("")))


def _spread(values: Sequence[float]) -> str:
    """Their standard deviation, where there are enough to have one."""
    if len(values) < 2:
        return ""
    mean = sum(values) / len(values)
    sd = sqrt(sum((value - mean) ** 2 for value in values) / (len(values) - 1))
    rounded = float(f"{sd:.2g}")  # two digits are more than a dozen coils can say
    return f"coils differ by {grouped(rounded, 0 if sd >= 10 else 1)} ohm (sd), {100 * sd / mean:.2g}\u00a0%"


def _drawn(heads: Sequence[CoilHead]) -> Markup:
    """Each coil's resistance with its interval, in order."""
    known = [
        (float(n), head.dcr_20c_ohm, head.dcr_u95_ohm or 0.0)
        for n, head in enumerate(heads)
        if head.dcr_20c_ohm
    ]
    if not known:
        return Markup("")
    per, unit = (1000.0, "kohm") if max(value for _, value, _ in known) >= 1000 else (1.0, "ohm")
    bars = [(n, (value - half) / per, (value + half) / per) for n, value, half in known]
    mean = sum(value for _, value, _ in known) / len(known) / per
    y = axis_over([end for _, low, high in bars for end in (low, high)], f"{unit} at 20 °C", most=5)
    plot = Plot(
        "coils", categories([f"{head.serial}" for head in heads], "coil (last digits)"), y, height=240
    )
    drawn = plot.drawn(
        "Resistance of the coils",
        f"{counted(len(known), 'coil')}, {ohm(mean * per)} in the mean.",
        plot.across(mean, _MEAN),
        plot.bars(bars, Pen(INK, 0.9)),
        plot.marks([(n, value / per) for n, value, _ in known], "dot", 3.2),
        legend=[Entry("coil, 95 % interval", svg.Pen(INK, 0.9), "dot"), Entry("mean", _MEAN)],
    )
    words = "Resistance at 20 °C of each coil. The bars hold what all share, such as the meter's gain."
    return section("Resistance", figure(drawn, words))


def _control(lot: Lot) -> Markup:
    """The control charts, and what they say."""
    said = [tag("li", line) for line in (*says(lot), *capability_words(lot))]
    return section(
        "Alike?",
        figure(individuals_svg(lot), "Coil by coil, with limits at three standard deviations."),
        figure(ranges_svg(lot), "By how much each coil differs from the one before."),
        tag("ul", *said),
    )


def _table(heads: Sequence[CoilHead]) -> Markup:
    columns = [
        Column("coil"),
        Column("begun"),
        Column("outcome"),
        Column("turns", True),
        Column("at 20 °C, 95 %", True),
        Column("judged"),
    ]
    rows = [
        (
            head.number,
            head.started[:16].replace("T", " "),
            head.outcome,
            "" if head.turns is None else grouped(head.turns, 0 if head.turns.is_integer() else 1),
            ohm(head.dcr_20c_ohm, head.dcr_u95_ohm or 0.0) if head.dcr_20c_ohm else "",
            verdict_words(head.verdict),
        )
        for head in heads
    ]
    return table("In the order in which they were begun", columns, rows)


def _proofs(heads: Sequence[CoilHead], schema: int) -> Markup:
    rows = [
        (
            head.number,
            tag("span", head.id, class_="digest"),
            tag("span", head.record_digest + ("" if head.sealed else " (open)"), class_="digest"),
        )
        for head in heads
    ]
    columns = [Column("coil"), Column("id"), Column("digest of the record")]
    how = tag(
        "p",
        "Whoever has the coil book (schema ",
        str(schema),
        ") checks each with ",
        tag("code", "windctl coils verify"),
        ": the record there must be whole and end with the digest below.",
    )
    return section("Proof", how, table("What this page stands on", columns, rows, class_="proofs"))
