"""The plant as the board sees it: spindle, counts, index, guide, tension, and what can go wrong."""

from __future__ import annotations

import statistics
import struct
from dataclasses import replace
from itertools import pairwise

import pytest

from tests.machine.plant.worlds import BOBBIN, HAND_GUIDED, wind, wind_turns
from windctl.machine.plant.coil_growing import Coil
from windctl.machine.plant.fate import true_to
from windctl.machine.plant.faults import Faults
from windctl.machine.plant.plant import Plant, PlantTruth
from windctl.machine.twin.signals import (
    ALL_OK,
    GUARD_OK,
    GUIDE_HIGH_OK,
    GUIDE_LOW_OK,
    STOP_OK,
    Inputs,
    Outputs,
)

TRUE = true_to(HAND_GUIDED)


def facts(plant: Plant, ticks: int) -> list[tuple[int, ...]]:
    return [
        (s.count_delta, s.index, s.steps_issued, s.contact, s.tension, s.celsius_centi, s.pins)
        for s in wind(plant, ticks)
    ]


def test_the_same_seed_gives_the_same_facts_and_another_seed_others() -> None:
    first = facts(Plant(HAND_GUIDED, 5), 3000)
    assert facts(Plant(HAND_GUIDED, 5), 3000) == first
    assert facts(Plant(HAND_GUIDED, 6), 3000) != first


def test_the_facts_of_a_seed_are_these_on_every_computer() -> None:
    """Written down once; a difference means that the virtual coils of old records cannot be wound again."""
    plant = Plant(HAND_GUIDED, 1)
    last = facts(plant, 20_000)[-1]
    assert last == (7, 0, 7, 778, 9400, 1932, ALL_OK)
    assert plant.truth() == PlantTruth(true_turns=333.35, true_dcr_20c_ohm=235.53285086979415)


@pytest.mark.parametrize(("counts", "steps"), [(400, 400), (400, 200), (1, 400), (24, 400), (37, 200)])
def test_counts_follow_steps_and_none_is_lost(counts: int, steps: int) -> None:
    plant = Plant(replace(HAND_GUIDED, counts_per_turn=counts, steps_per_turn=steps), 1)
    seen = wind(plant, 10_000, rate=5 * steps)
    assert sum(s.steps_issued for s in seen) == 50 * steps
    assert sum(s.count_delta for s in seen) == 50 * counts
    assert plant.truth().true_turns == pytest.approx(50.0)
    assert sum(s.index for s in seen) in (49, 50)


def test_the_index_comes_at_one_place_of_the_turn() -> None:
    plant = Plant(HAND_GUIDED, 3)
    position, marks = 0, []
    for seen in wind(plant, 5000, rate=2000):
        position += seen.count_delta
        if seen.index:
            marks.append(position)
    gaps = {b - a for a, b in pairwise(marks)}
    assert gaps <= {398, 399, 400, 401, 402}
    assert statistics.fmean(gaps) == pytest.approx(400.0, abs=2.0)


def test_without_errors_a_coil_wound_by_the_spindle_is_the_coil_of_the_closed_form() -> None:
    plant = Plant(BOBBIN, 1, fate=true_to(BOBBIN))  # the guide stands: all turns in one place
    wind_turns(plant, 20)
    truth = plant.truth()
    assert truth.true_turns == pytest.approx(20.0, abs=0.02)
    first_layer = 20 * BOBBIN.perimeter_mm * BOBBIN.ohm_per_m / 1000.0
    assert first_layer < truth.true_dcr_20c_ohm < first_layer * 1.04


def test_resistance_grows_within_a_turn_without_a_step() -> None:
    plant = Plant(HAND_GUIDED, 2)
    wind_turns(plant, 300)
    before = plant.truth().true_dcr_20c_ohm
    steps = []
    for _ in range(400):
        wind(plant, 1, rate=1000)
        after = plant.truth().true_dcr_20c_ohm
        steps.append(after - before)
        before = after
    assert min(steps) > 0.9 * statistics.fmean(steps)
    assert max(steps) < 1.1 * statistics.fmean(steps)


def test_tension_pulses_twice_a_turn_about_its_set_value() -> None:
    plant = Plant(HAND_GUIDED, 2, fate=replace(TRUE, tension_pulse=0.2))
    wind_turns(plant, 20, rate=4000)
    turns = wind(plant, 600, rate=4000)  # 4 steps a tick: 100 ticks a turn
    units = [s.tension for s in turns]
    mean = HAND_GUIDED.tension_cn * 10_000 / HAND_GUIDED.tension_unit
    assert statistics.fmean(units) == pytest.approx(mean, rel=0.002)
    assert max(units) == pytest.approx(mean * 1.12, rel=0.01)  # 0.2 at 1000 rpm is 0.12 at 600
    one = units[:100]
    rising = sum(a < mean <= b for a, b in zip(one, one[1:] + one[:1], strict=True))
    assert rising == 2


