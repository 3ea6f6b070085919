"""Looking at a board on which nothing is wound, and checking it when asked to.

`MachineLook` owns the port in a thread of its own. It only beats, listens and has the contact read: nothing
is powered by looking. A check-up runs when it is asked for; what powers a drive waits in it for a typed go.
A hold may be asked for from any thread at any time: it goes out in the round that sees it, and ends a check
with the drives off.
"""

from __future__ import annotations

import queue
import secrets
import threading
import time
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING

from windctl.checkup.checkup import Checkup
from windctl.checkup.plan import calibrations, chosen
from windctl.checkup.step import TYPED, Act, Question, Result
from windctl.desk.board_seen import BoardSeen, board_seen
from windctl.desk.checking import open_for_check
from windctl.desk.ordinary import ORDINARY
from windctl.errors import LinkLost, WindctlError
from windctl.protocol.conversation import Conversation
from windctl.protocol.messages import BoardMessage, Capability, Reading
from windctl.protocol.wants import Sampling, Wants
from windctl.recipe.load import parse_recipe

if TYPE_CHECKING:
    from windctl.desk.asked import Shared
    from windctl.desk.checking import CheckBench
    from windctl.machine.ports import Port
    from windctl.profile.model import MachineProfile

_LISTEN_S = 0.01
_EASY_S = 0.005  # a simulated machine without a pace is in no hurry while only looked at, or while asked
_SAMPLING = Sampling(200, 1)  # ticks: ten whole cycles of the mains at 50 Hz, twelve at 60
_HOLD_S = 0.5  # for how long a hold is wanted of a board that is only looked at
_LAST_S = 30.0  # for the drives to go off once a check is to end


@dataclass(frozen=True, slots=True)
class StepSeen:
    """One step of the check-up, as it is listed."""

    key: str
    title: str
    does: str
    powered: bool
    hand: bool


@dataclass(frozen=True, slots=True)
class Asked:
    """What a check asks of the person. `typed`: a line ends it, else what is seen on the board does."""

    text: str
    typed: bool
    consent: bool = False
    unit: str = ""


@dataclass(frozen=True, slots=True)
class Looked:
    """One moment. `link`: "opening", "live", "closed" or "lost", then `why` says more.

    `step` is the key of the step that runs; `results` those of the last check, `calibration` what it would
    change in the profile, by key.
    """

    link: str = "opening"
    why: str = ""
    board: BoardSeen | None = None
    checking: bool = False
    stopping: bool = False
    stopped: bool = False  # the last check was
    step: str = ""
    steps: tuple[StepSeen, ...] = ()
    results: tuple[Result, ...] = ()
    asked: Asked | None = None
    calibration: dict[str, float | int] = field(default_factory=dict)
    unconfirmed: bool = False  # a stop was asked for and the drives were not seen to go off

    @property
    def turning(self) -> bool:
        """The spindle turns, or has not come to rest yet."""
        return self.board is not None and (self.board.state == "turning" or not self.board.standing)


@dataclass(frozen=True, slots=True)
class _Wanted:
    keys: tuple[str, ...]
    powered: bool


def steps_seen(keys: tuple[str, ...] = (), *, powered: bool = True) -> tuple[StepSeen, ...]:
    """The steps of a check, in order."""
    return tuple(
        StepSeen(one.key, one.title, one.does, one.powered, one.hand) for one in chosen(keys, powered=powered)
    )


