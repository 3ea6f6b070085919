"""The check-up on simulated machines that are as their profile says, and on some that are not."""

from __future__ import annotations

from dataclasses import replace
from typing import Any, cast

import pytest

from tests.checkup.driving import bench_for, drive, profile
from tests.firmware.host_board import HostBoard
from windctl.checkup.checkup import Checkup
from windctl.checkup.plan import STEPS, calibrations, chosen
from windctl.checkup.step import Act, Verdict
from windctl.desk.simulated_hand import SimulatedHand
from windctl.machine.plant.faults import Faults
from windctl.machine.virtual.bench import Bench
from windctl.machine.virtual.port import VirtualPort
from windctl.protocol.frames import encode
from windctl.protocol.messages import Beat, State

WITH_PEDAL = profile(pedal=cast("Any", True))


def only(*keys: str) -> list[Any]:
    return list(chosen(keys))


def test_a_machine_as_its_profile_says_is_good_in_every_step() -> None:
    bench = bench_for(WITH_PEDAL)
    bench._attendant = cast("Any", _Nobody())
    results = drive(bench, WITH_PEDAL)
    assert {key: one.verdict for key, one in results.items()} == {one.key: Verdict.GOOD for one in STEPS}
    assert bench.board.state == State.DRIVES_OFF
    assert not bench.outputs.drive_enable


class _Nobody:
    """Nobody presses a pedal by himself."""

    def see(self, state: int) -> None: ...

    def look(self) -> None: ...


def test_the_core_in_c_is_good_as_well(cc: str) -> None:
    like = bench_for()
    spec = like.plant.spec
    board = HostBoard(
        capabilities=like.board.capabilities,
        contact_scale=spec.milliohm_per_unit,
        tension_scale=spec.tension_unit,
    )
    bench = Bench(cast("Any", board), like.plant)
    results = drive(bench)
    assert {one.verdict for one in results.values()} == {Verdict.GOOD, Verdict.NOT_FITTED}
    assert [key for key, one in results.items() if one.verdict is Verdict.NOT_FITTED] == ["pedal"]


def test_drives_are_off_until_the_consent_and_the_powered_steps_come_last() -> None:
    powered = [one.powered for one in STEPS]
    assert powered == sorted(powered)
    bench = bench_for()
    on: list[int] = []
    bench.watch = lambda _: on.append(bench.ticks) if bench.outputs.drive_enable else None
    results = drive(bench, answers={Act.CONSENT: "yes"})
    assert on == []
    powered_keys = {one.key for one in STEPS if one.powered} - {"pedal"}  # which is not fitted
    assert {results[key].verdict for key in powered_keys} == {Verdict.LEFT_OUT}
    assert results["counter"].verdict is Verdict.GOOD


@pytest.mark.parametrize("after_s", [0.3, 0.9])
def test_a_stop_in_mid_turn_ends_with_the_drives_off(after_s: float) -> None:
    bench = bench_for()
    turning_since: list[float] = []

    def each(checkup: Checkup, port: VirtualPort) -> None:
        if bench.board.state == State.TURNING and not turning_since:
            turning_since.append(port.now())
        if turning_since and port.now() > turning_since[0] + after_s:
            checkup.stop()

    results = drive(bench, each=each)
    assert bench.board.state == State.DRIVES_OFF
    assert not bench.outputs.drive_enable
    assert bench.plant.spindle.speed == 0
    assert results["guide"].verdict is Verdict.LEFT_OUT
    assert "end" not in results


def test_an_encoder_with_other_counts_is_found_and_calibrated() -> None:
    said = profile(spindle={"counts_per_turn": 200})
    results = drive(bench_for(), said, only("counter"))
    assert results["counter"].verdict is Verdict.FAULT
    assert results["counter"].calibration == {"spindle.counts_per_turn": 400}


def test_play_and_scale_of_the_guide_are_measured() -> None:
    really = profile(guide={"backlash_mm": 0.12, "steps_per_mm": 205.0})
    results = drive(bench_for(really), steps=only("guide"))
    found = results["guide"].calibration
    assert results["guide"].verdict is Verdict.FAULT
    assert found["guide.backlash_mm"] == pytest.approx(0.12, abs=0.005)
    assert found["guide.steps_per_mm"] == pytest.approx(205.0, abs=0.5)
    again = profile(guide={"backlash_mm": 0.12, "steps_per_mm": 205.0})
    assert drive(bench_for(really), again, only("guide"))["guide"].verdict is Verdict.GOOD


