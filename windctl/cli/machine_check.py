"""`windctl machine check`: a board and its machine, step by step, from the greeting to a stop that works."""

from __future__ import annotations

import secrets
import sys
from pathlib import Path
from types import FrameType
from typing import TYPE_CHECKING

import click

from windctl.cli import present, typed
from windctl.cli.exit_codes import ExitCode
from windctl.cli.options import Shared, takes
from windctl.cli.watch import listening
from windctl.desk.machines import NO_BOARD, profile_file, profile_of, simulated_here
from windctl.errors import UsageError

if TYPE_CHECKING:
    from windctl.checkup.checkup import Checkup
    from windctl.checkup.step import Question, Result
    from windctl.cli.prompt import Prompt
    from windctl.desk.checking import CheckBench
    from windctl.desk.simulated_hand import SimulatedHand
    from windctl.machine.ports import Port

_LISTEN_S = 0.01
_LAST_S = 30.0  # for the drives to go off after an interruption


@click.command("check", short_help="Try a board and its machine step by step.")
@click.option("--step", "steps", multiple=True, metavar="STEP", help="Only this step; may be repeated.")
@click.option("--still", is_flag=True, help="Only the steps that power no drive.")
@click.option(
    "--reference",
    metavar="OHM",
    callback=typed.ohm_option,
    help="The value of the resistor that the contact is tried with; else it is asked for.",
)
@click.option("--save", is_flag=True, help="Write what was calibrated into the machine's profile.")
@click.option("--list", "only_list", is_flag=True, help="The steps and what each does; nothing is opened.")
@takes("machine", "port", "speed", "plant_seed", "json", "quiet", "no_input")
def check(
    shared: Shared,
    steps: tuple[str, ...],
    still: bool,
    reference: float | None,
    save: bool,
    only_list: bool,
) -> ExitCode:
    """Try a board and its machine: greeting, line, limits, inputs, counter, contact, stops, index, guide.

    The drives stay off until you have typed go. No wire and no bobbin on the machine. Ctrl-C holds the
    spindle and takes the drives off. It is no emergency stop: use the hardware stop.
    """
    from windctl.checkup.plan import STEPS

    if only_list:
        rows = [
            [one.key, "powered" if one.powered else "", "hand" if one.hand else "", one.does] for one in STEPS
        ]
        present.table(["step", "drives", "hand", "what it does"], rows)
        return ExitCode.DONE
    unknown = set(steps) - {one.key for one in STEPS}
    if unknown:
        known = ", ".join(one.key for one in STEPS)
        raise click.BadParameter(
            f"no such step: {', '.join(sorted(unknown))}; there are {known}", param_hint="--step"
        )
    return _check(shared, steps, still, reference, profile_file(shared) if save else None, save)


def _check(
    shared: Shared,
    steps: tuple[str, ...],
    still: bool,
    reference: float | None,
    file: Path | None,
    save: bool,
) -> ExitCode:
    from windctl.checkup.checkup import Checkup
    from windctl.checkup.plan import as_json, calibrations, chosen
    from windctl.checkup.step import Verdict
    from windctl.cli.prompt import Prompt
    from windctl.desk.checking import open_for_check, save_calibration
    from windctl.desk.ordinary import ORDINARY
    from windctl.recipe.load import parse_recipe

    if save and file is None:
        raise UsageError("--save: the built-in machine has no profile file to write into")
    profile = profile_of(shared)
    simulated = simulated_here(shared, profile)
    if profile.by_eye:
        if shared.json:
            present.result_json(as_json([]))
        present.message(f"nothing to check: {NO_BOARD}")
        return ExitCode.DONE
    someone = simulated or typed.may_ask(shared.no_input)
    if not someone and not still:
        raise UsageError("nobody can be asked: a real machine is only tried with --still then")
    prompt = Prompt(sys.stdin.fileno()) if someone and not simulated else None
    wanted = chosen(steps, powered=not still, hands=someone)
    with open_for_check(
        shared, profile, simulated, parse_recipe(ORDINARY, "ordinary coil"), reference
    ) as bench:
        checkup = Checkup(profile, wanted, lambda: secrets.randbits(32), reference_ohm=reference)
        stopped = _Driver(checkup, bench, prompt, quiet=shared.quiet).run()
    results, found = checkup.results, calibrations(checkup.results)
    if shared.json:
        present.result_json(as_json(results))
    else:
        # At a terminal each step has just been told there; a table would say it all again.
        _show(results, told=not shared.quiet and sys.stdout.isatty() and sys.stderr.isatty())
        if found and not save:
            present.message(
                "calibration, kept with --save: "
                + ", ".join(f"{key} = {value}" for key, value in found.items())
            )
    if save and file is not None and found and not stopped:
        save_calibration(file, found)
        present.message(f"written into {file}: {', '.join(found)}")
    if stopped:
        return ExitCode.INTERRUPTED
    return ExitCode.FAILED if any(one.verdict is Verdict.FAULT for one in results) else ExitCode.DONE


