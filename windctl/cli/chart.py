"""`windctl chart`: whether the coils of a lot come out alike, and since when not."""

from __future__ import annotations

import shutil
import sys
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from windctl.cli import present, typed
from windctl.cli.options import Shared, takes
from windctl.desk.books import book_to_read
from windctl.errors import QueryError, UsageError, WindctlError

if TYPE_CHECKING:
    from windctl.desk.lots import Gathered
    from windctl.shop.lot import Lot

_ROWS, _RANGE_ROWS = 15, 7
_WIDEST = 110


@click.command(short_help="Control charts over a batch or a spool.")
@click.argument("query", nargs=-1)
@click.option("--quantity", type=click.Choice(["ohm-per-turn", "turns", "resistance"]),
              help="What to chart; else what the target left free: turns where resistance was the target, "
                   "resistance where turns were.")  # fmt: skip
@click.option("--rules", type=click.Choice(["western-electric", "nelson"]), default="western-electric",
              show_default=True,
              help="Which published set of rules says what is out: four of 1956, or eight of "
                   "1984.")  # fmt: skip
@click.option("--baseline", type=typed.WholeRange(min=2), metavar="N",
              help="Limits from the first N coils alone; else from all.")  # fmt: skip
@click.option("--low", callback=typed.ohm_option, metavar="VALUE",
              help="What the coils are to lie within, in the unit of what is charted; 7.6k.")  # fmt: skip
@click.option("--high", callback=typed.ohm_option, metavar="VALUE",
              help="Without both, the recipe's target and tolerance are taken.")  # fmt: skip
@click.option("--svg", "svg_file", type=click.Path(dir_okay=False, path_type=Path), metavar="FILE",
              help="Draw the charts into this file, too.")  # fmt: skip
@takes("book", "batch", "spool", "json")
def chart(
    shared: Shared,
    query: tuple[str, ...],
    quantity: str | None,
    rules: str,
    baseline: int | None,
    low: float | None,
    high: float | None,
    svg_file: Path | None,
) -> None:
    """Charts of individual values and moving ranges over the finished coils of --batch, of --spool, or that
    QUERY asks for as in 'windctl coils list', in the order in which they were begun.

    Says what is out, by which rule, and since which coil; and how the coils compare with their tolerance:
    Cp and Cpk with 95 % intervals, from the standard deviation of all of them.
    """
    from windctl.desk.lots import gather
    from windctl.shop.control import RULES
    from windctl.shop.lot import as_json, free_quantity, lot_of

    asked = " ".join(query)
    if not (asked or shared.batch or shared.spool):
        raise UsageError("which coils? Give --batch NAME, --spool ID, or a query such as since:2026-03")
    if low is not None and high is not None and low >= high:
        raise UsageError(f"--low {low:g} is not below --high {high:g}")
    try:
        with book_to_read(shared) as book:
            heads = book.list(asked, batch=shared.batch, spool=shared.spool)
            gathered = gather(book, heads)
    except QueryError as error:
        raise UsageError(f"{error}\n  {error.text}\n  {' ' * error.at}^") from error
    try:
        lot = lot_of(
            gathered.coils,
            quantity or free_quantity(gathered.coils),
            RULES[rules],
            baseline=baseline,
            limits=(low, high),
        )
    except ValueError as error:
        raise UsageError(_few(str(error), gathered)) from None
    if svg_file is not None:
        _write(svg_file, lot, gathered)
    if shared.json:
        also: dict[str, Any] = {
            "recipe": gathered.recipe,
            "not_counted": [{"coil": coil, "why": why} for coil, why in gathered.left_out],
        }
        present.result_json({**as_json(lot), **also})
        return
    _tell(lot, gathered)


def _few(why: str, gathered: Gathered) -> str:
    left = "" if not gathered.left_out else f"; {present.counted(len(gathered.left_out), 'coil')} left out"
    return f"{why}{left}"


def _write(file: Path, lot: Lot, gathered: Gathered) -> None:
    from windctl.paper.control_chart import chart_svg
    from windctl.paper.svg import standalone

    try:
        file.write_text(
            standalone(chart_svg(lot, heading=_capital(_heading(lot, gathered)))),
            encoding="utf-8",
            newline="\n",
        )
    except OSError as error:
        raise WindctlError(f"{file} cannot be written: {error.strerror or error}") from error
    present.message(f"drawn into {file}")


