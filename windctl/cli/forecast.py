"""`windctl forecast`: what a coil will be, from readings in a file; no machine."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

import click

from windctl.cli import present, typed
from windctl.cli.options import Shared, takes
from windctl.desk.machines import profile_of
from windctl.errors import UsageError

if TYPE_CHECKING:
    from windctl.forecast.readings_file import ReadingLine
    from windctl.forecast.table import Table
    from windctl.plan.prior import Prior

_Z95 = 1.959964


@click.command(short_help="A forecast from a readings file.")
@click.argument("recipe", type=click.Path(path_type=Path))
@click.argument("readings", type=click.Path(path_type=Path))
@takes("at_turn", "machine", "spool", "book", "json", "no_input")
def forecast(shared: Shared, recipe: Path, readings: Path) -> None:
    """The forecast for the coil of RECIPE after each reading in the CSV file READINGS.

    The forecast is for --at-turn, else the recipe's turns, else the planned ones. How far the meter can be
    trusted comes from the machine's profile.
    """
    from windctl.desk.supply import supply_of
    from windctl.forecast.readings_file import load_readings
    from windctl.forecast.table import forecast_table
    from windctl.plan.make import make_plan
    from windctl.recipe.load import load_recipe

    wanted = load_recipe(recipe)
    lines = load_readings(readings)
    profile = profile_of(shared)
    plan = make_plan(wanted, profile, supply=supply_of(shared, profile, wanted))
    lines = _in_ohm(plan.prior, lines, str(readings), typed.may_ask(shared.no_input))
    at_turn = shared.at_turn or float(wanted.stop.turns or plan.turns)
    table = forecast_table(plan.prior, lines, at_turn, wanted.stop.dcr_20c_ohm)
    if shared.json:
        present.result_json(table.as_json())
    else:
        _show(table, at_turn)


def _in_ohm(prior: Prior, lines: list[ReadingLine], file: str, may_ask: bool) -> list[ReadingLine]:
    """The readings, scaled where they are all a thousand times off and the operator says so."""
    from windctl.forecast.units import thousandfold

    factor = thousandfold(prior, lines)
    if factor is None:
        return lines
    share = "a thousandth of" if factor > 1 else "a thousand times"
    slip = f"{file}: the readings are about {share} what is expected"
    if not may_ask:
        raise UsageError(f"{slip}; resistances in a readings file are in ohm, or carry a k.")
    if not click.confirm(f"{slip}. Take them times {factor:g}?", err=True):
        return lines
    return [_scaled(line, factor) for line in lines]


def _scaled(line: ReadingLine, factor: float) -> ReadingLine:
    reading = line.reading
    sd = None if reading.sd_ohm is None else reading.sd_ohm * factor
    return replace(line, reading=replace(reading, ohm=reading.ohm * factor, sd_ohm=sd))


def _show(table: Table, at_turn: float) -> None:
    """The rows for people; ± is the half-width of the 95 % interval, resistances are at 20 °C."""
    present.result(f"forecast for {present.turns(at_turn)}, at 20 °C")
    with_stop = any(row.stop is not None for row in table.rows)
    header = ["turn", "", "finish", *(["stop at"] if with_stop else [])]
    rows = []
    for row in table.rows:
        cells = [
            present.grouped(row.turn, 0 if row.turn.is_integer() else 2),
            "" if row.used else "not used",
            present.ohm(row.finish.ohm, (row.finish.high - row.finish.low) / 2.0),
        ]
        if row.stop is not None:
            cells.append(present.turns(row.stop.turn, _Z95 * row.stop.sd))
        rows.append(cells)
    present.table(header, rows, right="r rr")
    if table.alarm is not None:
        present.result(f"alarm: {table.alarm.text}")
