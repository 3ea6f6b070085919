"""`windctl spool`: wire spools, what is left on them, and what their coils have taught."""

from __future__ import annotations

from datetime import datetime
from math import exp
from typing import TYPE_CHECKING, Any

import click

from windctl.cli import present, typed
from windctl.cli.options import Shared, takes
from windctl.desk.books import book_if_any, book_to_read, book_to_write
from windctl.errors import UsageError

if TYPE_CHECKING:
    from windctl.desk.spools import SpoolState

_Z95 = 1.959964
_SCALE_SD_G = 0.5  # of a workshop's scale, the empty spool's own mass included
_OHM_PER_M_SD_PCT = 0.5  # of a metre or two measured with a good meter


def _now() -> str:
    return datetime.now().astimezone().isoformat(timespec="seconds")


@click.group()
def spool() -> None:
    """Wire spools: what is left, and what their coils have taught."""


@spool.command()
@click.argument("spool_id", metavar="[ID]", required=False)
@click.option("--gauge", metavar='"AWG N"', help='Bare size by number, such as "AWG 42".')
@click.option("--diameter", "diameter_mm", type=typed.FiniteRange(min=0.01, max=1), metavar="MM",
              help="Bare diameter of a metric size, mm; instead of --gauge.")  # fmt: skip
@click.option("--enamel", type=click.Choice(["grade 1", "grade 2"]), help="Grade of the enamel.")
@click.option("--overall", "overall_mm", type=typed.FiniteRange(min=0.01, max=1.2), metavar="MM",
              help="Diameter over the enamel by micrometer, mm; beats the grade.")  # fmt: skip
@click.option("--insulation", metavar="TEXT", help="The enamel's kind, such as polyurethane.")
@click.option("--net", "grams", type=typed.FiniteRange(min=0), metavar="G",
              help="Mass of the wire on it, g: the scale's reading less the empty spool.")  # fmt: skip
@click.option("--ohm-per-m", type=typed.FiniteRange(min=0, min_open=True), metavar="OHM",
              help="Measured on a piece of it, ohm per metre at 20 °C.")  # fmt: skip
@click.option("--ohm-per-m-sd", type=typed.FiniteRange(min=0, min_open=True), metavar="OHM",
              help="Standard deviation of that; 0.5 % if not given.")  # fmt: skip
@click.option("--notes", metavar="TEXT", help="Maker, lot, shelf: whatever should be remembered.")
@takes("book", "json")
def add(
    shared: Shared,
    spool_id: str | None,
    gauge: str | None,
    diameter_mm: float | None,
    enamel: str | None,
    overall_mm: float | None,
    insulation: str | None,
    grams: float | None,
    ohm_per_m: float | None,
    ohm_per_m_sd: float | None,
    notes: str | None,
) -> None:
    """Keep a new spool under ID (write it on the spool), or under the next free number."""
    from windctl.desk.bench import operator
    from windctl.desk.spools import check_name, next_name
    from windctl.material.wire import resolve
    from windctl.record.addenda import SpoolAdded, SpoolMeasured, SpoolWeighed

    if enamel is None and overall_mm is None:
        raise UsageError("how thick is its enamel? Give --enamel or, better, --overall from a micrometer")
    if ohm_per_m_sd is not None and ohm_per_m is None:
        raise UsageError("--ohm-per-m-sd stands alone: give --ohm-per-m, whose uncertainty it is")
    try:
        measured = overall_mm is not None
        wire = resolve(
            gauge=gauge, diameter_mm=diameter_mm,
            enamel=None if measured else enamel, overall_mm=overall_mm,  # type: ignore[arg-type]  # a choice
        )  # fmt: skip
    except ValueError as error:
        raise UsageError(f"there is no such wire: {error}") from None
    if ohm_per_m is not None and not 0.7 < ohm_per_m / wire.ohm_per_m < 1.4:
        raise UsageError(
            f"--ohm-per-m of {ohm_per_m:g} ohm is no wire of this size, which has about "
            f"{wire.ohm_per_m:.3g} ohm per metre: measure again, or check the gauge"
        )
    now, who = _now(), operator()
    with book_to_write(shared) as book:
        name = next_name(book.spools()) if spool_id is None else check_name(spool_id)
        added = SpoolAdded(
            now, who, name, gauge, diameter_mm, enamel, overall_mm, insulation or "", notes or ""
        )
        more: list[Any] = []
        if grams is not None:
            more.append(SpoolWeighed(now, who, grams, _SCALE_SD_G))
        if ohm_per_m is not None:
            sd = ohm_per_m * _OHM_PER_M_SD_PCT / 100 if ohm_per_m_sd is None else ohm_per_m_sd
            more.append(SpoolMeasured(now, who, ohm_per_m, sd / ohm_per_m))
        book.add_spool(added, *more)
    _tell(shared, name)


@spool.command("list")
@takes("book", "json")
def list_(shared: Shared) -> None:
    """The spools in the book, what is left on each, and for how many coils."""
    from windctl.desk.spools import states_of

    with book_if_any(shared) as book:
        states = () if book is None else states_of(book)
    if shared.json:
        present.result_json({"spools": [state.as_json() for state in states]})
        return
    if not states:
        present.message("no spools; 'windctl spool add' keeps one")
        return
    present.table(
        ["spool", "wire", "ohm/m", "left", "enough for", "coils wound"],
        [
            [
                state.id,
                state.wire,
                _ohm_per_m(state),
                _left(state),
                "" if state.coils_left is None else present.counted(state.coils_left, "coil"),
                str(state.coils),
            ]
            for state in states
        ],
        right="  rrrr",
    )


