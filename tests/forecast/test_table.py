"""The forecast of a whole file: rows as other programs read them, events in place, kilo-ohms noticed."""

from __future__ import annotations

import json
import random

import pytest

from tests.forecast.priors import certain, shop, worked
from windctl.forecast.readings_file import parse_readings
from windctl.forecast.table import forecast_table
from windctl.forecast.units import thousandfold

NOISE = (1.2, -0.8, 2.1, -1.9, 0.4, -2.3, 1.5, 0.1)


def reference_file() -> str:
    """The linear reference case as a file, with one reading that a bad contact spoilt."""
    prior = worked()
    text = "turn,ohm,celsius,sd_ohm\n"
    for turn, noise in zip(range(500, 4001, 500), NOISE, strict=True):
        ohm = prior.ohm_per_turn * 1.03 * turn + prior.growth / 2 * 1.03 * 1.08 * turn**2 + noise
        text += f"{turn},{ohm!r},20,2\n"
    return text + "2600,1000,20,2\n"


def test_the_linear_reference_case_as_a_file() -> None:
    """Computed elsewhere in one piece: 5891.54 ohm, sd 12.22, after all eight readings."""
    lines = parse_readings(reference_file())
    random.Random(2).shuffle(lines)
    table = forecast_table(worked(), lines, 8000.0, 5893.855).as_json()
    assert json.loads(json.dumps(table)) == table
    assert table["format"] == 1
    assert table["alarm"] is None
    rows = table["rows"]
    assert [row["turn"] for row in rows] == [500, 1000, 1500, 2000, 2500, 2600, 3000, 3500, 4000]
    assert [row["used"] for row in rows] == [True] * 5 + [False] + [True] * 3
    assert {row["at_turn"] for row in rows} == {8000.0}
    assert rows[0]["final_ohm"] == pytest.approx(5873.85, abs=0.01)
    last = rows[-1]
    assert last["final_ohm"] == pytest.approx(5891.54, abs=0.01)
    assert last["sd_ohm"] == pytest.approx(12.22, abs=0.01)
    assert last["low_ohm"] == pytest.approx(5891.54 - 1.96 * 12.22, abs=0.02)
    assert last["high_ohm"] == pytest.approx(5891.54 + 1.96 * 12.22, abs=0.02)
    assert last["stop_turn"] == pytest.approx(8000 + 2.31 / 0.82, abs=0.3)  # 0.82 ohm a turn at the end
    assert last["stop_turn_sd"] == pytest.approx(12.22 / 0.82, rel=0.05)


def test_without_a_resistance_target_there_is_no_stop_turn() -> None:
    (row,) = forecast_table(worked(), parse_readings("turn,ohm,celsius\n500,340,20\n"), 8000.0).as_json()[
        "rows"
    ]
    assert "stop_turn" not in row


def test_no_readings_no_rows() -> None:
    assert forecast_table(worked(), [], 8000.0).as_json() == {"format": 1, "rows": [], "alarm": None}


def test_a_splice_widens_the_row_it_stands_in() -> None:
    text = reference_file().replace("celsius,sd_ohm", "celsius,sd_ohm,event").replace(",20,2\n", ",20,2,\n")
    plain = forecast_table(worked(), parse_readings(text), 8000.0)
    joined = forecast_table(worked(), parse_readings(text[:-1] + "splice\n"), 8000.0)
    wired = forecast_table(worked(), parse_readings(text[:-1] + "new wire\n"), 8000.0)
    at = [row.turn for row in plain.rows].index(2600)
    assert plain.rows[at].finish.sd < joined.rows[at].finish.sd < wired.rows[at].finish.sd
    assert plain.rows[:at] == joined.rows[:at] == wired.rows[:at]


def test_kilo_ohms_without_their_k_are_noticed() -> None:
    prior = shop()
    expected = prior.ohm_per_turn * 4000 + prior.growth * 4000**2 / 2
    kilo = parse_readings(f"turn,ohm,celsius\n4000,{expected / 1000:.3f},22\n")
    right = parse_readings(f"turn,ohm,celsius\n4000,{expected:.1f},22\n")
    slipped = parse_readings(f"turn,ohm,celsius\n4000,{expected * 1000:.1f},22\n")
    assert thousandfold(prior, kilo) == 1000.0
    assert thousandfold(prior, right) is None
    assert thousandfold(prior, slipped) == 0.001
    assert thousandfold(prior, right * 2 + kilo) is None  # one that touched the machine, among good ones
    assert thousandfold(prior, []) is None


def test_a_certain_coil_is_told_with_certainty() -> None:
    (row,) = forecast_table(certain(0.7, 0.0), parse_readings("turn,ohm,celsius\n500,350,20\n"), 1000.0).rows
    assert row.finish.ohm == pytest.approx(700.0)
    assert row.finish.sd == pytest.approx(0.0, abs=1e-6)
