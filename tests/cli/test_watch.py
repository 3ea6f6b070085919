"""Standing by while a run goes on: signals become one hold, and consent is typed."""

from __future__ import annotations

import os
import signal
import threading
import time
from collections.abc import Callable, Iterator
from dataclasses import replace

import pytest

from tests.cli.test_progress import TURNING
from windctl.cli import watch
from windctl.cli.prompt import Prompt
from windctl.cli.questions import CAUTIONS
from windctl.errors import RunFailed, UsageError
from windctl.record.fold import start
from windctl.run.requests import Clear, End, Go, Hold, Request
from windctl.run.runner import Ended
from windctl.run.snapshot import Snapshot


class Script:
    """A run that shows one snapshot after another, and ends when it is told to leave or has no more."""

    def __init__(self, snapshots: list[Snapshot], react: Callable[[int], None] = lambda _: None) -> None:
        self.snapshots = snapshots
        self.react = react
        self.requests: list[Request] = []
        self.looks = 0

    def start(self) -> None:
        self.react(-1)

    def request(self, request: Request) -> None:
        self.requests.append(request)

    def look(self) -> Snapshot:
        shown = self.snapshots[min(self.looks, len(self.snapshots) - 1)]
        self.react(self.looks)
        self.looks += 1
        return shown

    def wait(self, timeout_s: float) -> Ended | None:
        time.sleep(0.01)
        leaving = any(isinstance(one, Hold | End) for one in self.requests)
        over = leaving or self.looks >= len(self.snapshots)
        return Ended(start(), "held" if leaving else "finished", "") if over else None


class Said:
    """A face that remembers."""

    def __init__(self) -> None:
        self.lines: list[str] = []
        self.closed = False

    def show(self, snapshot: Snapshot) -> None:
        pass

    def say(self, text: str) -> None:
        self.lines.append(text)

    def close(self) -> None:
        self.closed = True


REAL = replace(TURNING, virtual=False, phase="setting up", turns=0.0, says="waits for go", asks="go")
ASKS_NOTHING = replace(REAL, phase="turning", asks=None)


@pytest.mark.parametrize("name", ["SIGINT", "SIGTERM", "SIGHUP"])
def test_a_signal_becomes_one_hold_and_a_second_one_none(name: str) -> None:
    number = getattr(signal, name)
    before = signal.getsignal(number)

    def strike(look: int) -> None:
        if look == 3:
            os.kill(os.getpid(), number)
            os.kill(os.getpid(), number)

    run, face = Script([TURNING] * 50, strike), Said()
    ended = watch.stand_by(run, face, None)
    assert run.requests == [Hold("operator", f"interrupted by {name}", leave=True)]
    assert ended.left == "held"
    assert face.closed
    assert signal.getsignal(number) is before


def test_a_second_signal_while_the_hold_is_on_its_way_is_told_so() -> None:
    class Slow(Script):
        def wait(self, timeout_s: float) -> Ended | None:
            time.sleep(0.01)
            return Ended(start(), "held", "") if self.looks > 20 else None

    def strike(look: int) -> None:
        if look in (3, 6):
            os.kill(os.getpid(), signal.SIGINT)

    run, face = Slow([TURNING] * 50, strike), Said()
    watch.stand_by(run, face, None)
    assert len(run.requests) == 1
    assert face.lines == ["Ctrl-C: holding", "already stopping; if it does not stop, use the hardware stop"]


@pytest.fixture
def keyboard() -> Iterator[tuple[Prompt, Callable[[str], None]]]:
    """A prompt, and a way to type at it."""
    read_end, write_end = os.pipe()
    yield Prompt(read_end), lambda text: (os.write(write_end, text.encode()), None)[1]
    os.close(write_end)
    time.sleep(0.05)  # the reader sees the end and leaves
    os.close(read_end)


Keyboard = tuple[Prompt, Callable[[str], None]]


def test_a_real_machine_gets_its_go_only_from_a_typed_go_after_the_cautions(keyboard: Keyboard) -> None:
    prompt, type_in = keyboard
    said_when_typed: list[str] = []

    def typing(look: int) -> None:
        if look == 5:
            type_in("yes\n\n")
        if look == 10:
            said_when_typed.extend(face.lines)
            type_in("  GO \n")

    face = Said()
    run = Script([REAL] * 20 + [ASKS_NOTHING] * 5, typing)
    watch.stand_by(run, face, prompt)
    assert run.requests == [Go("operator")]
    assert said_when_typed[0] == CAUTIONS
    assert "eye protection" in CAUTIONS
    assert "hardware stop" in CAUTIONS
    assert "Type go" in said_when_typed[1]


