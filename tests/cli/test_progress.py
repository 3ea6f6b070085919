"""What an operator sees of a run."""

from __future__ import annotations

import io
import re
from dataclasses import replace

import pytest
from hypothesis import given
from hypothesis import strategies as st

from windctl.cli import progress
from windctl.run.snapshot import Snapshot

TURNING = Snapshot(
    phase="turning",
    says="slows at 7641, stops near 7946",
    turns=3412.4,
    turns_planned=7900.0,
    stop_turn=7946.0,
    pace_rpm=1000.2,
    ohm_now=3310.0,
    celsius=23.1,
    ohm_20c_now=3271.3,
    finish_ohm=7945.6,
    finish_u95=30.9,
    tension_cn=18.3,
    guide_mm=4.2,
    seconds_left=272.0,
    virtual=True,
    asks=None,
    readings_used=120,
    readings_gated=2,
)

SGR = re.compile(r"\x1b\[[0-9;]*m")


class Terminal(io.StringIO):
    """A stream that says it is a terminal, and what a person would see on it."""

    encoding = "utf-8"

    def isatty(self) -> bool:
        return True

    def screen(self) -> list[str]:
        """Lines after carrying out the few control sequences that the display uses."""
        lines, row, column = [""], 0, 0
        for token in re.findall(r"\x1b\[\d*[A-Za-z]|\x1b\[[0-9;]*m|[\s\S]", self.getvalue()):
            if token == "\n":
                row, column = row + 1, 0
                if row == len(lines):
                    lines.append("")
            elif token == "\r":
                column = 0
            elif token == "\x1b[J":
                lines[row:] = [lines[row][:column]]
            elif token.endswith("A"):
                row -= int(token[2:-1])
            elif not token.startswith("\x1b"):
                lines[row] = lines[row][:column].ljust(column) + token + lines[row][column + 1 :]
                column += 1
        return lines


def test_the_live_display_names_turns_speed_resistance_forecast_and_time_left() -> None:
    lines = progress.live_lines(TURNING, 120, plain=False, colour=False)
    assert lines[0].startswith("▶ turning  ██████████░")
    for part in ("3 412 / 7 946 turns", "1000 rpm", "4:32 left"):
        assert part in lines[0]
    for part in (
        "finish 7.946 ± 0.031 kohm",
        "now 3.271 kohm",
        "slows at 7641, stops near 7946",
        "simulated",
    ):
        assert part in lines[1]


@given(st.integers(1, 200), st.booleans())
def test_no_line_is_wider_than_the_terminal(width: int, colour: bool) -> None:
    for line in progress.live_lines(TURNING, width, plain=False, colour=colour):
        assert len(SGR.sub("", line)) <= max(width - 1, 1)


def test_a_narrow_terminal_keeps_the_turns_and_the_forecast() -> None:
    first, second = progress.live_lines(TURNING, 40, plain=False, colour=False)
    assert "3 412 / 7 946 turns" in first
    assert "finish 7.946 ± 0.031 kohm" in second


def test_the_display_is_redrawn_in_place_and_remarks_stay_above_it() -> None:
    terminal = Terminal()
    face = progress.Live(terminal, colour=True)
    face.show(TURNING)
    face.say("held: the pedal was let go")
    face.show(replace(TURNING, phase="held", pace_rpm=0.0, turns=3500.0))
    face.close()
    screen = terminal.screen()
    assert screen[0] == "held: the pedal was let go"
    assert screen[1].startswith("‖ held")
    assert "3 500 / 7 946" in screen[1]
    assert screen[3:] == [""]


def test_an_unchanged_picture_writes_nothing() -> None:
    terminal = Terminal()
    face = progress.Live(terminal, colour=False)
    face.show(TURNING)
    once = terminal.getvalue()
    face.show(TURNING)
    assert terminal.getvalue() == once


def test_plain_lines_come_every_few_seconds_and_at_every_change_of_phase() -> None:
    now = [0.0]
    stream = Terminal()
    face = progress.PlainLines(stream, clock=lambda: now[0])
    for second in range(11):
        now[0] = float(second)
        face.show(TURNING)
    face.show(replace(TURNING, phase="held"))
    lines = stream.getvalue().splitlines()
    assert [line.partition(":")[0] for line in lines] == ["turning", "turning", "turning", "held"]
    assert not any("\x1b" in line or "\r" in line for line in lines)
    assert "finish 7.946 ± 0.031 kohm" in lines[0]


@pytest.mark.parametrize(
    ("terminal", "environ", "face"),
    [
        (True, {"TERM": "xterm"}, progress.Live),
        (True, {"TERM": "dumb"}, progress.PlainLines),
        (False, {"TERM": "xterm"}, progress.PlainLines),
    ],
)
def test_the_face_suits_the_stream(terminal: bool, environ: dict[str, str], face: type) -> None:
    stream = Terminal() if terminal else io.StringIO()
    assert type(progress.face_for(stream, quiet=False, environ=environ)) is face
    assert type(progress.face_for(stream, quiet=True, environ=environ)) is progress.Quiet


@pytest.mark.parametrize(("no_color", "coloured"), [("1", False), ("", True)])
def test_no_color_is_heeded_and_an_empty_one_is_unset(no_color: str, coloured: bool) -> None:
    terminal = Terminal()
    progress.face_for(terminal, quiet=False, environ={"TERM": "xterm", "NO_COLOR": no_color}).show(TURNING)
    assert ("\x1b[32m" in terminal.getvalue()) is coloured


class Broken(io.StringIO):
    """A pipe whose reader has gone."""

    def write(self, text: str) -> int:
        raise BrokenPipeError


@pytest.mark.parametrize(
    "face", [progress.PlainLines, progress.Quiet, lambda s: progress.Live(s, colour=False)]
)
def test_a_stream_that_is_gone_ends_the_picture_not_the_run(face: type) -> None:
    shown = face(Broken())
    shown.show(TURNING)
    shown.say("held")
    shown.close()


def test_signs_are_spelt_out_on_a_terminal_without_unicode() -> None:
    terminal = Terminal()
    terminal.encoding = "ascii"  # type: ignore[misc]  # StringIO has none of its own
    progress.Live(terminal, colour=False).show(TURNING)
    assert terminal.getvalue().isascii()
    assert "7.946 +- 0.031 kohm" in terminal.getvalue()
