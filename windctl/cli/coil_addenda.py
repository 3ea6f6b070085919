"""`windctl coils note`, `measure`, `withdraw`: what is said of a coil after its record was closed."""

from __future__ import annotations

from datetime import datetime
from math import hypot
from typing import TYPE_CHECKING, Any

import click

from windctl.cli import present, typed
from windctl.cli.options import Shared, takes
from windctl.desk.books import book_to_write
from windctl.desk.machines import profile_of
from windctl.errors import UsageError

if TYPE_CHECKING:
    from windctl.book.book import Book
    from windctl.profile.model import Readings
    from windctl.record.addenda import Addendum

_by = click.option("--by", metavar="NAME", help="Who says so; you, if not given.")


def _signed(by: str | None) -> tuple[str, str]:
    """When and who."""
    from windctl.desk.bench import operator

    return datetime.now().astimezone().isoformat(timespec="seconds"), by or operator()


def _keep(
    shared: Shared, book: Book, coil: str, fact: Addendum, judged: dict[str, Any] | None = None
) -> None:
    """`judged`: what a reading comes to."""
    from windctl.record.addenda import CoilMeasured, plain

    head, judged = book.find(coil), judged or {}
    book.amend(head.number, fact)
    if shared.json:
        present.result_json({"coil": head.number, "id": head.id, "kind": fact.kind, **plain(fact), **judged})
        return
    told = fact.kind.removeprefix("coil_")
    if isinstance(fact, CoilMeasured) and fact.dcr_20c_ohm is not None:
        told = f"{present.ohm(fact.dcr_20c_ohm, judged.get('dcr_u95_ohm', 0.0))} at 20 °C"
        told += f": {judged['verdict']}" if "verdict" in judged else ""
    present.result(f"{head.number}: {told}")


@click.command()
@click.argument("coil")
@click.argument("text")
@_by
@takes("book", "json")
def note(shared: Shared, coil: str, text: str, by: str | None) -> None:
    """Write TEXT down beside the closed record of COIL, with your name and the time."""
    from windctl.record.addenda import CoilNoted

    if not text.strip():
        raise UsageError("an empty note says nothing")
    with book_to_write(shared) as book:
        _keep(shared, book, coil, CoilNoted(*_signed(by), text.strip()))


@click.command()
@click.argument("coil")
@click.option("--reason", metavar="TEXT", required=True, help="Why.")
@click.option("--undo", is_flag=True, help="Let a withdrawn coil teach again.")
@_by
@takes("book", "json")
def withdraw(shared: Shared, coil: str, reason: str, undo: bool, by: str | None) -> None:
    """Take out what COIL has taught: what is known becomes what it would be without it, to the last bit.

    Its record stays as it is. The wire it took stays counted as gone from its spool.
    """
    from windctl.record.addenda import CoilReadmitted, CoilWithdrawn, withdrawn

    if not reason.strip():
        raise UsageError("say why, with --reason")
    with book_to_write(shared) as book:
        out = withdrawn(book.addenda(coil))
        if undo and out is None:
            raise UsageError(f"coil {book.find(coil).number} is not withdrawn")
        if not undo and out is not None:
            raise UsageError(f"coil {book.find(coil).number} is withdrawn already: {out.reason}")
        kind = CoilReadmitted if undo else CoilWithdrawn
        _keep(shared, book, coil, kind(*_signed(by), reason.strip()))


@click.command()
@click.argument("coil")
@click.option("--ohm", callback=typed.ohm_option, metavar="OHM",
              help="Resistance of the cooled coil as the meter shows it.")  # fmt: skip
@click.option("--celsius", type=typed.FiniteRange(min=-40, max=60), metavar="C",
              help="Temperature beside the coil, °C; with --ohm.")  # fmt: skip
@click.option("--mass", "grams", type=typed.FiniteRange(min=0, min_open=True), metavar="G",
              help="Mass of the wire on it, g: the coil less the empty bobbin.")  # fmt: skip
@click.option("--mass-sd", "grams_sd", type=typed.FiniteRange(min=0, min_open=True), default=0.02,
              show_default=True, metavar="G", help="Standard deviation of that.")  # fmt: skip
@click.option("--build", "build_mm", type=typed.FiniteRange(min=0, min_open=True), metavar="MM",
              help="From the core to the winding's surface at the ends of the core, by caliper, mm: "
                   "half of length over the winding less core length.")  # fmt: skip
@click.option("--build-sd", "build_sd_mm", type=typed.FiniteRange(min=0, min_open=True), default=0.1,
              show_default=True, metavar="MM", help="Standard deviation of that.")  # fmt: skip
@_by
@takes("machine", "book", "json", "no_input")
def measure(
    shared: Shared,
    coil: str,
    ohm: float | None,
    celsius: float | None,
    grams: float | None,
    grams_sd: float,
    build_mm: float | None,
    build_sd_mm: float,
    by: str | None,
) -> None:
    """Keep what was measured by hand on the finished COIL, and judge it; later coils are planned with it.

    How far the meter can be trusted comes from the machine's profile.
    """
    from windctl.material.copper import to_20c
    from windctl.record.addenda import CoilMeasured

    if ohm is None and grams is None and build_mm is None:
        raise UsageError("nothing was measured: give --ohm with --celsius, --mass or --build")
    if (ohm is None) != (celsius is None):
        raise UsageError("--ohm and --celsius go together: a resistance alone says little")
    readings = profile_of(shared).readings
    with book_to_write(shared) as book:
        at_20c = rel = None
        if ohm is not None and celsius is not None:
            known = book.find(coil).dcr_20c_ohm
            if known:
                may_ask = typed.may_ask(shared.no_input)
                ohm = typed.confirm_ohm(ohm, known, "a resistance", may_ask=may_ask)
            if ohm <= readings.lead_ohm:
                raise UsageError(f"{ohm:g} ohm is no more than the leads, {readings.lead_ohm:g} ohm")
            at_20c = to_20c(ohm - readings.lead_ohm, celsius)
            rel = hypot(readings.noise_pct / 100, readings.floor_ohm / ohm, readings.lead_sd_ohm / ohm)
        fact = CoilMeasured(
            *_signed(by),
            ohm=ohm,
            celsius=celsius,
            dcr_20c_ohm=at_20c,
            dcr_rel=rel,
            grams=grams,
            grams_sd=None if grams is None else grams_sd,
            build_mm=build_mm,
            build_sd_mm=None if build_mm is None else build_sd_mm,
        )
        judged = None if at_20c is None or rel is None else _judged(book, coil, at_20c, rel, readings)
        _keep(shared, book, coil, fact, judged)


def _judged(book: Book, coil: str, ohm: float, rel: float, readings: Readings) -> dict[str, Any]:
    """What a cold reading says of a coil: its 95 % interval with all that the instruments may be off by, and
    the verdict where the target was a resistance."""
    from windctl.forecast.finish import Z95
    from windctl.forecast.verdict import verdict
    from windctl.material.copper import ALPHA_20C
    from windctl.record.events import CoilStarted

    half = Z95 * ohm * hypot(rel, readings.gain_sd_pct / 100, ALPHA_20C * readings.celsius_sd)
    judged: dict[str, Any] = {"dcr_u95_ohm": half}
    started = next(iter(book.events(coil)))
    if isinstance(started, CoilStarted) and started.target.kind != "turns":
        target = started.target
        judged["verdict"] = verdict(ohm - half, ohm + half, target.value, target.tolerance_pct)
    return judged
