"""The forecast of a whole readings file: what was known after each of its lines."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from windctl.forecast.alarm import Alarm, find_alarm
from windctl.forecast.estimator import Estimate, begin, update
from windctl.forecast.events import new_wire, spliced
from windctl.forecast.finish import Finish, TurnFor, finish_at, turn_for
from windctl.forecast.readings_file import ReadingLine, canonical_order
from windctl.plan.prior import Prior


@dataclass(frozen=True, slots=True)
class Row:
    """What was known after one reading, with what happened at its turn already in it."""

    turn: float
    used: bool
    at_turn: float
    finish: Finish
    stop: TurnFor | None  # with a resistance target: the turn that meets it

    def as_json(self) -> dict[str, Any]:
        """The row as other programs read it; resistances in ohm at 20 degrees C."""
        row: dict[str, Any] = {
            "turn": self.turn,
            "used": self.used,
            "at_turn": self.at_turn,
            "final_ohm": self.finish.ohm,
            "sd_ohm": self.finish.sd,
            "low_ohm": self.finish.low,
            "high_ohm": self.finish.high,
        }
        if self.stop is not None:
            row["stop_turn"] = self.stop.turn
            row["stop_turn_sd"] = self.stop.sd
        return row


@dataclass(frozen=True, slots=True)
class Table:
    """The forecast after every reading, in canonical order, and what the last one leaves to worry about."""

    rows: tuple[Row, ...]
    alarm: Alarm | None
    estimate: Estimate

    def as_json(self) -> dict[str, Any]:
        """The table as other programs read it, format 1."""
        return {
            "format": 1,
            "rows": [row.as_json() for row in self.rows],
            "alarm": None if self.alarm is None else self.alarm.text,
        }


def forecast_table(
    prior: Prior, lines: list[ReadingLine], at_turn: float, target_ohm: float | None = None
) -> Table:
    """The forecast for `at_turn` after every line, whatever order they come in.

    `target_ohm` at 20 degrees C adds the turn that meets it.
    """
    estimate = begin(prior)
    rows = []
    for line in canonical_order(lines):
        reading = line.reading
        estimate, used = update(estimate, reading)
        if line.event == "splice":
            estimate = spliced(estimate, reading.turn)
        elif line.event == "new wire":
            estimate = new_wire(estimate, reading.turn)
        stop = None if target_ohm is None else turn_for(estimate, target_ohm)
        rows.append(Row(reading.turn, used, at_turn, finish_at(estimate, at_turn), stop))
    return Table(tuple(rows), find_alarm(estimate), estimate)
