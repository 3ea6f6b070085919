"""The steps that power the drives, after the consent: what turns, what moves, and what must stop it."""

from __future__ import annotations

from dataclasses import replace

from windctl.checkup.scene import COMMAND_S, STAND_S, Scene, Waiting, held, stands, trip_name
from windctl.checkup.step import Act, Course, Fault, Question, Result, Step, Verdict
from windctl.protocol.messages import (
    BoardMessage,
    Capability,
    Cause,
    InputBit,
    Refusal,
    Refused,
    Setup,
    State,
    Status,
    Trip,
)
from windctl.protocol.picture import BoardPicture
from windctl.protocol.wants import Datum, Wants

_DRIVE = Capability.DRIVE_STEP
_TURNS = 5
_FAR_TURNS = 1000
_INDEX_TURNS = 10
_BACKLASH_SLACK_MM = 0.02  # what a dial gauge and a hand agree within; common practice, no source
_SCALE_SLACK = 0.005


def _arming(scene: Scene) -> Course:
    mine = scene.setup(scene.picture.capabilities & (_DRIVE | Capability.GUIDE_STEP))
    yield from scene.ready(mine)
    count, guide = scene.status().count, scene.status().guide
    yield from scene.for_a_time(Wants(beat=True, setup=mine), 1.0)
    moved = abs(scene.status().count - count)
    if moved > max(1, scene.turn // 100) or scene.status().guide != guide:
        raise Fault(
            f"{moved} counts came with the drives on and nothing asked", "look at the drivers' inputs"
        )
    return Result("arming", ARMING, Verdict.GOOD, f"ready for 1 s, {moved} counts", "nothing moves")


def _guard_refuses(scene: Scene) -> Course:
    mine = scene.setup(scene.picture.capabilities & _DRIVE)
    yield from scene.drives_off()
    wants = Wants(beat=True, setup=mine)
    yield from scene.input_becomes(Act.OPEN_GUARD, InputBit.GUARD_OK, False, wants)
    given = scene.permission()

    def refused(picture: BoardPicture, came: list[BoardMessage]) -> bool:
        del picture
        return any(isinstance(one, Refused) and one.why == Refusal.INPUT_OPEN for one in came)

    wants = Wants(beat=True, setup=mine, datum=Datum(0, 0, 0, 0, given), armed=given)
    yield from scene.wait(wants, refused, COMMAND_S, "arming with the guard open was not refused")
    yield from scene.input_becomes(Act.CLOSE_GUARD, InputBit.GUARD_OK, True, Wants(beat=True, setup=mine))
    return Result("guard_refuses", GUARD_REFUSES, Verdict.GOOD, "refused", "refused")


def _spindle(scene: Scene) -> Course:
    mine = scene.setup(_DRIVE)
    yield from scene.ready(mine)
    target = _TURNS * scene.turn
    yield from scene.go(mine, target)
    wants = Wants(beat=True, setup=mine, pace=scene.pace, stop_point=target)
    yield from scene.wait(wants, held, 60.0, "it does not come to its stop point")
    status = scene.status()
    if status.state == State.TRIPPED:
        raise Fault(
            f"{trip_name(status)} at count {status.count}",
            "compare spindle.steps_per_turn and counts_per_turn with motor and encoder; look at the belt",
        )
    short = target - status.count
    measured = f"{_TURNS} turns driven, stands {short} counts short"
    if status.cause != Cause.STOP_POINT or not 0 <= short * scene.steps < max(scene.turn, scene.steps):
        raise Fault(measured, "look at belt, coupling and encoder")
    text = "Seen by someone facing the spindle's nose, did it turn clockwise? Type y or n."
    seen = yield from scene.ask(Question(Act.LOOK, text), Wants(beat=True, setup=mine))
    if not seen.answer.strip().lower().startswith("y"):
        raise Fault(
            f"{measured}; it turned the other way", "swap one phase of the motor, or the driver's way"
        )
    return Result("spindle", SPINDLE, Verdict.GOOD, measured, "less than a step, clockwise")


def _index(scene: Scene) -> Course:
    mine = scene.setup(_DRIVE | Capability.INDEX)
    yield from scene.ready(mine)
    target = _INDEX_TURNS * scene.turn
    yield from scene.go(mine, target)
    wants = Wants(beat=True, setup=mine, pace=scene.pace, stop_point=target)
    yield from scene.wait(wants, held, 120.0, "it does not come to its stop point")
    if scene.status().state == State.TRIPPED:
        raise Fault(
            f"{trip_name(scene.status())} at count {scene.status().count}",
            "look at the index's sensor, and at spindle.counts_per_turn",
        )
    limit = f"within {mine.slip_counts} counts, {_INDEX_TURNS} turns"
    if scene.turn < 40 or scene.turn % 2 or scene.steps % 2:
        return Result("index", INDEX, Verdict.GOOD, "agrees", limit)
    # A turn that is said to be half as long must trip: else the board does not watch its index.
    wrong = scene.setup(
        _DRIVE | Capability.INDEX, counts_per_turn=scene.turn // 2, steps_per_turn=scene.steps // 2
    )
    yield from scene.ready(wrong)
    target = 20 * scene.turn
    yield from scene.go(wrong, target)
    wants = Wants(beat=True, setup=wrong, pace=scene.pace, stop_point=target)
    yield from scene.wait(wants, held, 60.0, "it does not stop")
    if scene.status().trip != Trip.INDEX:
        raise Fault("a wrong turn did not trip", "the index is not watched: look at its wire")
    return Result("index", INDEX, Verdict.GOOD, "agrees, and a wrong turn trips", limit)


def _hold(scene: Scene) -> Course:
    mine = scene.setup(_DRIVE)
    yield from scene.ready(mine)
    yield from _at_pace(scene, mine)
    seen = yield from scene.wait(
        Wants(beat=True, setup=mine, hold=True), held, STAND_S, "it does not stand after a Hold"
    )
    came = [one for one in seen.messages if isinstance(one, Status)]
    first = next(one for one in came if one.state != State.TURNING)
    way = scene.status().count - first.count
    due = scene.pace**2 / (2 * scene.decel) * scene.turn / scene.steps
    most = due + max(2.0, 0.1 * due, scene.turn / scene.steps + 1)
    measured = f"{way} counts from {first.speed} steps/s"
    if way > most:
        raise Fault(measured, "the spindle runs on: look at driver, belt and spindle.decel_rpm_per_s")
    return Result("hold", HOLD, Verdict.GOOD, measured, f"at most {most:.0f} counts")


def _silence(scene: Scene) -> Course:
    mine = scene.setup(_DRIVE)
    yield from scene.ready(mine)
    yield from _at_pace(scene, mine)
    quiet = replace(_on(scene, mine), beat=False)
    ticks = scene.status().ticks

    def not_turning(picture: BoardPicture, came: list[BoardMessage]) -> bool:
        del came
        return picture.state != State.TURNING

    yield from scene.wait(quiet, not_turning, 4.0, "it turns on without the host", "do not use this board")
    status = scene.status()
    after = ((status.ticks - ticks) & 0xFFFFFFFF) / 1000
    measured = f"held {after:.2f} s after the last look, cause {_cause(status)}"
    if status.cause != Cause.SILENCE or not 1.4 <= after <= 2.2:
        raise Fault(measured, "do not use this board: its silence rule does not work")
    yield from scene.wait(Wants(), stands, STAND_S, "it does not stand")
    count = scene.status().count
    yield from scene.for_a_time(Wants(), 1.0)
    if abs(scene.status().count - count) > max(1, scene.turn // 100):
        raise Fault("it moved after the silence", "do not use this board")
    return Result("silence", SILENCE, Verdict.GOOD, measured, "1.5 to 2 s after a Beat, then still")


def _guard_stops(scene: Scene) -> Course:
    return (
        yield from _gate(
            scene, Act.OPEN_GUARD, Act.CLOSE_GUARD, InputBit.GUARD_OK, Trip.GUARD, "guard_stops", GUARD_STOPS
        )
    )


def _stop_stops(scene: Scene) -> Course:
    return (
        yield from _gate(
            scene,
            Act.PRESS_STOP,
            Act.RELEASE_STOP,
            InputBit.STOP_OK,
            Trip.STOP_INPUT,
            "stop_stops",
            STOP_STOPS,
        )
    )


def _gate(scene: Scene, act: Act, back: Act, bit: InputBit, trip: Trip, key: str, title: str) -> Course:
    mine = scene.setup(_DRIVE)
    yield from scene.ready(mine)
    yield from _at_pace(scene, mine)
    wants = _on(scene, mine)
    seen = yield from scene.input_becomes(act, bit, False, wants)
    first = next(
        (one for one in seen.messages if isinstance(one, Status) and one.state == State.TRIPPED), None
    )
    if first is None:
        raise Fault(f"{act.value}: it turns on", "do not use this machine before this input works")
    yield from scene.wait(Wants(beat=True, setup=mine), held, STAND_S, "it does not stand")
    status = scene.status()
    if status.trip != trip:
        raise Fault(f"{trip_name(status)} instead of {trip.name.lower()}", "look for swapped wires")
    way = status.count - first.count
    yield from scene.input_becomes(back, bit, True, Wants(beat=True, setup=mine))
    yield from scene.for_a_time(Wants(beat=True, setup=mine), 0.5)
    if scene.picture.state != State.TRIPPED or scene.status().count - status.count > scene.turn // 50 + 1:
        raise Fault("closing it again cleared the trip", "do not use this board")
    return Result(key, title, Verdict.GOOD, f"tripped, stood {way} counts later", "tripped, and stays so")


def _pedal(scene: Scene) -> Course:
    mine = scene.setup(_DRIVE | Capability.PEDAL)
    yield from scene.ready(mine)
    wants = Wants(beat=True, setup=mine)
    yield from scene.input_becomes(Act.PRESS_PEDAL, InputBit.PEDAL_DOWN, True, wants)
    yield from scene.for_a_time(wants, 0.3)
    if scene.picture.state != State.READY:
        raise Fault("a press of the pedal alone started it", "do not use this board")
    yield from _at_pace(scene, mine)
    wants = _on(scene, mine)
    yield from scene.input_becomes(Act.LET_PEDAL_GO, InputBit.PEDAL_DOWN, False, wants)
    yield from scene.wait(wants, held, STAND_S, "it does not stand with the pedal let go")
    if scene.status().cause != Cause.PEDAL:
        raise Fault(f"held with cause {_cause(scene.status())}", "look at the pedal's wire")
    return Result("pedal", PEDAL, Verdict.GOOD, "held when let go", "held")


def _guide(scene: Scene) -> Course:
    mine = scene.setup(Capability.GUIDE_STEP)
    guide, span = scene.profile.guide, scene.guide_span
    wants = Wants(beat=True, setup=mine)
    yield from scene.ready(mine)
    places: list[float] = []
    yield from scene.guide_to(mine, -span)
    for place, how in (
        (
            0,
            "Set a gauge to the guide, larger away from the start flange; type what it shows",
        ),
        (span, "Type what the gauge shows now"),
        (0, "Type what the gauge shows now"),
    ):
        yield from scene.guide_to(mine, place)
        places.append((yield from scene.ask_number(Act.GAUGE, how, "mm", wants)))
    from_below, far, from_above = places
    way = far - from_below
    if abs(way) < 0.1 * span / guide.steps_per_mm:
        raise Fault(f"the guide went {way:.3f} mm", "it does not move: look at driver, screw and coupling")
    if way < 0:
        raise Fault(f"the guide went {way:.3f} mm", "it moves the wrong way: swap one phase of its motor")
    per_mm = span / way
    backlash = from_above - from_below
    off = per_mm / guide.steps_per_mm - 1.0
    calibration: dict[str, float | int] = {"guide.backlash_mm": round(max(backlash, 0.0), 3)}
    if abs(off) > _SCALE_SLACK:
        calibration["guide.steps_per_mm"] = round(per_mm, 2)
    good = abs(off) <= _SCALE_SLACK and abs(backlash - guide.backlash_mm) <= _BACKLASH_SLACK_MM
    return Result(
        "guide", GUIDE, Verdict.GOOD if good else Verdict.FAULT,
        f"{per_mm:.2f} steps/mm, backlash {backlash:.3f} mm",
        f"{guide.steps_per_mm:g} within 0.5 %, {guide.backlash_mm:g} within {_BACKLASH_SLACK_MM:g} mm",
        "" if good else "keep what was measured in the profile, or look at the screw",
        calibration,
    )  # fmt: skip


def _at_pace(scene: Scene, mine: Setup) -> Waiting:
    """Turning at the test's pace, far from any stop."""
    yield from scene.go(mine, _FAR_TURNS * scene.turn)

    def fast(picture: BoardPicture, came: list[BoardMessage]) -> bool:
        del came
        return picture.status is not None and picture.status.speed == scene.pace

    return (yield from scene.wait(_on(scene, mine), fast, 15.0, "it does not come to its pace"))


def _on(scene: Scene, mine: Setup) -> Wants:
    """Turning on as it does."""
    return Wants(beat=True, setup=mine, pace=scene.pace, stop_point=_FAR_TURNS * scene.turn)


def _cause(status: Status) -> str:
    try:
        return Cause(status.cause).name.lower()
    except ValueError:
        return str(status.cause)


ARMING = "Arming"
GUARD_REFUSES = "Guard refuses arming"
SPINDLE = "Steps and counts"
INDEX = "Index and counts"
HOLD = "Hold"
SILENCE = "Silence"
GUARD_STOPS = "Guard while turning"
STOP_STOPS = "Hardware stop while turning"
PEDAL = "Pedal"
GUIDE = "Guide both ways"

POWERED = (
    Step("guard_refuses", GUARD_REFUSES, "asks for power with the guard open", _guard_refuses,
         powered=True, hand=True),
    Step("arming", ARMING, "powers the drives for a second", _arming, powered=True),
    Step("hold", HOLD, "turns slowly, then holds", _hold, needs=_DRIVE, powered=True),
    Step("spindle", SPINDLE, "turns five turns to a stop point", _spindle,
         needs=_DRIVE, powered=True, hand=True),
    Step("silence", SILENCE, "turns slowly, and says nothing more", _silence, needs=_DRIVE, powered=True),
    Step("guard_stops", GUARD_STOPS, "turns slowly until the guard is opened", _guard_stops,
         needs=_DRIVE, powered=True, hand=True),
    Step("stop_stops", STOP_STOPS, "turns slowly until the hardware stop is pressed", _stop_stops,
         needs=_DRIVE, powered=True, hand=True),
    Step("pedal", PEDAL, "turns slowly while the pedal is down", _pedal,
         needs=_DRIVE | Capability.PEDAL, powered=True, hand=True),
    Step("index", INDEX, "turns ten turns watched by the index, then with a wrong turn", _index,
         needs=_DRIVE | Capability.INDEX, powered=True),
    Step("guide", GUIDE, "moves the guide to and fro past a gauge", _guide,
         needs=Capability.GUIDE_STEP, powered=True, hand=True),
)  # fmt: skip