@spool.command()
@click.argument("spool_id", metavar="ID")
@takes("book", "json")
def show(shared: Shared, spool_id: str) -> None:
    """Everything known of the spool ID: what was measured, what its coils taught, what is left."""
    _tell(shared, spool_id)


@spool.command()
@click.argument("spool_id", metavar="ID")
@click.argument("grams", metavar="G", type=typed.FiniteRange(min=0))
@click.option("--sd", "sd_g", type=typed.FiniteRange(min=0, min_open=True), default=_SCALE_SD_G,
              show_default=True, metavar="G", help="Standard deviation of the weighing, g.")  # fmt: skip
@takes("book", "json")
def weigh(shared: Shared, spool_id: str, grams: float, sd_g: float) -> None:
    """Keep that the wire on spool ID now weighs G grams: the scale's reading less the empty spool."""
    from windctl.desk.bench import operator
    from windctl.record.addenda import SpoolWeighed

    with book_to_write(shared) as book:
        book.add_to_spool(spool_id, SpoolWeighed(_now(), operator(), grams, sd_g))
    _tell(shared, spool_id)


@spool.command()
@click.argument("spool_id", metavar="ID")
@click.option("--length", "metres", type=typed.FiniteRange(min=0, min_open=True), required=True, metavar="M",
              help="Length of the measured piece, m.")  # fmt: skip
@click.option("--ohm", callback=typed.ohm_option, required=True, metavar="OHM",
              help="Its resistance, the leads taken off.")  # fmt: skip
@click.option("--celsius", type=typed.FiniteRange(min=-40, max=60), required=True, metavar="C",
              help="Its temperature, °C.")  # fmt: skip
@click.option("--sd", "sd_pct", type=typed.FiniteRange(min=0, min_open=True, max=50),
              default=_OHM_PER_M_SD_PCT, show_default=True, metavar="%",
              help="Standard deviation of length, meter and thermometer together, per cent.")  # fmt: skip
@takes("book", "json")
def measure(shared: Shared, spool_id: str, metres: float, ohm: float, celsius: float, sd_pct: float) -> None:
    """Keep what a piece from the loose end of spool ID measured: it says more of the wire than the table."""
    from windctl.desk.bench import operator
    from windctl.material.copper import to_20c
    from windctl.record.addenda import SpoolMeasured

    ohm_per_m = to_20c(ohm, celsius) / metres
    with book_to_write(shared) as book:
        nominal = book.spool(spool_id).spool.wire().ohm_per_m
        if not 0.7 < ohm_per_m / nominal < 1.4:
            raise UsageError(
                f"{ohm_per_m:.3g} ohm per metre is no wire of this size, which has about {nominal:.3g} ohm "
                "per metre: measure again"
            )
        book.add_to_spool(spool_id, SpoolMeasured(_now(), operator(), ohm_per_m, sd_pct / 100))
    _tell(shared, spool_id)


def _tell(shared: Shared, spool_id: str) -> None:
    from windctl.desk.spools import state_of

    with book_to_read(shared) as book:
        state = state_of(book, spool_id)
    if shared.json:
        present.result_json(state.as_json())
        return
    rows = [
        ("spool", state.id),
        ("wire", state.wire + (f", {state.insulation}" if state.insulation else "")),
        ("ohm per metre", _ohm_per_m(state) + f"; the table has {state.nominal_ohm_per_m:.4g} ohm/m"),
        ("known from", _known_from(state)),
        ("coils wound", str(state.coils)),
        ("left", _left(state)),
        ("enough for", _enough(state)),
        ("notes", state.notes),
    ]
    present.pairs([(name, value) for name, value in rows if value])
    for one in state.unfit:
        off = f"{100 * (exp(one.off) - 1):+.1f} % off"
        present.result(
            f"coil {one.coil} was {off} and taught nothing: look at the spool's label, the count, the coil"
        )
    for coil, reason in state.withdrawn:
        present.result(f"coil {coil} was withdrawn: {reason}")


def _ohm_per_m(state: SpoolState) -> str:
    return present.with_uncertainty(state.ohm_per_m, _Z95 * state.ohm_per_m_sd, "ohm/m", most_decimals=4)


def _known_from(state: SpoolState) -> str:
    parts = [present.counted(state.taught_by, "coil")] if state.taught_by else []
    if state.pieces:
        parts.append(present.counted(state.pieces, "measured piece"))
    return " and ".join(parts) or "the table only"


def _left(state: SpoolState) -> str:
    if state.left_m is None or state.left_sd_m is None:
        return ""
    return present.with_uncertainty(max(state.left_m, 0.0), _Z95 * state.left_sd_m, "m", most_decimals=0)


def _enough(state: SpoolState) -> str:
    if state.coils_left is None or state.metres_each is None:
        return ""
    each = present.grouped(state.metres_each)
    return f"{present.counted(state.coils_left, 'coil')} of {each} m, as wound from it last"
