"""Drives a check-up of a simulated machine, with a hand that does what is asked."""

from __future__ import annotations

import itertools
from collections.abc import Callable, Sequence
from typing import Any

from windctl.checkup.checkup import Checkup
from windctl.checkup.plan import chosen
from windctl.checkup.step import TYPED, Act, Question, Result, Step
from windctl.desk.ordinary import ORDINARY
from windctl.desk.simulated_hand import SimulatedHand
from windctl.machine.plant.faults import Faults
from windctl.machine.virtual.bench import Bench, virtual_bench
from windctl.machine.virtual.port import VirtualPort
from windctl.profile.builtin import VIRTUAL
from windctl.profile.model import MachineProfile
from windctl.recipe.load import parse_recipe

MOST_S = 400.0  # simulated


def profile(**tables: dict[str, Any]) -> MachineProfile:
    """The built-in machine with other values."""
    content = VIRTUAL.model_dump()
    for table, values in tables.items():
        content[table] = {**content[table], **values} if isinstance(values, dict) else values
    return MachineProfile.model_validate(content)


def bench_for(machine: MachineProfile = VIRTUAL, *, faults: Faults | None = None) -> Bench:
    """The machine as it really is."""
    return virtual_bench(parse_recipe(ORDINARY, "ordinary coil"), machine, 1, faults=faults)


def drive(
    bench: Bench,
    said: MachineProfile = VIRTUAL,
    steps: Sequence[Step] | None = None,
    *,
    hand: SimulatedHand | None = None,
    answers: dict[Act, str | None] | None = None,
    each: Callable[[Checkup, VirtualPort], None] | None = None,
    reference_ohm: float | None = None,
) -> dict[str, Result]:
    """Results by step. `said` is what the profile says; an answer None leaves the question out."""
    port = VirtualPort(bench)
    hand = hand or SimulatedHand(bench.plant)
    checkup = Checkup(said, steps or chosen(), itertools.count(7), reference_ohm=reference_ohm)
    put: Question | None = None
    while not checkup.done:
        assert port.now() < MOST_S, f"stuck in {checkup.step}"
        checkup.receive(port.read(0.01), port.now())
        port.write(checkup.advance(port.now()))
        if each is not None:
            each(checkup, port)
        question = checkup.question
        if question is put:
            continue
        put = question
        if question is None:
            continue
        if answers is not None and question.act in answers:
            answer = answers[question.act]
            if answer is None:
                checkup.leave_out()
            else:
                checkup.answer(answer)
            continue
        done = hand.does(question)
        if question.act in TYPED:
            checkup.answer(done)
    return {one.key: one for one in checkup.results}