def _heading(lot: Lot, gathered: Gathered) -> str:
    from windctl.shop.lot import name_of

    coils = present.counted(len(lot.coils), "coil")
    first, last = lot.coils[0].number, lot.coils[-1].number
    return f"{name_of(lot.quantity)} of {coils}, {first} to {last}: {gathered.recipe}"


def _capital(text: str) -> str:
    return text[:1].upper() + text[1:]


def _tell(lot: Lot, gathered: Gathered) -> None:
    from windctl.shop.lot import capability_words, says, written

    sheet, spread = lot.chart, lot.chart.sigma
    present.result(_heading(lot, gathered))
    drawn = sum(place >= 0 for place in _places(len(lot.coils))[1])
    if drawn < len(lot.coils):
        present.result(f"the last {drawn} of them drawn; a wider terminal or --svg shows more")
    for line in _individuals(lot):
        present.result(line)
    present.result()
    present.result("moving range: by how much each coil differs from the one before")
    for line in _ranges(lot):
        present.result(line)
    present.result()
    low, high = (written(lot.quantity, end, spread, unit=False) for end in (sheet.low, sheet.high))
    centre = written(lot.quantity, sheet.centre, spread)
    first = "" if sheet.baseline == len(lot.coils) else f", from the first {sheet.baseline} coils"
    present.result(f"mean {centre}, limits {low} to {high} (three sigma{first})")
    if lot.signals or lot.wide:
        present.result("out, each marked X:")
    for line in (*says(lot), *capability_words(lot)):
        present.result(line)
    _tell_left_out(lot, gathered)


def _tell_left_out(lot: Lot, gathered: Gathered) -> None:
    out = [f"{coil} ({why})" for coil, why in gathered.left_out]
    out += [f"{coil.number} (resistance not measured)" for coil in lot.left_out]
    if out:
        present.message(f"not counted: {', '.join(out)}")
    if gathered.versions > 1:
        present.message(f"{gathered.versions} versions of the recipe were wound: 'windctl coils compare'")


def _individuals(lot: Lot) -> list[str]:
    from windctl.desk.text_chart import TextChart
    from windctl.shop.lot import out_of, written

    sheet = lot.chart
    values = (*sheet.values, sheet.low, sheet.high)
    ends = (min(values), max(values))
    if ends[0] == ends[1]:
        ends = (ends[0] - 1.0, ends[1] + 1.0)
    columns, places = _places(len(lot.coils))
    drawn = TextChart(columns, _ROWS, *ends)
    line, wall = _signs()
    for value, char in ((sheet.high, line[0]), (sheet.low, line[0]), (sheet.centre, line[1])):
        drawn.level(value, char, written(lot.quantity, value, sheet.sigma, unit=False))
    out = out_of(lot)
    for at, value in enumerate(sheet.values):
        if places[at] >= 0:
            drawn.point(places[at], value, "X" if at in out else "o")
    return drawn.lines(_below(lot, places), wall)


def _ranges(lot: Lot) -> list[str]:
    from windctl.desk.text_chart import TextChart
    from windctl.shop.lot import written

    sheet = lot.chart
    top = max(*sheet.ranges, sheet.high_range)
    columns, places = _places(len(lot.coils))
    drawn = TextChart(columns, _RANGE_ROWS, 0.0, top if top > 0.0 else 1.0)
    line, wall = _signs()
    drawn.level(sheet.high_range, line[0], written(lot.quantity, sheet.high_range, sheet.sigma, unit=False))
    drawn.level(sheet.mean_range, line[1], written(lot.quantity, sheet.mean_range, sheet.sigma, unit=False))
    for at, step in enumerate(sheet.ranges, 1):
        if places[at] >= 0:
            drawn.point(places[at], step, "X" if at in lot.wide else "o")
    return drawn.lines(_below(lot, places), wall)


def _places(coils: int) -> tuple[int, list[int]]:
    """The field's columns, and the column of each coil; where there are more than columns, the last ones."""
    from windctl.desk.text_chart import MARGIN

    room = min(shutil.get_terminal_size().columns, _WIDEST) - MARGIN - 1
    shown = min(coils, room)
    apart = max(min(room // shown, 6), 1)
    return shown * apart, [(at - coils + shown) * apart + apart // 2 for at in range(coils)]


def _below(lot: Lot, places: list[int]) -> list[tuple[int, str]]:
    return [
        (column, coil.number.rpartition("-")[2])
        for coil, column in zip(lot.coils, places, strict=True)
        if column >= 0
    ]


def _signs() -> tuple[str, str]:
    """For limit and centre, and for the wall."""
    return ("╌─", "│") if present.takes_unicode(sys.stdout) else ("-.", "|")
