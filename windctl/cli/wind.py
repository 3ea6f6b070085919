"""`windctl wind` and `windctl resume`: one coil, from its recipe or from where it was left."""

from __future__ import annotations

import sys
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from windctl.cli import present, typed
from windctl.cli.exit_codes import ExitCode, code_for, code_for_coil
from windctl.cli.options import Shared, takes
from windctl.cli.plan import show_plan
from windctl.desk.books import book_to_read, book_to_write
from windctl.desk.going_on import open_coil, recorded_profile
from windctl.desk.machines import NO_BOARD, profile_of, simulated_here
from windctl.errors import RecipeError, RecordBroken, UsageError, WindctlError

if TYPE_CHECKING:
    from windctl.desk.bench import Bench
    from windctl.plan.model import Plan
    from windctl.profile.model import MachineProfile
    from windctl.recipe.model import Recipe
    from windctl.run.outcome import Outcome
    from windctl.run.wind import Winding


@click.command(short_help="Wind a coil.")
@click.argument("recipe", type=click.Path(path_type=Path))
@takes(
    "machine",
    "port",
    "speed",
    "plant_seed",
    "readings",
    "spool",
    "book",
    "batch",
    "of",
    "dry_run",
    "json",
    "quiet",
    "no_input",
)
def wind(shared: Shared, recipe: Path) -> ExitCode:
    """Wind the coil of RECIPE, measure it, stop at its target, and keep the record.

    On a real machine nothing turns before a typed go or a press of the pedal. Ctrl-C holds the spindle
    and leaves the coil open, for `windctl resume`. It is no emergency stop: use the hardware stop.
    """
    from windctl.desk.bench import open_bench
    from windctl.desk.supply import supply_of
    from windctl.forms.source import read_text
    from windctl.plan.make import make_plan
    from windctl.recipe.load import parse_recipe
    from windctl.run.wind import Order, begin

    if shared.of is not None and shared.batch is None:
        raise click.UsageError("--of says how many coils a batch is to have: name the batch with --batch.")
    text = read_text(recipe, RecipeError)
    wanted, profile = parse_recipe(text, str(recipe)), profile_of(shared)
    if shared.dry_run:  # which needs no port either
        return _dry_run(shared, make_plan(wanted, profile, supply=supply_of(shared, profile, wanted)), wanted)
    simulated = simulated_here(shared, profile)
    supply = supply_of(shared, profile, wanted, simulated=simulated)
    plan = make_plan(wanted, profile, supply=supply)
    _somebody_types(shared, profile)
    _before(shared, plan)
    with (
        open_bench(shared, profile, simulated, wanted, supply=supply) as bench,
        book_to_write(shared) as book,
    ):
        order = Order(
            recipe=wanted,
            recipe_text=text,
            plan=plan,
            profile=bench.profile,
            machine=bench.name,
            batch=shared.batch or "",
            of=shared.of or 0,
        )
        return _stand_by(shared, begin(order, book, bench.port, bench.here), bench, wanted)


@click.command(short_help="Go on after an interruption.")
@click.argument("coil", required=False)
@takes("at_turn", "machine", "port", "speed", "plant_seed", "book", "dry_run", "json", "quiet", "no_input")
def resume(shared: Shared, coil: str | None) -> ExitCode:
    """Go on with COIL after an interruption; without COIL, with the one that this bench left open.

    The board is asked where the coil stands. Where it no longer knows, count the turns and give --at-turn.
    """
    from windctl.desk.bench import open_bench
    from windctl.recipe.load import parse_recipe
    from windctl.record.events import CoilStarted
    from windctl.run.wind import go_on

    with book_to_read(shared) as book:
        head = open_coil(book, coil, None if shared.machine is None else profile_of(shared).bench)
        started = next(iter(book.events(head.number)))
    if not isinstance(started, CoilStarted):
        raise RecordBroken(f"the record of coil {head.number} does not begin with its start")
    profile = recorded_profile(shared, started)
    simulated = simulated_here(shared, profile)
    if shared.dry_run:
        where = "on the simulated machine" if simulated else f"on {profile.port.url}"
        where = "with turns read off its counter by eye" if profile.by_eye else where
        present.result(f"would go on with {head.number} ({head.recipe}) {where}; nothing was moved")
        return ExitCode.DONE
    _somebody_types(shared, profile)
    recipe = parse_recipe(started.recipe_text, head.number)
    with open_bench(shared, profile, simulated, recipe, started) as bench, book_to_write(shared) as book:
        winding = go_on(head.number, book, bench.port, bench.here, shared.at_turn)
        return _stand_by(shared, winding, bench, recipe)


def _dry_run(shared: Shared, plan: Plan, recipe: Recipe) -> ExitCode:
    """The plan, with nothing connected, moved or recorded."""
    if shared.json:
        present.result_json(plan.as_json())
    else:
        show_plan(plan, recipe)
        present.result("nothing was moved or recorded")
    return ExitCode.DONE


def _somebody_types(shared: Shared, profile: MachineProfile) -> None:
    """Where nobody counts, a coil is no use without somebody who types. Raises UsageError."""
    if profile.by_eye and not typed.may_ask(shared.no_input):
        raise UsageError(
            f"{NO_BOARD}: its turns are typed at a terminal, so --no-input and input that is no terminal are "
            "refused; nothing was begun"
        )