def test_a_broken_wire_has_no_tension_and_the_coil_stops_growing() -> None:
    plant = Plant(HAND_GUIDED, 4, faults=Faults(wire_breaks_at_turn=12))
    wind_turns(plant, 12.5)
    broken = plant.truth()
    seen = wind(plant, 2000)
    assert {s.tension for s in seen} == {0}
    assert sum(s.count_delta for s in seen) > 12_000
    assert plant.truth() == broken
    assert broken.true_turns == 12.0


def test_after_splicing_the_coil_grows_on() -> None:
    plant = Plant(HAND_GUIDED, 4, faults=Faults(wire_breaks_at_turn=12))
    wind_turns(plant, 20)
    plant.put_right()
    wind_turns(plant, 8)
    assert plant.truth().true_turns == pytest.approx(20.0, abs=0.03)
    assert wind(plant, 1)[0].tension > 0


def test_a_slipping_belt_carries_only_part_of_the_steps() -> None:
    plant = Plant(HAND_GUIDED, 4, faults=Faults(belt_slips_at_turn=5, belt_grip=0.7))
    wind_turns(plant, 6)
    seen = wind(plant, 2000)
    steps, counts = sum(s.steps_issued for s in seen), sum(s.count_delta for s in seen)
    assert counts / steps == pytest.approx(0.7, abs=0.001)


def test_a_stuck_encoder_counts_nothing_while_the_coil_grows() -> None:
    plant = Plant(HAND_GUIDED, 4, faults=Faults(encoder_sticks_at_turn=5))
    wind_turns(plant, 5.5)
    before = plant.truth().true_turns
    assert sum(s.count_delta for s in wind(plant, 600)) == 0
    assert plant.truth().true_turns == pytest.approx(before + 10.0, abs=0.05)


def test_a_lost_index_is_missing_and_nothing_else() -> None:
    plant = Plant(HAND_GUIDED, 4, faults=Faults(index_lost_at_turn=5))
    wind_turns(plant, 5.1)
    seen = wind(plant, 1200)
    assert sum(s.index for s in seen) == 0
    assert sum(s.count_delta for s in seen) == pytest.approx(8000, abs=10)


def test_a_machine_without_index_never_shows_one() -> None:
    assert not any(s.index for s in wind(Plant(replace(HAND_GUIDED, index=False), 1), 3000))


def test_guard_and_stop_open_and_close_at_their_ticks() -> None:
    faults = Faults(guard_opens_at_tick=300, stop_opens_at_tick=500, closes_after_ticks=100)
    pins = [s.pins for s in wind(Plant(HAND_GUIDED, 1, faults=faults), 700, rate=0)]
    assert [i + 1 for i, p in enumerate(pins) if not p & GUARD_OK] == list(range(300, 400))
    assert [i + 1 for i, p in enumerate(pins) if not p & STOP_OK] == list(range(500, 600))


def test_an_open_stop_takes_the_drives_power_and_the_spindle_coasts_to_rest() -> None:
    plant = Plant(HAND_GUIDED, 1)
    wind_turns(plant, 5)
    plant.set_stop(closed=False)
    seen = wind(plant, 1500)  # the port goes on pulsing a drive that has no power
    coasted = sum(s.count_delta for s in seen)
    assert 0 < coasted < 8 * 400
    assert seen[-1].count_delta == 0
    assert seen[-1].steps_issued > 0


def test_the_spindle_turns_by_hand_only_while_no_drive_holds_it() -> None:
    plant = Plant(HAND_GUIDED, 1)
    wind_turns(plant, 10)
    plant.turn_by_hand(-3)
    assert sum(s.count_delta for s in wind(plant, 1000, rate=0)) == 0
    unwound = sum(s.count_delta for s in wind(plant, 2000, rate=0, powered=0))
    assert unwound == -3 * 400
    assert plant.truth().true_turns == pytest.approx(7.0, abs=0.02)


def test_unwinding_and_winding_again_meets_the_index_at_the_same_place() -> None:
    plant = Plant(HAND_GUIDED, 3)
    counts = sum(s.count_delta for s in wind(plant, 700))
    plant.turn_by_hand(-4.25)
    counts += sum(s.count_delta for s in wind(plant, 2000, rate=0, powered=0))
    marks = []
    for seen in wind(plant, 1200, rate=3000):
        counts += seen.count_delta
        if seen.index:
            marks.append(counts % 400)
    expected = int(plant._fate(0).index_place * 400)
    assert marks
    assert all((mark - expected) % 400 <= 3 for mark in marks)


