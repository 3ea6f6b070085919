"""`windctl coils measure`, `budget`: what a finished coil reads through its life, and how sure that is."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, Any, TypeVar

import click

from windctl.cli import present, typed
from windctl.cli.coil_addenda import by_option, signed
from windctl.cli.options import Shared, takes
from windctl.desk.books import book_to_read, book_to_write
from windctl.desk.machines import profile_of
from windctl.errors import BookError

if TYPE_CHECKING:
    from windctl.desk.measuring import Judged
    from windctl.shop.life import Life
    from windctl.shop.still_reads import ColdValue, Still

F = TypeVar("F", bound=Callable[..., Any])

_STAGES = ("on-machine", "leads-on", "potted", "assembled", "returned")
_ABOVE_0: dict[str, Any] = {"min": 0, "min_open": True}
_UNLIKELY = 0.05
_WARM_MINUTES = 15.0  # a coil that was finished less long ago may still be warm
_STATED = {"same": "it still reads the same", "changed": "it has changed", "cannot be told": "cannot be told"}


def _figure(*declarations: str, help: str, metavar: str, **limits: Any) -> Callable[[F], F]:
    show = limits.pop("default", None)
    more: dict[str, Any] = {} if show is None else {"default": show, "show_default": True}
    return click.option(*declarations, type=typed.Figure(**limits), metavar=metavar, help=help, **more)


@click.command(short_help="Keep what was measured by hand on a finished coil, and judge it.")
@click.argument("coil")
@click.option("--ohm", callback=typed.ohm_option, metavar="OHM",
              help="Resistance as the meter shows it; 7.946k and 7,946k are understood, here and "
                   "below.")  # fmt: skip
@_figure("--celsius", min=-40, max=60, metavar="C", help="Temperature beside the coil, °C; with --ohm.")
@click.option("--stage", type=click.Choice(_STAGES),
              help="Where the coil is in its life. What an assembled or returned coil reads teaches "
                   "nothing.")  # fmt: skip
@_figure("--minutes", min=0, metavar="MIN",
         help="Since it was wound, while it may still be warm; else it is taken as cooled.")  # fmt: skip
@click.option("--meter", metavar="NAME", default="",
              help="Which meter, if it is not the machine's own.")  # fmt: skip
@_figure("--gain-sd", "gain_pct", min=0, max=100, metavar="PCT",
         help="Standard deviation of that meter's gain; else as in the profile.")  # fmt: skip
@_figure("--mass", "grams", **_ABOVE_0, metavar="G",
         help="Mass of the wire on it, g: the coil less the empty bobbin.")  # fmt: skip
@_figure("--mass-sd", "grams_sd", **_ABOVE_0, default=0.02, metavar="G", help="Standard deviation of that.")
@_figure("--build", "build_mm", **_ABOVE_0, metavar="MM",
         help="From the core to the winding's surface at the ends of the core, by caliper, mm: "
              "half of length over the winding less core length.")  # fmt: skip
@_figure("--build-sd", "build_sd_mm", **_ABOVE_0, default=0.1, metavar="MM",
         help="Standard deviation of that.")  # fmt: skip
@_figure("--inductance", "henry", **_ABOVE_0, max=1000, metavar="H", help="Inductance, henry.")
@_figure("--quality", "quality", **_ABOVE_0, max=1e6, metavar="Q", help="Quality factor Q.")
@_figure("--at-hz", "test_hz", **_ABOVE_0, metavar="HZ", help="Frequency at which those two were measured.")
@_figure("--resonance", "resonance_hz", **_ABOVE_0, metavar="HZ", help="Frequency of its resonance; 6.2k.")
@_figure("--load-pf", "load_pf", min=0, metavar="PF", help="Capacitance across the coil then, pF.")
@_figure("--load-ohm", "load_ohm", **_ABOVE_0, metavar="OHM", help="Resistance across it then; 1000k.")
@_figure("--change", "change_pct", **_ABOVE_0, max=100, default=1.0, metavar="PCT",
         help="The least change that matters, when it is compared with what it read before.")  # fmt: skip
@by_option
@takes("machine", "book", "json", "no_input")
def measure(shared: Shared, /, coil: str, by: str | None, change_pct: float, **given: Any) -> None:
    """Keep what was measured by hand on the finished COIL, and judge it; later coils are planned with it.

    How far meter and thermometer can be trusted comes from the machine's profile. A resistance is compared
    with what the coil read before: it still reads the same, it has changed, or that cannot be told. What the
    two readings share (one meter, one thermometer, one warm coil) drops out of the comparison.
    """
    from windctl.desk.measuring import Measurement, beside_plan, fact_of, judged

    gain_pct = given.pop("gain_pct")
    profile = profile_of(shared)
    with book_to_write(shared) as book:
        head = book.find(coil)
        if given["ohm"] is not None and head.dcr_20c_ohm:
            asks = typed.may_ask(shared.no_input)
            given["ohm"] = typed.confirm_ohm(given["ohm"], head.dcr_20c_ohm, "a resistance", may_ask=asks)
        when, who = signed(by)
        given["stage"] = given["stage"] or ""
        taken = Measurement(**given, gain_rel=None if gain_pct is None else gain_pct / 100.0)
        fact = fact_of(taken, profile, who, when)
        said = judged(book, head.number, fact, change_pct)
        planned = beside_plan(book, head.number, fact)
        book.amend(head.number, fact)
    if shared.json:
        from windctl.record.addenda import plain

        also = {} if said is None else said.as_json()
        answer = {"coil": head.number, "id": head.id, "kind": fact.kind, **plain(fact), **also}
        present.result_json(answer)
        return
    _tell(head.number, said)
    for line in planned:
        present.result(line)
    if taken.ohm is not None and taken.minutes is None:
        _tell_if_warm(head.ended, when)


def _tell(number: str, said: Judged | None) -> None:
    if said is None:
        present.result(f"{number}: measured")
        return
    told = f"{present.ohm(said.reading.ohm, said.u95_ohm)} at 20 °C"
    present.result(f"{number}: {told}{'' if said.verdict is None else f': {said.verdict}'}")
    if said.still is None:
        present.result("there is no earlier reading to compare it with")
        return
    for line in _compared(said.still):
        present.result(line)


def _compared(said: Still) -> list[str]:
    """The statement, and what makes it as sharp as it is."""
    from windctl.shop.still_reads import hidden_by

    unit = "ohm"
    difference = present.with_uncertainty(said.difference_ohm, said.u95_ohm, unit)
    sign = "+" if said.difference_ohm > 0 else ""
    lines = [
        f"against {said.before.label}: {sign}{difference} ({said.difference_pct:+.2f} %): "
        f"{_STATED[said.statement]}"
    ]
    if said.statement == "cannot be told":
        lines.append(
            f"  a change of {present.ohm(said.matters_ohm)} would matter, and the difference is known to "
            f"± {present.ohm(said.u95_ohm)} only"
        )
    out = [f"{name} ({present.ohm(gone)})" for name, gone in hidden_by(said)]
    lines.append(f"  common to both, and so not in the difference: {', '.join(out) or 'nothing'}")
    if not said.after.bare and said.before.bare:
        lines.append("  what is joined to the coil now is in this reading, and was not in that one")
    return lines


def _tell_if_warm(ended: str | None, now: str) -> None:
    from datetime import datetime

    try:
        minutes = (datetime.fromisoformat(now) - datetime.fromisoformat(ended or "")).total_seconds() / 60.0
    except (ValueError, TypeError):  # no time, or one without its zone
        return
    if 0.0 <= minutes < _WARM_MINUTES:
        present.message(
            f"taken as cooled; it was finished {minutes:.0f} min ago: measure it once more with --minutes "
            "where it was still warm"
        )


@click.command(short_help="The cold resistance of a coil from all its readings, with its uncertainty.")
@click.argument("coil")
@_figure("--change", "change_pct", **_ABOVE_0, max=100, default=1.0, metavar="PCT",
         help="The least change that matters.")  # fmt: skip
@takes("book", "json")
def budget(shared: Shared, coil: str, change_pct: float) -> None:
    """Every resistance that COIL ever read, whether it still reads the same, and its cold resistance from all
    of them: what that is unsure of, line by line.

    The winding's own readings count as one. Standard uncertainties are combined as the Guide to the
    Expression of Uncertainty in Measurement (JCGM 100) has it, with what the readings share; ± is half of
    the 95 % interval.
    """
    from windctl.desk.measuring import cold_json, still_json
    from windctl.shop.life import life

    with book_to_read(shared) as book:
        head = book.find(coil)
        if not head.sealed:
            raise BookError(f"coil {head.number} is still open: this is for coils that are finished with")
        lived = life(book.events(head.number), book.addenda(head.number), change_pct)
    if not shared.json:
        _tell_life(head.number, lived)
        return
    readings = [
        {
            "label": reading.label,
            "when": reading.when,
            "stage": reading.stage,
            "meter": reading.meter,
            "dcr_20c_ohm": reading.ohm,
            "dcr_sd_ohm": reading.ohm * reading.rel,
            "still_reads": None if said is None else still_json(said),
        }
        for reading, said in zip(lived.readings, lived.stills, strict=True)
    ]
    values = {
        "made": None if lived.made is None else cold_json(lived.made),
        "now": None if lived.now is None else cold_json(lived.now),
    }
    present.result_json({"coil": head.number, "id": head.id, "readings": readings, **values})


def _tell_life(number: str, lived: Life) -> None:
    if lived.made is None or lived.now is None:
        present.result(f"{number}: no resistance was ever read")
        return
    rows = []
    for reading, said in zip(lived.readings, lived.stills, strict=True):
        against = ""
        if said is not None:
            sign = "+" if said.difference_ohm > 0 else ""
            against = f"{sign}{present.with_uncertainty(said.difference_ohm, said.u95_ohm, 'ohm')}"
        rows.append(
            [
                str(reading.number),
                reading.label,
                reading.meter,
                present.ohm(reading.ohm, reading.u95_ohm),
                against,
                "" if said is None else said.statement,
            ]
        )
    present.table(["", "reading", "meter", "at 20 °C", "against before", ""], rows, right="r  rr")
    if lived.changed:
        _tell_value(f"{number} as it was made", lived.made)
        _tell_value(f"{number} now", lived.now)
    else:
        _tell_value(number, lived.made)


def _tell_value(name: str, value: ColdValue) -> None:
    from_ = "reading" if len(value.readings) == 1 else "readings"
    numbers = ", ".join(str(reading.number) for reading in value.readings)
    present.result()
    present.result(f"{name}: {present.ohm(value.ohm, value.u95)} at 20 °C, from {from_} {numbers}")
    total = value.sd**2
    rows = [
        [
            line.name,
            f"{line.sd:.3g} {line.unit}".strip() if line.unit else f"{100.0 * line.sd:.3g} %",
            f"{line.ohm:.3g} ohm",
            f"{100.0 * line.ohm**2 / total:.1f} %",
        ]
        for line in value.budget
    ]
    rows.append(["all together", "", f"{value.sd:.3g} ohm", "100 %"])
    present.table(
        ["source", "standard deviation", "of the resistance", "of the variance"], rows, right=" rrr"
    )
    if value.chance is not None:
        agree = "agree" if value.chance >= _UNLIKELY else "scatter more than they should"
        present.result(
            f"the readings {agree}: chi-square {value.residual_square:.2g} at {value.freedom}, "
            f"which {100.0 * value.chance:.2g} % of such sets exceed"
        )