def _before(shared: Shared, plan: Plan) -> None:
    """What should be known before the first turn."""
    for warning in plan.warnings:
        present.message(f"caution: {warning}")
    if not shared.quiet:
        goal = f"{present.turns(plan.turns)}, {present.ohm(plan.dcr_20c_ohm)} at 20 °C"
        present.message(f"{plan.recipe_name}: {goal}, {present.duration(plan.duration_s)} of winding")


def _stand_by(shared: Shared, winding: Winding, bench: Bench, recipe: Recipe) -> ExitCode:
    """Watch the run to its end, tell how it went, and with which code."""
    from windctl.cli.progress import face_for
    from windctl.cli.prompt import Prompt
    from windctl.cli.watch import deaf, stand_by
    from windctl.desk.log import faults_of_threads, note
    from windctl.desk.simulated_leads import SimulatedLeads

    bench.name_coil(winding.number)
    if not shared.quiet:
        present.message(f"coil {winding.number} on {bench.name}")
    prompt = Prompt(sys.stdin.fileno()) if typed.may_ask(shared.no_input) else None
    leads = None if bench.connect is None else SimulatedLeads(bench.connect)
    stuck: WindctlError | None = None
    with faults_of_threads() as faults, deaf():
        try:
            stand_by(winding, face_for(sys.stderr, quiet=shared.quiet), prompt, bench.hand, leads)
        except WindctlError as error:  # nobody to ask: told once it is known how the coil was left
            stuck = error
        finally:
            outcome = winding.close()
    answer = outcome.as_json()
    note(f"coil {outcome.number}: {answer['outcome']}, {answer['reason']}")
    if bench.truth is not None:
        truth = bench.truth()
        answer["plant"] = {
            "true_turns": truth.true_turns,
            "true_dcr_20c_ohm": truth.true_dcr_20c_ohm,
        }
    if shared.json:
        present.result_json(answer)
    else:
        _show(outcome, answer, recipe.stop.tolerance_pct)
    if faults:
        present.message(f"The log has the details: {faults[0]}")
    if stuck is not None and outcome.error is None:
        raise stuck
    return _ending(outcome, bench)


def _show(outcome: Outcome, answer: dict[str, Any], tolerance_pct: float) -> None:
    """How it went, for people."""
    summary = outcome.summary
    rows = [("coil", outcome.number), ("outcome", f"{summary.outcome}: {answer['reason']}")]
    if summary.turns is not None:
        rows.append(("turns", present.turns(summary.turns)))
    if summary.dcr_20c_ohm:
        rows.append(("resistance", f"{present.ohm(summary.dcr_20c_ohm, summary.dcr_u95_ohm or 0)} at 20 °C"))
    aim = present.turns if summary.target_kind == "turns" else present.ohm
    target = f"{aim(summary.target_value)}, give or take {tolerance_pct:g} %"
    rows.append(("target", f"{target}: {summary.verdict}"))
    if outcome.record_digest:
        rows.append(("record", present.short_digest(outcome.record_digest)))
    if "plant" in answer:
        truth = answer["plant"]
        really = f"{present.turns(truth['true_turns'])}, {present.ohm(truth['true_dcr_20c_ohm'])} at 20 °C"
        rows.append(("simulated", f"really {really}"))
    present.pairs(rows)
    if summary.target_kind != "turns" and summary.outcome == "finished" and summary.verdict != "within":
        _show_waiting(outcome)


def _show_waiting(outcome: Outcome) -> None:
    """A cold coil is known better: when to read it again, what it should read, and where to keep that."""
    again = outcome.waiting
    if again is None:
        return
    reads = f"{present.ohm(again.ohm)} at {again.celsius:.1f} °C, leads included"
    known = f"±{present.ohm(again.then_u95)} instead of ±{present.ohm(again.now_u95)}"
    wait = present.counted(again.minutes, "minute")
    present.result(
        f"still warm: wait {wait} and read again at its ends; cold it should read {reads}: {known}"
    )
    present.result(f"keep the reading: windctl coils measure {outcome.number} --ohm OHM --celsius C")


def _ending(outcome: Outcome, bench: Bench) -> ExitCode:
    """The exit code, and what to do next where the coil is not finished."""
    go_on = f"windctl resume {outcome.number}"
    match outcome.left:
        case "finished":
            return code_for_coil(outcome.summary.outcome, outcome.summary.verdict)
        case "held":
            stands = "Stop your own motor" if bench.profile.by_eye else "The spindle stands"
            present.message(f"{stands}, the coil stays open: {go_on}")
            return ExitCode.INTERRUPTED
        case "turn wanted" if bench.truth is not None and outcome.summary.turns is not None:
            turn = f"{outcome.summary.turns:.2f}".rstrip("0").rstrip(".")
            raise UsageError(
                "the simulated machine and its count ended with the command that wound; its coil is where "
                f"the record ends: {go_on} --at-turn {turn}"
            )
        case "turn wanted":
            raise UsageError(f"{outcome.why}. Count the turns and say: {go_on} --at-turn N")
        case "unconfirmed":
            present.message("THE STOP IS NOT CONFIRMED: use the hardware stop.")
    present.message(f"{outcome.why}\nWhat was wound is in the record: {go_on}")
    return code_for(outcome.error) if outcome.error is not None else ExitCode.FAILED