def test_a_persons_own_motor_turns_what_no_board_drives() -> None:
    plant = Plant(replace(HAND_GUIDED, drive=False, counts_per_turn=1), 1)
    plant.own_motor(600.0)
    seen = wind(plant, 12_000, rate=0, powered=0)
    assert sum(s.count_delta for s in seen[-6000:]) == 60
    plant.own_motor(0.0)
    wind(plant, 1000, rate=0, powered=0)
    assert sum(s.count_delta for s in wind(plant, 1000, rate=0, powered=0)) == 0


def guide_to(plant: Plant, steps: int) -> Inputs:
    outputs, inputs = Outputs(), Inputs()
    for _ in range(abs(steps)):
        outputs.guide_steps = 1 if steps > 0 else -1
        plant.step(outputs, inputs)
    return inputs


def test_limit_switches_open_at_the_ends_of_the_guides_travel() -> None:
    """60 mm of travel about an 11 mm gap: 24.5 mm beyond each flange."""
    plant = Plant(replace(BOBBIN, steps_per_mm=20.0), 1, fate=true_to(BOBBIN))
    assert guide_to(plant, 35 * 20).pins == ALL_OK
    assert guide_to(plant, 20).pins == ALL_OK & ~GUIDE_HIGH_OK
    assert guide_to(plant, -20).pins == ALL_OK
    assert guide_to(plant, -60 * 20).pins == ALL_OK & ~GUIDE_LOW_OK


def test_backlash_is_lost_going_back_and_not_going_forth() -> None:
    spec = replace(BOBBIN, backlash_mm=0.2, steps_per_mm=100.0)
    plant = Plant(spec, 1, fate=true_to(spec))
    start = plant.guide.next_mm()
    guide_to(plant, 100)
    assert plant.guide.next_mm() - start == pytest.approx(1.0)
    guide_to(plant, -15)
    assert plant.guide.next_mm() - start == pytest.approx(1.0)
    guide_to(plant, -15)
    assert plant.guide.next_mm() - start == pytest.approx(0.9)


def test_a_hand_covers_the_gap_and_never_leaves_it() -> None:
    plant = Plant(HAND_GUIDED, 8)
    places = [plant.guide.next_mm() for _ in range(4000)]
    assert -0.5 < min(places) < 0.7
    assert 10.3 < max(places) < 11.5
    low = sum(p < 5.5 for p in places) / len(places)
    assert low == pytest.approx(0.5, abs=0.05)


def test_a_new_bobbin_is_empty_and_goes_on_with_the_spools_wire() -> None:
    plant = Plant(HAND_GUIDED, 8)
    wind_turns(plant, 50)
    old: Coil = plant.coil
    wire = old.ohm_per_m
    plant.new_bobbin()
    assert plant.truth().true_turns == 0.0
    assert plant.coil.ohm_per_m == pytest.approx(wire, rel=1e-9)
    wind_turns(plant, 50)
    assert plant.coil is not old
    assert plant.truth().true_turns == pytest.approx(50.0, abs=0.03)


def test_over_many_seeds_the_coil_lands_about_where_its_spec_says() -> None:
    """ohm per metre alone moves it by 3.5 %; 200 turns in all, so that the packing hardly matters."""
    made = []
    for seed in range(40):
        plant = Plant(HAND_GUIDED, seed)
        wind_turns(plant, 200, rate=15_000)
        truth = plant.truth()
        made.append(truth.true_dcr_20c_ohm / truth.true_turns)
    nominal = HAND_GUIDED.ohm_per_m * HAND_GUIDED.perimeter_mm / 1000.0
    relative = [ohm / nominal - 1.0 for ohm in made]
    assert statistics.stdev(relative) == pytest.approx(0.0355, rel=0.35)
    assert abs(statistics.fmean(relative)) < 3 * 0.0355 / 40**0.5 + 0.004


def test_a_coil_put_back_by_its_program_is_the_coil_that_was_wound() -> None:
    """Same spool, same lay, same turns: what the spindle laid and what is laid at once agree closely."""
    segments = b"".join(struct.pack("<Hh", 400, 44 if turn % 94 < 47 else -44) for turn in range(300))
    put_back = Plant(BOBBIN, 6)
    put_back.wound_already(250.5, segments)
    wound = Plant(BOBBIN, 6)
    outputs, inputs = Outputs(), Inputs()
    outputs.drive_enable = 1
    for counts, steps in struct.iter_unpack("<Hh", segments[: 4 * 251]):
        for part in range(200):
            if wound.position >= 250.5 * 400:
                break
            outputs.rate = 2000
            outputs.guide_steps = (part + 1) * steps // 200 - part * steps // 200
            wound.step(outputs, inputs)
        assert counts == 400
    there, here = wound.truth(), put_back.truth()
    assert here.true_turns == there.true_turns == 250.5
    assert here.true_dcr_20c_ohm == pytest.approx(there.true_dcr_20c_ohm, rel=1e-4)
