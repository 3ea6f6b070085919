"""`windctl coils compare`: several coils beside the first."""

from __future__ import annotations

import shutil
import sys
from pathlib import Path
from typing import TYPE_CHECKING

import click

from windctl.cli import present
from windctl.cli.options import Shared, takes
from windctl.desk.books import book_to_read
from windctl.errors import UsageError, WindctlError

if TYPE_CHECKING:
    from windctl.shop.compare import Compared, Curves, Differing

_LETTERS = "ABCDEFGHIJKLMNOPQRSTUVWXYZ"
_ROWS, _WIDEST = 17, 110


@click.command(short_help="Curves, programs and settings of several coils side by side.")
@click.argument("names", metavar="COIL COIL...", nargs=-1, required=True)
@click.option("--svg", "svg_file", type=click.Path(dir_okay=False, path_type=Path), metavar="FILE",
              help="Draw the curves into this file, too.")  # fmt: skip
@takes("book", "json")
def compare(shared: Shared, names: tuple[str, ...], svg_file: Path | None) -> None:
    """Set coils beside the first COIL: resistance at 20 °C over turns as the difference from the first one's,
    whether their programs are the same to the last byte, and which settings differ.

    Curves are what the winding read; one bench's meter is off by the same for all of its coils.
    """
    from windctl.desk.compared import gather
    from windctl.shop.compare import curves, differing

    if len(names) < 2:
        raise UsageError("name at least two coils; the others are compared with the first")
    if len(names) > len(_LETTERS):
        raise UsageError(f"{len(names)} coils are too many to be told apart; at most {len(_LETTERS)}")
    with book_to_read(shared) as book:
        heads = [book.find(name) for name in names]
        if len({head.id for head in heads}) < len(heads):
            raise UsageError("a coil is named twice")
        coils = [gather(book, head) for head in heads]
    drawn, differs = curves(coils), differing(coils)
    if svg_file is not None:
        _write(svg_file, coils, drawn)
    if shared.json:
        present.result_json(_json(coils, drawn, differs))
        return
    _tell(coils, drawn, differs)


def _write(file: Path, coils: list[Compared], drawn: Curves) -> None:
    from windctl.paper.compared import compared_svg
    from windctl.paper.svg import standalone

    try:
        file.write_text(standalone(compared_svg(coils, drawn)), encoding="utf-8", newline="\n")
    except ValueError as error:
        raise WindctlError(f"nothing to draw: {error}") from error
    except OSError as error:
        raise WindctlError(f"{file} cannot be written: {error.strerror or error}") from error
    present.message(f"drawn into {file}")


def _json(coils: list[Compared], drawn: Curves, differs: tuple[Differing, ...]) -> dict[str, object]:
    return {
        "coils": [
            {
                "coil": coil.number,
                "recipe": coil.recipe,
                "started": coil.started,
                "turns": coil.turns,
                "dcr_20c_ohm": coil.ohm,
                "dcr_u95_ohm": coil.u95_ohm,
                "program_digest": coil.program_digest,
                "read": len(coil.curve) > 1,
            }
            for coil in coils
        ],
        "same_program": len({coil.program_digest for coil in coils}) == 1,
        "turns": list(drawn.turns),
        "difference_ohm": [list(row) for row in drawn.differences],
        "settings": [{"name": one.name, "values": list(one.values)} for one in differs],
    }


def _tell(coils: list[Compared], drawn: Curves, differs: tuple[Differing, ...]) -> None:
    first = coils[0]
    rows = []
    for letter, coil in zip(_LETTERS, coils, strict=False):
        per_turn = "" if not (coil.ohm and coil.turns) else f"{coil.ohm / coil.turns:.4f}"
        same = coil is not first and coil.program_digest == first.program_digest
        rows.append(
            [
                letter,
                coil.number,
                coil.recipe,
                coil.started[:16].replace("T", " "),
                "" if coil.turns is None else present.grouped(coil.turns),
                "" if coil.ohm is None else present.ohm(coil.ohm, coil.u95_ohm or 0.0),
                per_turn,
                "as A" if same else present.short_digest(coil.program_digest),
            ]
        )
    header = ["", "coil", "recipe", "started", "turns", "at 20 °C", "ohm/turn", "program"]
    present.table(header, rows, right="    rrr")
    present.result()
    _tell_curves(coils, drawn)
    present.result()
    if not differs:
        present.result("settings: all the same")
        return
    present.table(
        ["settings that differ", *_LETTERS[: len(coils)]],
        [[one.name, *(_value(value) for value in one.values)] for one in differs],
    )


def _value(value: object) -> str:
    if value is None:
        return "-"
    if isinstance(value, bool):
        return "yes" if value else "no"
    return f"{value:g}" if isinstance(value, float) else str(value)


def _tell_curves(coils: list[Compared], drawn: Curves) -> None:
    for coil in coils:
        if len(coil.curve) < 2:
            why = "it is still open" if coil.still_open else "its resistance was not read while it was wound"
            present.result(f"{coil.number} has no curve: {why}")
    if not drawn.turns:
        present.result("no two curves to compare")
        return
    present.result("resistance less that of A over turns, ohm at 20 °C")
    for line in _chart(coils, drawn):
        present.result(line)
    for n, coil in enumerate(coils[1:], 1):
        last = drawn.last(n)
        if last is None:
            continue
        turn, off = last
        there = f"{off:+,.1f}".replace(",", " ")
        ohm = _at(coils[0], turn)
        share = "" if not ohm else f" ({100.0 * off / ohm:+.2f} %)"
        present.result(f"{_LETTERS[n]}: {there} ohm{share} at {present.turns(round(turn))} ({coil.number})")


def _at(coil: Compared, turn: float) -> float | None:
    from windctl.shop.compare import at

    return at(coil.curve, turn)


def _chart(coils: list[Compared], drawn: Curves) -> list[str]:
    from windctl.desk.text_chart import MARGIN, TextChart
    from windctl.paper.plot import nice_ticks

    seen = [off for row in drawn.differences for off in row if off is not None]
    low, high = min(seen), max(seen)
    if high - low < 1e-9:
        low, high = low - 1.0, high + 1.0
    columns = min(shutil.get_terminal_size().columns, _WIDEST) - MARGIN - 1
    chart = TextChart(columns, _ROWS, low, high)
    unicode = present.takes_unicode(sys.stdout)
    for tick in nice_ticks(low, high, 5):
        chart.level(tick.value, " ", tick.text)
    chart.level(0.0, "─" if unicode else "-", "0")
    end = drawn.turns[-1]
    for n in range(1, len(coils)):
        for turn, off in zip(drawn.turns, drawn.differences[n], strict=True):
            if off is not None:
                chart.point(round(turn / end * (columns - 1)), off, _LETTERS[n])
    below = [(round(tick.value / end * (columns - 1)), tick.text) for tick in nice_ticks(0.0, end, 8)]
    return chart.lines(below, "│" if unicode else "|")
