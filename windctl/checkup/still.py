"""The steps that power nothing: greeting, line, limits, inputs, counter, contact."""

from __future__ import annotations

import math
from collections.abc import Generator
from statistics import fmean, stdev

from windctl.checkup.checkup import fitted_in
from windctl.checkup.scene import COMMAND_S, Scene, Waiting, setup_taken, stands
from windctl.checkup.step import Act, Course, Fault, Need, Question, Result, Seen, Step, Verdict
from windctl.protocol.messages import BoardMessage, Capability, InputBit, ReadingFlag, Setup, Status, Trust
from windctl.protocol.picture import BoardPicture
from windctl.protocol.wants import Datum, Wants

_BEAT = Wants(beat=True)
_LISTEN_S = 2.0
_STATUS_MS = 50
_HAND_TURNS = 10
_WINDOW = 500  # ticks: 25 and 30 whole cycles of the mains
_READINGS = 5


def _greeting(scene: Scene) -> Course:
    yield from scene.wait(
        _BEAT, _greeted, 10.0,
        "the board does not greet", "look at baud rate, wiring and the firmware's version",
    )  # fmt: skip
    identity = scene.picture.identity
    assert identity is not None
    has = scene.picture.capabilities
    missing = fitted_in(scene.profile) & ~has & ~Capability.THERMOMETER
    measured = f"boot {identity.boot}, queue {identity.queue}: {_names(has)}"
    if missing:
        raise Fault(
            f"{measured}; the profile has {_names(missing)} besides",
            "take out of the profile what is not fitted, or build the firmware that has it",
        )
    calibration: dict[str, float | int] = {}
    tension = scene.profile.tension
    if has & Capability.TENSION and tension.sensor and identity.tension_scale != tension.unit:
        calibration["tension.unit_cn"] = identity.tension_scale / 10_000
    queue = scene.profile.board.queue_segments
    if queue is not None and queue != identity.queue:
        calibration["board.queue_segments"] = identity.queue
    verdict = Verdict.FAULT if calibration else Verdict.GOOD
    advice = "the profile says otherwise: " + ", ".join(calibration) if calibration else ""
    return Result("greeting", GREETING, verdict, measured, "what the profile has", advice, calibration)


def _line(scene: Scene) -> Course:
    before = scene.status().bad_frames
    seen = yield from scene.for_a_time(_BEAT, _LISTEN_S)
    heard = [one for one in seen.messages if isinstance(one, Status)]
    wanted = round(_LISTEN_S * 1000 / _STATUS_MS)
    bad = (scene.status().bad_frames - before) & 0xFFFF
    measured = f"{len(heard)} reports in {_LISTEN_S:g} s, {bad} damaged frames at the board"
    limit = f"{wanted - 4} to {wanted + 4}, none damaged"
    if bad or abs(len(heard) - wanted) > 4:
        raise Fault(measured, "look at cable, ground, baud rate, and what else uses the USB bus")
    return Result("line", LINE, Verdict.GOOD, measured, limit)