def test_a_belt_that_slips_is_a_fault_of_the_spindle() -> None:
    results = drive(bench_for(faults=Faults(belt_slips_at_turn=0)), steps=only("spindle"))
    assert results["spindle"].verdict is Verdict.FAULT
    assert "slip" in results["spindle"].measured


def test_an_index_that_never_comes_is_a_fault() -> None:
    results = drive(bench_for(faults=Faults(index_lost_at_turn=0)), steps=only("index"))
    assert results["index"].verdict is Verdict.FAULT
    assert "index" in results["index"].measured


def test_a_resistor_that_reads_wrong_is_a_fault_and_a_right_one_is_not() -> None:
    for really, verdict in ((1000.0, Verdict.GOOD), (1030.0, Verdict.FAULT)):
        bench = bench_for()
        results = drive(
            bench, steps=only("contact_zero", "reference"), hand=SimulatedHand(bench.plant, really),
            reference_ohm=1000.0,
        )  # fmt: skip
        assert results["reference"].verdict is verdict


def test_dirty_leads_are_a_fault_and_no_calibration() -> None:
    bench = bench_for(profile(readings={"lead_ohm": 6.0}))
    results = drive(bench, steps=only("contact_zero"))
    assert results["contact_zero"].verdict is Verdict.FAULT
    assert calibrations(results.values()) == {}


def test_swapped_inputs_are_found() -> None:
    class Swapped(SimulatedHand):
        def does(self, question: Any) -> str:
            swap = {Act.OPEN_GUARD: Act.PRESS_STOP, Act.CLOSE_GUARD: Act.RELEASE_STOP}
            super().does(replace(question, act=swap.get(question.act, question.act)))
            if question.act is Act.OPEN_GUARD:  # both wires joined: the guard's pin follows as well
                super().does(question)
            return ""

    bench = bench_for()
    results = drive(bench, steps=only("inputs"), hand=Swapped(bench.plant))
    assert results["inputs"].verdict is Verdict.FAULT
    assert "stop_ok" in results["inputs"].measured


def test_a_board_that_turns_on_without_its_host_is_a_fault() -> None:
    bench = bench_for()

    def each(checkup: Checkup, port: VirtualPort) -> None:  # something keeps the board alive behind our back
        if bench.ticks % 500 < 20:
            port.write(encode(Beat.CODE, 0, b""))

    results = drive(bench, steps=only("silence"), each=each)
    assert results["silence"].verdict is Verdict.FAULT
    assert "do not use" in results["silence"].advice
    assert bench.board.state == State.DRIVES_OFF


def test_a_profile_that_names_more_than_is_fitted_is_told_at_once() -> None:
    said = profile(pedal=cast("Any", True))
    results = drive(bench_for(), said, only("greeting"))
    assert results["greeting"].verdict is Verdict.FAULT
    assert "pedal" in results["greeting"].measured


def test_a_counter_without_drive_or_guide_is_judged_by_what_it_has() -> None:
    counter = profile(
        spindle={"drive": "none", "counts_per_turn": 1, "index": False},
        guide={"kind": "hand"},
        tension={"sensor": False},
        readings={"mode": "none"},
    )
    results = drive(bench_for(counter), counter)
    verdicts = {key: one.verdict for key, one in results.items()}
    assert {key for key, verdict in verdicts.items() if verdict is Verdict.GOOD} == {
        "greeting", "line", "limits", "inputs", "counter", "guard_refuses", "arming",
    }  # fmt: skip
    assert set(verdicts.values()) == {Verdict.GOOD, Verdict.NOT_FITTED}


def test_what_a_person_passes_over_is_left_out_and_the_rest_goes_on() -> None:
    results = drive(bench_for(), answers={Act.OPEN_GUARD: None, Act.GAUGE: None})
    left = {key for key, one in results.items() if one.verdict is Verdict.LEFT_OUT}
    assert left == {"inputs", "guard_refuses", "guard_stops", "guide"}
    assert results["stop_stops"].verdict is Verdict.GOOD
