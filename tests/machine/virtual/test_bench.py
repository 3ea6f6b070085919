"""Board, plant and line together: a coil wound by frames alone, and what people and accidents do to it."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest

from tests.machine.plant.worlds import BOBBIN, HAND_GUIDED
from tests.machine.virtual.bare_host import SETUP, bench_of, host_of, setup_for
from windctl.machine.plant.fate import true_to
from windctl.machine.plant.faults import Faults
from windctl.machine.plant.plant import Plant
from windctl.machine.virtual.bench import virtual_bench
from windctl.profile.builtin import VIRTUAL
from windctl.protocol import messages as m
from windctl.recipe.load import load_recipe

RECIPES = sorted((Path(__file__).parents[3] / "recipes").glob("*.toml"))


def test_a_coil_wound_over_the_line_stands_at_its_stop_point_with_that_many_turns() -> None:
    bench = bench_of(BOBBIN)
    host = host_of(bench)
    host.greet()
    host.make_ready()
    host.go(300 * 400)
    status = host.wind_until_held()
    assert status.cause == m.Cause.STOP_POINT
    assert status.count == 300 * 400
    assert bench.plant.truth().true_turns == pytest.approx(300.0, abs=1 / 400)


def test_the_lay_spreads_the_turns_over_the_gap() -> None:
    bench = bench_of(BOBBIN)
    host = host_of(bench)
    host.greet()
    host.make_ready()
    host.go(470 * 400)
    host.wind_until_held()
    builds = bench.plant.coil.build_mm
    millimetres = [sum(builds[i : i + 20]) / 20 for i in range(0, len(builds), 20)]
    assert len(millimetres) == 11
    assert min(millimetres[1:-1]) > 0.8 * max(millimetres[1:-1])
    assert millimetres[0] < 0.9 * millimetres[5]  # 0.3 mm of margin at each flange
    assert millimetres[-1] < 0.9 * millimetres[5]


def test_readings_of_a_true_machine_are_the_truth_in_the_boards_units() -> None:
    """Over 200 ms windows while turning, at the count of the window's middle. R(n) = a n + b n^2, with a of
    the bare core and b from the finished coil."""
    bench = bench_of(HAND_GUIDED, plant=Plant(HAND_GUIDED, 1, fate=true_to(HAND_GUIDED)))
    host = host_of(bench)
    host.greet()
    host.make_ready(setup_for(HAND_GUIDED))
    host.ask(m.Measure(200, 250))
    host.go(400 * 400)
    host.wind_until_held()
    fixed = HAND_GUIDED.lead_ohm + 0.150 * HAND_GUIDED.ohm_per_m
    turning = [r for r in host.readings if r.flags & m.ReadingFlag.TURNING and r.count > 100 * 400]
    assert len(turning) > 50
    whole = bench.plant.truth()
    a = HAND_GUIDED.perimeter_mm / 1000 * HAND_GUIDED.ohm_per_m
    b = (whole.true_dcr_20c_ohm - a * whole.true_turns) / whole.true_turns**2
    for reading in turning:
        ohm = reading.value / 16 * HAND_GUIDED.milliohm_per_unit / 1000 - fixed
        turns = reading.count / 400
        assert ohm == pytest.approx(a * turns + b * turns**2, abs=0.4)
    host.pass_time(2000)
    at_rest = host.readings[-1]
    assert not at_rest.flags & m.ReadingFlag.TURNING
    ohm = at_rest.value / 16 * HAND_GUIDED.milliohm_per_unit / 1000 - fixed
    assert ohm == pytest.approx(bench.plant.truth().true_dcr_20c_ohm, abs=0.31)


def run_script(seed: int) -> tuple[list[m.Message], object]:
    bench = bench_of(BOBBIN, seed)
    host = host_of(bench)
    host.greet()
    host.make_ready()
    host.ask(m.Measure(200, 250))
    host.go(60 * 400)
    host.wind_until_held()
    return host.heard, bench.plant.truth()


def test_the_same_seed_and_the_same_bytes_give_the_same_facts() -> None:
    assert run_script(3) == run_script(3)
    assert run_script(3) != run_script(4)


@pytest.mark.parametrize(
    ("faults", "trip"),
    [
        (Faults(wire_breaks_at_turn=40), m.Trip.TENSION_LOW),
        (Faults(belt_slips_at_turn=40), m.Trip.SLIP),
        (Faults(encoder_sticks_at_turn=40), m.Trip.INDEX),  # it comes where no whole turn was counted
        (Faults(index_lost_at_turn=40), m.Trip.INDEX),
        (Faults(guard_opens_at_tick=15_000), m.Trip.GUARD),
        (Faults(stop_opens_at_tick=15_000), m.Trip.STOP_INPUT),
    ],
    ids=lambda value: "" if isinstance(value, Faults) else value.name.lower(),
)
def test_each_accident_trips_the_board_and_the_machine_comes_to_rest(faults: Faults, trip: m.Trip) -> None:
    bench = bench_of(BOBBIN, faults=faults)
    host = host_of(bench)
    host.greet()
    host.make_ready()
    host.go(2000 * 400)
    status = host.wind_until_held()
    assert (m.State(status.state), m.Trip(status.trip)) == (m.State.TRIPPED, trip)
    host.pass_time(1000)
    assert bench.plant.spindle.speed == 0
    assert bench.plant.truth().true_turns > 35.0


def test_a_broken_wire_is_seen_within_three_turns_and_spliced_before_the_trip_is_cleared() -> None:
    bench = bench_of(BOBBIN, faults=Faults(wire_breaks_at_turn=40))
    host = host_of(bench)
    host.greet()
    host.make_ready()
    host.go(2000 * 400, pace=2000)
    status = host.wind_until_held()
    assert 40 < status.count / 400 < 45
    assert bench.plant.truth().true_turns == 40.0
    assert not bench.plant.wire_whole
    host.ask(m.ClearTrip(*host.permission))
    assert bench.plant.wire_whole


def test_a_datum_of_zero_for_another_coil_means_an_empty_bobbin() -> None:
    bench = bench_of(BOBBIN)
    host = host_of(bench)
    host.greet()
    host.make_ready()
    host.go(30 * 400)
    host.wind_until_held()
    host.ask(m.Disarm())
    host.make_ready(replace(SETUP, coil_token=8))
    assert bench.plant.truth().true_turns == 0.0
    host.go(20 * 400)
    host.wind_until_held()
    assert bench.plant.truth().true_turns == pytest.approx(20.0, abs=1 / 400)


def test_going_on_after_a_hold_keeps_the_bobbin() -> None:
    bench = bench_of(BOBBIN)
    host = host_of(bench)
    host.greet()
    host.make_ready()
    host.go(30 * 400)
    host.wind_until_held()
    host.ask(m.Disarm())
    host.ask(m.Arm(*host.permission))
    host.go(40 * 400)
    host.wind_until_held()
    assert bench.plant.truth().true_turns == pytest.approx(40.0, abs=1 / 400)


def test_silence_stops_the_spindle_and_the_coil_is_still_there() -> None:
    bench = bench_of(BOBBIN)
    host = host_of(bench)
    host.greet()
    host.make_ready()
    host.go(100 * 400, pace=2000)
    host.beating = False
    host.pass_time(6000)
    assert host.status is not None
    assert (host.status.state, host.status.cause) == (m.State.HELD, m.Cause.SILENCE)
    assert bench.plant.spindle.speed == 0
    assert bench.plant.truth().true_turns == pytest.approx(host.status.count / 400, abs=1 / 400)


def test_a_reset_in_mid_coil_lets_the_spindle_coast_and_keeps_the_coil() -> None:
    bench = bench_of(BOBBIN)
    host = host_of(bench)
    host.greet()
    host.make_ready()
    host.go(100 * 400)
    host.pass_time(5000)
    before = bench.plant.truth().true_turns
    bench.reboot()
    host.pass_time(2000)
    after = bench.plant.truth().true_turns
    assert before < after < before + 10.0
    assert bench.plant.spindle.speed == 0
    identity = host.greet()
    assert identity.boot == 2
    assert identity.state == m.State.DRIVES_OFF
    assert identity.trust == 0


def test_a_person_turns_a_machine_without_a_drive_and_slows_down_before_the_stop_point() -> None:
    spec = replace(HAND_GUIDED, drive=False, counts_per_turn=1, index=False, cruise_rpm=600.0)
    bench = bench_of(spec)
    host = host_of(bench)
    host.greet()
    host.make_ready(setup_for(spec))
    host.ask(m.StopAt(*host.permission, 200))
    host.ask(m.Go(*host.permission))
    status = host.wind_until_held()
    assert status.cause == m.Cause.STOP_POINT
    assert 200 <= status.count <= 202
    assert bench.plant.truth().true_turns == pytest.approx(status.count, abs=1.01)


def test_unwinding_by_hand_is_counted_with_drives_off() -> None:
    bench = bench_of(HAND_GUIDED)
    host = host_of(bench)
    host.greet()
    host.make_ready(setup_for(HAND_GUIDED))
    host.go(50 * 400)
    host.wind_until_held()
    host.ask(m.Disarm())
    bench.plant.turn_by_hand(-3)
    host.pass_time(2000)
    assert host.status is not None
    assert host.status.count == 47 * 400
    assert bench.plant.truth().true_turns == pytest.approx(47.0, abs=1 / 400)


@pytest.mark.parametrize("path", RECIPES, ids=lambda path: path.stem)
def test_every_ready_recipe_has_a_bench(path: Path) -> None:
    recipe = load_recipe(path)
    bench = virtual_bench(recipe, VIRTUAL, 1)
    identity = host_of(bench).greet()
    assert identity.capabilities & m.Capability.VIRTUAL
    assert not identity.capabilities & m.Capability.PEDAL
    assert identity.contact_scale == bench.plant.spec.milliohm_per_unit
    wire = recipe.wire_data()
    assert abs(bench.plant.coil.ohm_per_m / wire.ohm_per_m - 1.0) <= 2.0 * wire.ohm_per_m_sd / wire.ohm_per_m


def test_a_bench_is_fitted_as_its_profile_says() -> None:
    profile = VIRTUAL.model_copy(
        update={
            "guide": VIRTUAL.guide.model_copy(update={"kind": "hand"}),
            "tension": VIRTUAL.tension.model_copy(update={"sensor": False}),
            "readings": VIRTUAL.readings.model_copy(update={"mode": "none"}),
            "pedal": True,
        }
    )
    capabilities = host_of(virtual_bench(load_recipe(RECIPES[0]), profile, 1)).greet().capabilities
    absent = m.Capability.GUIDE_STEP | m.Capability.TENSION | m.Capability.CONTACT
    assert not capabilities & absent
    assert capabilities & m.Capability.PEDAL
    assert capabilities & m.Capability.DRIVE_STEP