def test_what_was_typed_before_the_question_starts_nothing(keyboard: Keyboard) -> None:
    prompt, type_in = keyboard

    def typing(look: int) -> None:
        if look == 12:
            type_in("go\n")

    running = [ASKS_NOTHING] * 20
    run = Script([*[REAL] * 4, *running, *[REAL] * 20], typing)
    watch.stand_by(run, Said(), prompt)
    assert run.requests == []


@pytest.mark.parametrize("line", ["", "hold", "stop", "STOP!!", "end", "off", "splice 900", "noet kinked"])
def test_any_line_holds_a_turning_spindle(keyboard: Keyboard, line: str) -> None:
    """Whoever types in a hurry means stop, whatever the fingers made of it."""
    prompt, type_in = keyboard

    def typing(look: int) -> None:
        if look == 5:
            type_in(f"{line}\n")

    run, face = Script([TURNING] * 50, typing), Said()
    watch.stand_by(run, face, prompt)
    assert run.requests == [Hold("operator", "held at the keyboard")]
    told = [text for text in face.lines if text.endswith("holding.")]
    assert len(told) == (line not in ("", "hold"))


@pytest.mark.parametrize("line", ["slower", "note kinked", "go", "help"])
def test_words_for_a_turning_spindle_do_not_hold_it(keyboard: Keyboard, line: str) -> None:
    prompt, type_in = keyboard

    def typing(look: int) -> None:
        if look == 5:
            type_in(f"{line}\n")

    run = Script([TURNING] * 30, typing)
    watch.stand_by(run, Said(), prompt)
    assert not any(isinstance(one, Hold | End) for one in run.requests)


def test_held_in_mid_coil_the_operator_may_end_it(keyboard: Keyboard) -> None:
    prompt, type_in = keyboard

    def typing(look: int) -> None:
        if look == 5:
            type_in("end\n")

    run = Script([replace(REAL, turns=812.0, phase="held")] * 40, typing)
    watch.stand_by(run, Said(), prompt)
    assert run.requests == [End("operator", "ended by the operator")]


def test_before_the_first_turn_there_is_nothing_to_end(keyboard: Keyboard) -> None:
    prompt, type_in = keyboard

    def typing(look: int) -> None:
        if look == 5:
            type_in("end\n")

    run = Script([REAL] * 20, typing)
    watch.stand_by(run, Said(), prompt)
    assert run.requests == []


def test_a_trip_found_at_the_start_is_cleared_only_by_its_own_word(keyboard: Keyboard) -> None:
    prompt, type_in = keyboard

    def typing(look: int) -> None:
        if look == 5:
            type_in("go\n")
        if look == 10:
            type_in("clear\n")

    run = Script([replace(REAL, asks="clear", says="the board is tripped (guard)")] * 20, typing)
    watch.stand_by(run, Said(), prompt)
    assert run.requests == [Clear("operator")]


def test_where_nobody_can_be_asked_a_real_machine_never_starts() -> None:
    run = Script([REAL] * 20)
    with pytest.raises(UsageError, match="nothing was started"):
        watch.stand_by(run, Said(), None)
    assert run.requests == [End("windctl", "nobody to ask")]


def test_where_nobody_can_be_asked_a_coil_with_turns_is_left_open() -> None:
    run = Script([replace(TURNING, asks="go", phase="held", says="held: silence")] * 20)
    with pytest.raises(RunFailed, match="held: silence"):
        watch.stand_by(run, Said(), None)
    assert run.requests == [Hold("windctl", "nobody to ask", leave=True)]


def test_a_fault_of_the_display_holds_the_machine_before_it_is_told() -> None:
    class Faulty(Said):
        def show(self, snapshot: Snapshot) -> None:
            raise ZeroDivisionError

    run, face = Script([TURNING] * 50), Faulty()
    with pytest.raises(ZeroDivisionError):
        watch.stand_by(run, face, None)
    assert [type(one) for one in run.requests] == [Hold]
    assert face.closed


def test_outside_the_main_thread_it_works_without_handlers() -> None:
    ended: list[Ended] = []
    thread = threading.Thread(
        target=lambda: ended.append(watch.stand_by(Script([TURNING] * 3), Said(), None))
    )
    thread.start()
    thread.join(10)
    assert [one.left for one in ended] == ["finished"]