def _limits(scene: Scene) -> Course:
    spindle = scene.profile.spindle
    pace = max(1, min(15_000, round(spindle.max_rpm * scene.steps / 60)))
    decel = max(scene.decel, -(-pace // 10))
    mine = scene.setup(fitted_in(scene.profile) & ~Capability.THERMOMETER, max_pace=pace, decel=decel)
    yield from _set_up(scene, mine)
    measured = f"{pace} steps/s, {mine.accel} and {mine.decel} steps/s2 taken"
    return Result("limits", LIMITS, Verdict.GOOD, measured, "the profile's")


def _inputs(scene: Scene) -> Course:
    wanted = InputBit.STOP_OK | InputBit.GUARD_OK
    cases = [
        (Act.OPEN_GUARD, Act.CLOSE_GUARD, InputBit.GUARD_OK),
        (Act.PRESS_STOP, Act.RELEASE_STOP, InputBit.STOP_OK),
    ]
    if scene.profile.guide.kind == "step":
        wanted |= InputBit.GUIDE_LOW_OK | InputBit.GUIDE_HIGH_OK
        cases += [
            (Act.PRESS_LOW, Act.FREE_LOW, InputBit.GUIDE_LOW_OK),
            (Act.PRESS_HIGH, Act.FREE_HIGH, InputBit.GUIDE_HIGH_OK),
        ]
    if scene.profile.pedal:
        cases.append((Act.PRESS_PEDAL, Act.LET_PEDAL_GO, InputBit.PEDAL_DOWN))
    watched = wanted | (InputBit.PEDAL_DOWN if scene.profile.pedal else InputBit(0))
    rest = scene.status().inputs & watched
    if rest != wanted:
        raise Fault(
            f"at rest: {_names(InputBit(rest ^ wanted))} not as it should be",
            "close guard, hardware stop and limit switches, let the pedal go; then look at their wires",
        )
    for act, back, bit in cases:
        yield from scene.input_becomes(act, bit, bit == InputBit.PEDAL_DOWN, _BEAT)
        others = (scene.status().inputs ^ rest) & watched & ~bit
        if others:
            raise Fault(
                f"{act.value}: {_names(InputBit(others))} changed too", "look for swapped or joined wires"
            )
        yield from scene.input_becomes(back, bit, bit != InputBit.PEDAL_DOWN, _BEAT)
    return Result("inputs", INPUTS, Verdict.GOOD, f"{len(cases)} one by one, each alone", "each alone")


def _counter(scene: Scene) -> Course:
    mine = scene.setup(Capability(0))
    yield from scene.drives_off()
    yield from _set_up(scene, mine)
    wants = Wants(beat=True, setup=mine, datum=Datum(0, 0, 0, 0, scene.permission()))
    yield from scene.wait(
        wants, _placed,
        COMMAND_S, "the board does not take a place",
    )  # fmt: skip
    text = f"Put a mark on the spindle. Please {Act.TURN.value}; then press Enter."
    yield from scene.ask(Question(Act.TURN, text), Wants(beat=True, setup=mine))
    yield from scene.for_a_time(Wants(beat=True, setup=mine), 1.0)
    yield from scene.wait(Wants(beat=True, setup=mine), stands, 10.0, "the spindle does not stand")
    counts, turn = scene.status().count, scene.turn
    found = counts / _HAND_TURNS
    slack = max(1.0, 0.05 * turn)
    measured = f"{counts} counts in {_HAND_TURNS} turns"
    limit = f"{_HAND_TURNS * turn} within {slack:g}"
    if counts < 0:
        raise Fault(measured, "it counts down: swap the encoder's two channels, or turn the other way")
    if abs(counts - _HAND_TURNS * turn) <= slack:
        return Result("counter", COUNTER, Verdict.GOOD, measured, limit)
    if not 1 <= round(found) <= 400:
        raise Fault(measured, "look at the encoder's wires and supply")
    return Result(
        "counter", COUNTER, Verdict.FAULT, measured, limit,
        f"the profile says {turn} counts per turn, {found:.1f} were counted",
        {"spindle.counts_per_turn": round(found)},
    )  # fmt: skip


def _zero(scene: Scene) -> Course:
    yield from scene.ask(
        Question(Act.LEADS_TOGETHER, f"Please {Act.LEADS_TOGETHER.value}; then press Enter."), _BEAT
    )
    ohm, sd = yield from _measured(scene)
    scene.zero_ohm = ohm
    kept = scene.profile.readings
    most = kept.lead_ohm + 3 * kept.lead_sd_ohm + 3 * kept.floor_ohm
    return Result(
        "contact_zero", ZERO, Verdict.GOOD if ohm <= most else Verdict.FAULT,
        f"{ohm:.2f} ohm, scatter {sd:.2f} ohm", f"at most {most:.2f} ohm",
        "" if ohm <= most else "clean the contact, look at leads and solder joints",
        {"readings.lead_ohm": round(max(ohm, 0.0), 3)} if ohm <= most else {},
    )  # fmt: skip


def _reference(scene: Scene) -> Course:
    value = scene.reference_ohm
    text = f"Please {Act.REFERENCE.value}"
    if value is None:
        value = yield from scene.ask_number(Act.REFERENCE, f"{text}; type its value", "ohm", _BEAT)
    else:
        text = f"{text}, the one of {value:g} ohm; then press Enter."
        yield from scene.ask(Question(Act.REFERENCE, text), _BEAT)
    if value <= 0:
        raise Fault(f"a resistor of {value:g} ohm", "a known value above 0 ohm is needed")
    ohm, sd = yield from _measured(scene)
    kept = scene.profile.readings
    net = ohm - (kept.lead_ohm if scene.zero_ohm is None else scene.zero_ohm)
    off = 100.0 * (net / value - 1.0)
    # three standard deviations of gain, of the zero's and the reading's scatter
    small = 100.0 * (math.hypot(kept.floor_ohm, kept.floor_ohm) + kept.lead_sd_ohm) / value
    most = 3.0 * math.hypot(kept.gain_sd_pct, small)
    good = abs(off) <= most
    return Result(
        "reference", REFERENCE, Verdict.GOOD if good else Verdict.FAULT,
        f"{net:.2f} ohm, scatter {sd:.2f} ohm: {off:+.2f} %", f"{value:g} ohm within {most:.2f} %",
        "" if good else "look at the converter's reference and its known resistor",
    )  # fmt: skip


def _open(scene: Scene) -> Course:
    text = f"Please {Act.LEADS_FREE.value}; then press Enter."
    yield from scene.ask(Question(Act.LEADS_FREE, text), _BEAT)
    readings = yield from scene.readings(100, 2)
    if not all(one.flags & ReadingFlag.OPEN for one in readings):
        raise Fault("an open contact does not read as open", "look for a leak between the contact's leads")
    return Result("contact_open", OPEN, Verdict.GOOD, "reads as open", "open")


def _measured(scene: Scene) -> Generator[Need, Seen, tuple[float, float]]:
    """Mean and standard deviation of a few readings at rest, ohm. Raises Fault for an open contact."""
    readings = yield from scene.readings(_WINDOW, _READINGS)
    identity = scene.picture.identity
    assert identity is not None
    if any(one.flags & ReadingFlag.OPEN for one in readings):
        raise Fault("the contact reads as open", "look at its leads and their plug")
    ohms = [one.value / 16 * identity.contact_scale / 1000 for one in readings]
    return fmean(ohms), stdev(ohms)


def _set_up(scene: Scene, mine: Setup) -> Waiting:
    return (
        yield from scene.wait(
            Wants(beat=True, setup=mine),
            setup_taken(mine),
            COMMAND_S,
            "the board does not take the profile's limits",
            "compare the profile's spindle and guide with what the board allows",
        )
    )


def _greeted(picture: BoardPicture, came: list[BoardMessage]) -> bool:
    del came
    return picture.greeted and picture.status is not None


def _placed(picture: BoardPicture, came: list[BoardMessage]) -> bool:
    del came
    return picture.status is not None and picture.status.trust == Trust.COUNT | Trust.GUIDE


def _names(bits: Capability | InputBit) -> str:
    return ", ".join(bit.name.lower() for bit in type(bits) if bit & bits and bit.name) or "nothing"


GREETING = "Greeting"
LINE = "Line"
LIMITS = "Limits"
INPUTS = "Inputs"
COUNTER = "Counter"
ZERO = "Contact zero"
REFERENCE = "Reference resistor"
OPEN = "Open contact"

STILL = (
    Step("greeting", GREETING, "asks the board who it is and what is fitted", _greeting),
    Step("line", LINE, "listens for two seconds", _line),
    Step("limits", LIMITS, "tells the board the profile's limits", _limits),
    Step("inputs", INPUTS, "watches each input being opened and closed", _inputs, hand=True),
    Step("counter", COUNTER, "counts ten turns by hand", _counter, hand=True),
    Step("contact_zero", ZERO, "reads the contact with its leads together", _zero,
         needs=Capability.CONTACT, hand=True),
    Step("reference", REFERENCE, "reads a resistor of known value", _reference,
         needs=Capability.CONTACT, hand=True),
    Step("contact_open", OPEN, "reads the contact with its leads free", _open,
         needs=Capability.CONTACT, hand=True),
)  # fmt: skip
