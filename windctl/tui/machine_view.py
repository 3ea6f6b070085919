"""A machine on which nothing is wound, as the interface shows it. Pure."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from windctl.desk.numbers import grouped
from windctl.tui.looks import INPUTS, STEPS, Look, look_of
from windctl.tui.view import Next

if TYPE_CHECKING:
    from windctl.checkup.step import Result
    from windctl.desk.board_seen import BoardSeen
    from windctl.desk.checking import Change
    from windctl.desk.machine_look import Looked
    from windctl.desk.machines import KnownMachine

_WIDE, _WIDEST = 110, 150  # cells, from which what was measured has room, and its limit


@dataclass(frozen=True, slots=True)
class Lamp:
    """One input or sensor: its name, its state, and a figure where there is one."""

    name: str
    look: Look
    figure: str = ""


def lamps(board: BoardSeen | None) -> tuple[Lamp, ...]:
    """All inputs and sensors, in the order in which one walks round a machine."""
    if board is None:
        return ()
    tripped_index = board.state == "tripped" and board.because == "index"
    return (
        Lamp("stop", INPUTS["well" if board.stop_ok else "open"]),
        Lamp("guard", INPUTS["well" if board.guard_ok else "open"]),
        Lamp("pedal", _two(board.pedal_down, "down", "up")),
        Lamp("low limit", _two(board.low_ok, "free", "pressed")),
        Lamp("high limit", _two(board.high_ok, "free", "pressed")),
        Lamp("spindle", INPUTS["standing" if board.standing else "moving"], f"{grouped(board.rpm)} rpm"),
        Lamp(
            "count",
            INPUTS["known" if board.count_known else "unknown"],
            f"{grouped(board.turns, 2)} turns",
        ),
        Lamp(
            "index",
            INPUTS["tripped" if tripped_index else "fitted" if board.index else "none"],
        ),
        _guide(board),
        _figure("tension", board.tension_cn, "cN"),
        _contact(board),
        _figure("air", board.celsius, "°C"),
    )


def _two(value: bool | None, yes: str, no: str) -> Look:
    return INPUTS["none"] if value is None else INPUTS[yes if value else no]


def _figure(name: str, value: float | None, unit: str) -> Lamp:
    if value is None:
        return Lamp(name, INPUTS["none"])
    return Lamp(name, INPUTS["reads"], f"{value:.1f} {unit}")


def _guide(board: BoardSeen) -> Lamp:
    if board.guide_mm is None:
        return Lamp("guide", INPUTS["none"])
    return Lamp("guide", INPUTS["known" if board.guide_known else "unknown"], f"{board.guide_mm:.2f} mm")


def _contact(board: BoardSeen) -> Lamp:
    if not board.contact:
        return Lamp("contact", INPUTS["none"])
    if board.contact_open:
        return Lamp("contact", INPUTS["free leads"])
    if board.contact_ohm is None:
        return Lamp("contact", INPUTS["waits"])
    return Lamp("contact", INPUTS["reads"], f"{grouped(board.contact_ohm, 1)} Ω")


def not_open(why: str) -> tuple[Look, Next]:
    """The band while no board is looked at."""
    return look_of("not open"), Next(why)


def band(looked: Looked) -> tuple[Look, Next]:
    """The band: what the board does, and what is asked of the person."""
    if looked.link in ("closed", "lost"):
        return look_of("no link"), Next(looked.why or "the port is closed", "", "O tries again")
    board = looked.board
    if looked.link == "opening" or board is None:
        return look_of("connecting"), Next("waits for the board's greeting")
    look = look_of(board.state)
    if looked.stopping:
        return look, Next("stopping", "", "if it does not stop: the hardware stop")
    if looked.asked is not None:
        words = "consent to the drives: see below" if looked.asked.consent else looked.asked.text
        return look, Next(words, "", "" if looked.asked.consent else "S leaves it out")
    if looked.checking:
        title = next((one.title for one in looked.steps if one.key == looked.step), "ends")
        does = next((one.does for one in looked.steps if one.key == looked.step), "drives off")
        return look, Next(f"{title}: {does}", "", "F8 stops it")
    if board.state == "tripped":
        return look, Next(f"{board.because}: {board.look_to}")
    why = "drives off" if board.state == "drives off" else ""
    because = board.because if board.because not in (board.state, "") else "only looked at"
    return look, Next(", ".join(part for part in (why, because) if part), "", "C checks board and machine")


def columns(width: int) -> tuple[str, ...]:
    """The columns of the check's table."""
    return ("step", "verdict", "measured", "limit")[: 2 + (width >= _WIDE) + (width >= _WIDEST)]


def rows(looked: Looked, width: int) -> list[tuple[str, tuple[str | Look, ...]]]:
    """The check step by step: what was found, what runs, what is to come."""
    found = {one.key: one for one in looked.results}
    table: list[tuple[str, tuple[str | Look, ...]]] = []
    for step in looked.steps:
        result = found.pop(step.key, None)
        if result is not None:
            table.append((step.key, _row(result, width)))
        elif step.key == looked.step and looked.checking:
            table.append((step.key, (step.title, STEPS["now"], step.does, "")[: len(columns(width))]))
        else:
            how = "powers the drives" if step.powered else "asks for a hand" if step.hand else ""
            table.append((step.key, (step.title, STEPS["to come"], how, "")[: len(columns(width))]))
    return table + [(key, _row(result, width)) for key, result in found.items()]


def _row(result: Result, width: int) -> tuple[str | Look, ...]:
    cells = (result.title, STEPS[result.verdict.value], result.measured, result.limit)
    return cells[: len(columns(width))]


def about(looked: Looked, key: str | None) -> str:
    """More on one step: its limit, and what to look at."""
    result = next((one for one in looked.results if one.key == key), None)
    if result is None:
        step = next((one for one in looked.steps if one.key == key), None)
        return "" if step is None else f"{step.title}: {step.does}"
    parts = [f"{result.title}: {result.measured}"]
    if result.limit:
        parts.append(f"wanted {result.limit}")
    if result.advice:
        parts.append(result.advice)
    return " · ".join(part for part in parts if part)


def summed_up(looked: Looked) -> str:
    """How the last check went, in a line."""
    if looked.unconfirmed:
        return "✖ THE STOP IS NOT CONFIRMED: use the hardware stop."
    if not looked.results or looked.checking:
        return ""
    faults = sum(one.verdict.value == "fault" for one in looked.results)
    good = sum(one.verdict.value == "good" for one in looked.results)
    glyph = "✖" if faults else "○" if looked.stopped else "✔"
    stopped = "stopped: " if looked.stopped else ""
    many = "1 fault" if faults == 1 else f"{faults} faults"
    words = f"{glyph} {stopped}{many}, {good} of {len(looked.results)} good"
    return f"{words} · K keeps what was calibrated" if looked.calibration else words


def machine_line(machine: KnownMachine) -> str:
    """One machine in the list."""
    if machine.problem is not None:
        return f"{machine.name}  ✖ {machine.problem}"
    where = machine.port or ("simulated" if machine.file is None else "no port is named")
    usual = ", the usual one" if machine.usual else ""
    return f"{machine.name}  bench {machine.bench}, {where}{usual}"


def changes_words(changes: tuple[Change, ...]) -> str:
    """What a calibration changes, one a line."""
    width = max((len(one.key) for one in changes), default=0)
    return "\n".join(
        f"{one.key:<{width}}  {'not there' if one.before is None else f'{one.before:g}'} → {one.after:g}"
        for one in changes
    )
