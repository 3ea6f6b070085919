"""`windctl machine check`: what is shown, what is kept, and that nobody is driven unasked."""

from __future__ import annotations

import json
import signal
import time
from pathlib import Path

import pytest

from tests.cli.processes import begun
from windctl.checkup.plan import STEPS
from windctl.cli.main import run
from windctl.profile.load import load_profile

Printed = pytest.CaptureFixture[str]

PROFILE = """\
format = 1
name = "virtual"  # simulated
bench = "t1"
[spindle]
drive = "step"
counts_per_turn = 400
index = true
[guide]
kind = "step"
backlash_mm = 0.08  # measured in spring
[tension]
sensor = true
[readings]
mode = "live"
"""


def test_a_simulated_machine_is_checked_without_a_question(capsys: Printed) -> None:
    assert run(["machine", "check", "--machine", "virtual", "--json"]) == 0
    answer = json.loads(capsys.readouterr().out)
    assert answer["format"] == 1
    assert [one["step"] for one in answer["steps"]] == [one.key for one in STEPS]
    assert answer["faults"] == 0
    assert set(answer["calibration"]) == {"readings.lead_ohm", "guide.backlash_mm"}


def test_what_was_calibrated_is_kept_only_when_asked(tmp_path: Path, capsys: Printed) -> None:
    file = tmp_path / "north.toml"
    file.write_text(PROFILE, encoding="utf-8")
    steps = ("--step", "contact_zero", "--step", "guide")
    assert run(["machine", "check", "--machine", str(file), *steps]) == 0
    assert file.read_text(encoding="utf-8") == PROFILE
    assert "--save" in capsys.readouterr().err
    assert run(["machine", "check", "--machine", str(file), *steps, "--save"]) == 0
    kept = file.read_text(encoding="utf-8")
    assert "# measured in spring" in kept
    assert "# simulated" in kept
    profile = load_profile(file)
    assert profile.guide.backlash_mm == pytest.approx(0.08, abs=0.005)
    assert 0.0 < profile.readings.lead_ohm < 2.0
    assert [one.name for one in tmp_path.iterdir()] == ["north.toml"]


def test_the_built_in_machine_has_nothing_to_write_into(capsys: Printed) -> None:
    assert run(["machine", "check", "--machine", "virtual", "--save"]) == 2
    assert "no profile file" in capsys.readouterr().err


def test_a_real_machine_is_not_driven_where_nobody_can_be_asked(capsys: Printed) -> None:
    assert (
        run(["machine", "check", "--machine", "virtual", "--port", "socket://127.0.0.1:9", "--no-input"]) == 2
    )
    assert "--still" in capsys.readouterr().err


def test_the_steps_are_listed_and_an_unknown_one_is_named(capsys: Printed) -> None:
    assert run(["machine", "check", "--list"]) == 0
    assert "guard_refuses" in capsys.readouterr().out
    assert run(["machine", "check", "--machine", "virtual", "--step", "gearbox"]) == 2
    assert "gearbox" in capsys.readouterr().err


def test_a_port_is_tried_still_without_anybody(capsys: Printed) -> None:
    with begun("machine", "serve", "--machine", "virtual") as server:
        assert server.stdout is not None
        url = server.stdout.readline().strip()
        options = ("--port", url, "--still", "--no-input", "--json")
        assert run(["machine", "check", "--machine", "virtual", *options]) == 0
        server.send_signal(signal.SIGTERM)
        server.wait(10)
    steps = {one["step"]: one["verdict"] for one in json.loads(capsys.readouterr().out)["steps"]}
    assert steps == {"greeting": "good", "line": "good", "limits": "good"}


def test_ctrl_c_holds_and_takes_the_drives_off() -> None:
    with begun("machine", "check", "--machine", "virtual", "--speed", "4") as check:
        assert check.stderr is not None
        while "Arming" not in check.stderr.readline():
            assert check.poll() is None
        time.sleep(0.1)
        check.send_signal(signal.SIGINT)
        out, err = check.communicate(timeout=30)
    assert check.returncode == 130, err
    assert "NOT CONFIRMED" not in err
    assert "left out" in out
