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
    from windctl.forecast.checking import Check
    from windctl.forecast.readings_file import ReadingLine
    from windctl.forecast.table import Table
    from windctl.forecast.waiting import Waiting
    from windctl.plan.prior import Prior
    from windctl.recipe.model import Recipe

Z95 = 1.959964


@click.command(short_help="A forecast from a readings file.")
@click.argument("recipe", type=click.Path(path_type=Path))
@click.argument("readings_file", metavar="READINGS", type=click.Path(path_type=Path))
@takes("at_turn", "machine", "readings", "spool", "book", "json", "no_input")
def forecast(shared: Shared, recipe: Path, readings_file: Path) -> None:
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
    lines = load_readings(readings_file)
    profile = profile_of(shared)
    plan = make_plan(wanted, profile, supply=supply_of(shared, profile, wanted))
    lines = _in_ohm(plan.prior, lines, str(readings_file), typed.may_ask(shared.no_input))
    at_turn = shared.at_turn or float(wanted.stop.turns or plan.turns)
    table = forecast_table(plan.prior, lines, at_turn, wanted.stop.dcr_20c_ohm)
    check = _check(table, lines, wanted) if profile.readings.mode == "checks" else None
    again = _again(lines, table, at_turn)
    if shared.json:
        more = {
            "check": None if check is None else check.as_json(),
            "read_again": None if again is None else again.as_json(),
        }
        present.result_json({**table.as_json(), **more})
        return
    _show(table, at_turn)
    if check is not None:
        present.result(show_check(check))
    if again is not None:
        cold = f"{present.ohm(again.ohm)} at its ends at {again.celsius:.1f} °C"
        known = f"±{present.ohm(again.then_u95)} instead of ±{present.ohm(again.now_u95)}"
        wait = present.counted(again.minutes, "minute")
        present.result(f"still warm: wait {wait} and read again; cold it should read {cold}: {known}")


def _check(table: Table, lines: list[ReadingLine], recipe: Recipe) -> Check | None:
    """Where to check next on the way to a resistance."""
    from windctl.forecast.checking import where_to_check

    stop = recipe.stop
    if stop.dcr_20c_ohm is None or stop.min_turns is None or stop.max_turns is None:
        return None
    turn = max((line.reading.turn for line in lines), default=0.0)
    check = where_to_check(table.estimate, turn, stop.dcr_20c_ohm, stop.min_turns, stop.max_turns)
    return check if check.turn > turn else None


def _again(lines: list[ReadingLine], table: Table, at_turn: float) -> Waiting | None:
    """Whether the finished coil is worth a cold reading."""
    from windctl.forecast.waiting import waiting

    last = lines[-1].reading if lines else None
    if last is None or not last.resting or last.turn < at_turn:
        return None
    return waiting(table.estimate, last.turn, last.celsius)


def show_check(check: Check) -> str:
    """Where to check, and what it gains."""
    without, with_it = present.ohm(Z95 * check.without_ohm), present.ohm(Z95 * check.with_ohm)
    return (
        f"check at turn {present.grouped(check.turn)}: the finish is known to ±{without} without it, to "
        f"±{with_it} with it"
    )


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
            cells.append(present.turns(row.stop.turn, Z95 * row.stop.sd))
        rows.append(cells)
    present.table(header, rows, right="r rr")
    if table.alarm is not None:
        present.result(f"alarm: {table.alarm.text}")