class MachineLook:
    """One board, looked at until `close`. All methods may be called from any thread."""

    def __init__(self, shared: Shared, profile: MachineProfile, simulated: bool) -> None:
        self._shared, self._profile, self._simulated = shared, profile, simulated
        self._looked = Looked(steps=steps_seen())
        self._wanted: queue.SimpleQueue[_Wanted] = queue.SimpleQueue()
        self._answers: queue.SimpleQueue[str | None] = queue.SimpleQueue()
        self._easy = False
        self._hold = threading.Event()
        self._closing = threading.Event()
        self._thread = threading.Thread(target=self._run, name="windctl-look", daemon=True)

    def start(self) -> None:
        """Open the port."""
        self._thread.start()

    def look(self) -> Looked:
        """The latest moment."""
        return self._looked

    def check(self, keys: tuple[str, ...] = (), *, powered: bool = True) -> None:
        """Begin a check of these steps, none: all. Passed over while one runs."""
        if not self._looked.checking:
            self._wanted.put(_Wanted(keys, powered))

    def answer(self, line: str) -> None:
        """The person's answer to what is typed."""
        self._answers.put(line)

    def leave_out(self) -> None:
        """The person passes over what is asked."""
        self._answers.put(None)

    def hold(self) -> None:
        """The spindle stands; a check ends with the drives off."""
        self._hold.set()

    def close(self, wait_s: float = _LAST_S + 5.0) -> bool:
        """End a check, take the drives off, give the port back. False where that was not seen."""
        self._closing.set()
        if self._thread.is_alive() and threading.current_thread() is not self._thread:
            self._thread.join(wait_s)
        return not (self._thread.is_alive() or self._looked.unconfirmed)

    # ------------------------------------------------------------ the thread

    def _run(self) -> None:
        speed = 1.0 if self._simulated and self._shared.speed is None else self._shared.speed
        try:
            recipe = parse_recipe(ORDINARY, "ordinary coil")
            shared = replace(self._shared, speed=speed)
            with open_for_check(shared, self._profile, self._simulated, recipe, None) as bench:
                self._easy = self._simulated and not speed
                while not self._closing.is_set():
                    self._look_on(bench.port)
                    if self._closing.is_set():
                        break
                    self._check(bench)
        except WindctlError as error:
            self._say(
                link="lost" if isinstance(error, LinkLost) else "closed",
                why=str(error),
                asked=None,
                unconfirmed=self._looked.checking,
                checking=False,
            )
        else:
            self._say(link="closed", asked=None, checking=False)

    def _look_on(self, port: Port) -> None:
        """Until a check is asked for, or the end. The conversation begins with a greeting."""
        talk = Conversation(lambda: secrets.randbits(32))
        reading: Reading | None = None
        held_at: float | None = None
        while not self._closing.is_set() and self._wanted.empty():
            now = port.now()
            reading = _latest(talk.receive(port.read(_LISTEN_S), now), reading)
            if self._hold.is_set():
                self._hold.clear()
                held_at = now
            holding = held_at is not None and now - held_at < _HOLD_S
            contact = bool(talk.board.capabilities & Capability.CONTACT)
            wants = Wants(beat=True, hold=holding, sampling=_SAMPLING if contact else None)
            port.write(talk.advance(wants, port.now()))
            self._show(board_seen(talk.board, reading, self._profile))
            self._rest()

    def _check(self, bench: CheckBench) -> None:
        """One check, to its end."""
        wanted = self._wanted.get()
        port, hand = bench.port, bench.hand
        steps = chosen(wanted.keys, powered=wanted.powered)
        checkup = Checkup(self._profile, steps, lambda: secrets.randbits(32))
        while not self._answers.empty():
            self._answers.get()
        self._say(
            checking=True, stopping=False, stopped=False, results=(), calibration={}, unconfirmed=False,
            steps=steps_seen(wanted.keys, powered=wanted.powered),
        )  # fmt: skip
        reading: Reading | None = None
        put: Question | None = None
        stopped_at: float | None = None
        while not checkup.done:
            if stopped_at is None and (self._hold.is_set() or self._closing.is_set()):
                stopped_at = port.now()
                self._hold.clear()
                checkup.stop()
            reading = _latest(checkup.receive(port.read(_LISTEN_S), port.now()), reading)
            port.write(checkup.advance(port.now()))
            if checkup.question is not put:
                put = checkup.question
                if put is not None and hand is not None and put.act is not Act.CONSENT:
                    answer = hand.does(put)
                    if put.act in TYPED:
                        checkup.answer(answer)
            self._pass_on(checkup, put)
            asked = None if hand is not None and put is not None and put.act is not Act.CONSENT else put
            self._show(
                board_seen(checkup.board, reading, self._profile),
                step="" if checkup.step is None else checkup.step.key,
                results=tuple(checkup.results),
                asked=None if asked is None or stopped_at is not None else _asked(asked),
                stopping=stopped_at is not None,
            )
            if asked is not None:
                self._rest()
            if stopped_at is not None and port.now() - stopped_at > _LAST_S:
                break
        results = tuple(checkup.results)
        self._say(
            checking=False, stopping=False, stopped=stopped_at is not None, step="", asked=None,
            results=results, calibration=calibrations(results), unconfirmed=not checkup.done,
        )  # fmt: skip

    def _pass_on(self, checkup: Checkup, question: Question | None) -> None:
        """What the person said, to the question that stands; what came too early or too late is dropped."""
        while not self._answers.empty():
            line = self._answers.get()
            if question is None:
                continue
            if line is None:
                checkup.leave_out()
            elif question.act in TYPED:
                checkup.answer(line)

    def _show(self, board: BoardSeen | None, **more: object) -> None:
        link = "live" if board is not None else self._looked.link
        self._say(link=link, board=board if board is not None else self._looked.board, **more)

    def _say(self, **what: object) -> None:
        self._looked = replace(self._looked, **what)  # type: ignore[arg-type]  # by name, each of its own kind

    def _rest(self) -> None:
        if self._easy:
            time.sleep(_EASY_S)


def _latest(came: list[BoardMessage], before: Reading | None) -> Reading | None:
    return next((one for one in reversed(came) if isinstance(one, Reading)), before)


def _asked(question: Question) -> Asked:
    return Asked(question.text, question.act in TYPED, question.act is Act.CONSENT, question.unit)
