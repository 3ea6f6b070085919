"""The contact is zeroed by words at the terminal."""

from __future__ import annotations

import time
from collections.abc import Callable
from pathlib import Path

from tests.run.winding import SHIPPED, here, order, with_stop
from windctl.book.open import open_book
from windctl.cli.progress import plain_line
from windctl.cli.questions import Questions
from windctl.desk.simulated_leads import SimulatedLeads
from windctl.machine.virtual.bench import virtual_bench
from windctl.machine.virtual.port import VirtualPort
from windctl.paper.told import story
from windctl.profile.builtin import VIRTUAL
from windctl.protocol.messages import Capability
from windctl.record.events import DENSE, ContactZeroed, ZeroEnded
from windctl.run.requests import Hold
from windctl.run.wind import begin


class Typed:
    """Lines that somebody types, each when its time has come."""

    def __init__(self) -> None:
        self.lines: list[str] = []

    def open_question(self) -> None:
        pass

    def answer(self) -> str | None:
        return self.lines.pop(0) if self.lines else None


class Face:
    """Keeps what is said."""

    def __init__(self) -> None:
        self.said = ""

    def show(self, snapshot: object) -> None:
        pass

    def say(self, text: str) -> None:
        self.said += f"{text}\n"

    def close(self) -> None:
        pass


def test_zero_together_and_go_are_typed_and_each_answer_is_said(tmp_path: Path) -> None:
    recipe, wanted = order(with_stop(SHIPPED, turns=30, tolerance_pct=2))
    bench = virtual_bench(recipe, VIRTUAL, 1)
    bench.board.capabilities &= ~int(Capability.VIRTUAL)  # taken for a real one: nothing goes by itself
    port, typed, face = VirtualPort(bench), Typed(), Face()
    with open_book(tmp_path / "coils.book") as book:
        winding = begin(wanted, book, port, here())
        questions = Questions(winding, face, typed, None, SimulatedLeads(port.connect))  # type: ignore[arg-type]  # as a prompt
        winding.start()

        def until(what: Callable[[], bool]) -> None:
            end = time.monotonic() + 30
            while not what():
                assert time.monotonic() < end, face.said
                questions.consider(winding.look())
                time.sleep(0.002)

        try:
            until(lambda: "Type go and Enter to start" in face.said)
            typed.lines.append("together")
            until(lambda: "nobody waits for the contact's leads" in face.said)
            typed.lines.append("zero")
            until(lambda: "Type together and Enter once they are" in face.said)
            assert "put the contact and the meter's other lead together" in face.said
            until(
                lambda: "contact: 1." in plain_line(winding.look())
            )  # with the wire to the contact: 0.8 ohm
            typed.lines.append("skip")
            until(lambda: face.said.count("Type go and Enter to start") == 2)
            typed.lines.append("zero")
            until(lambda: face.said.count("Type together and Enter once they are") == 2)
            typed.lines.append("together")
            until(lambda: "taken off from now on; the profile says 0.50 ± 0.59 ohm" in face.said)
            assert "put the contact back on the wire, then go." in face.said
            typed.lines.append("go")
            until(lambda: winding.wait(0.0) is not None)
        finally:
            winding.request(Hold("a test", "over", leave=True))
            outcome = winding.close()
        rare = [event for event in book.events(outcome.number) if not isinstance(event, DENSE)]
    assert outcome.summary.turns == 30
    assert [type(event) for event in rare if isinstance(event, ContactZeroed | ZeroEnded)] == [
        ZeroEnded,
        ContactZeroed,
    ]
    told = [line.what for line in story(rare, 400)]
    assert any(line.startswith("Zeroed: leads and contact had") for line in told)