class _Driver:
    """Carries bytes between port and check-up, and questions between it and whoever stands there."""

    def __init__(self, checkup: Checkup, bench: CheckBench, prompt: Prompt | None, *, quiet: bool) -> None:
        self._checkup = checkup
        self._port = bench.port
        self._hand: SimulatedHand | None = bench.hand
        self._prompt = prompt
        self._quiet = quiet
        self._put: Question | None = None
        self._told = 0
        self._stopping = False
        self._stopped_at: float | None = None

    def run(self) -> bool:
        """To the end; True if it was interrupted. Ctrl-C holds, and a second one never overtakes that."""
        checkup, port = self._checkup, self._port
        with listening(self._heard):
            self._loop(checkup, port)
        self._tell()
        return self._stopped_at is not None

    def _heard(self, _number: int, _frame: FrameType | None) -> None:
        """The handler of signals: asks for the stop, nothing else."""
        if not self._stopping:
            self._stopping = True
            self._checkup.stop()

    def _loop(self, checkup: Checkup, port: Port) -> None:
        while not checkup.done:
            checkup.receive(port.read(_LISTEN_S), port.now())
            port.write(checkup.advance(port.now()))
            self._consider()
            self._tell()
            if self._stopping and self._stopped_at is None:
                self._stopped_at = port.now()
                present.message("stopping; if it does not stop, use the hardware stop")
            if self._stopped_at is not None and port.now() - self._stopped_at > _LAST_S:
                present.message("THE STOP IS NOT CONFIRMED: use the hardware stop.")
                return

    def _consider(self) -> None:
        question = self._checkup.question
        if question is not self._put:
            self._put = question
            if question is not None:
                self._ask(question)
        elif question is not None and self._prompt is not None:
            line = self._prompt.answer()
            if line is not None:
                self._typed(line, question)

    def _ask(self, question: Question) -> None:
        from windctl.checkup.step import TYPED

        if self._hand is not None:
            answer = self._hand.does(question)
            if question.act in TYPED:
                self._checkup.answer(answer)
        elif self._prompt is None:
            self._checkup.leave_out()
        else:
            unit = f" ({question.unit})" if question.unit else ""
            present.message(f"{question.text}{unit}  [s and Enter: leave it out]")
            self._prompt.open_question()

    def _typed(self, line: str, question: Question) -> None:
        from windctl.checkup.step import TYPED

        if line.lower() == "s":
            self._checkup.leave_out()
        elif question.act in TYPED:
            self._checkup.answer(line)

    def _tell(self) -> None:
        from windctl.checkup.step import Verdict

        for result in self._checkup.results[self._told :]:
            if not self._quiet:
                limit = (
                    f" (limit: {result.limit})" if result.verdict is Verdict.FAULT and result.limit else ""
                )
                present.message(f"{result.verdict.value:<10}  {result.title}: {result.measured}{limit}")
        self._told = len(self._checkup.results)


def _show(results: list[Result], *, told: bool) -> None:
    if not told:
        present.table(
            ["step", "verdict", "measured", "limit"],
            [[one.title, one.verdict.value, one.measured, one.limit] for one in results],
        )
    for one in results:
        if one.advice:
            present.result(f"{one.title}: {one.advice}")
