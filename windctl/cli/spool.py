"""`windctl spool`: wire spools, what is left on them, and what their coils have taught."""

from __future__ import annotations

from typing import TYPE_CHECKING

import click

from windctl.cli import present, typed
from windctl.cli.options import Shared, takes
from windctl.desk import spool_words as words
from windctl.desk.books import book_if_any, book_to_read
from windctl.desk.spool_keeping import OHM_PER_M_SD_PCT, SCALE_SD_G
from windctl.errors import UsageError

if TYPE_CHECKING:
    from windctl.desk.spools import SpoolState

_MORE, _MORE_M = 1.05, 50.0  # more wire than before, beyond what a scale and the wire's table may be off by


@click.group()
def spool() -> None:
    """Wire spools: what is left, and what their coils have taught."""


@spool.command(short_help="Keep a new spool of wire.")
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
    from windctl.desk.spool_keeping import NewSpool, keep_new

    missing = []
    if gauge is None and diameter_mm is None:
        missing.append('which wire is it? Give --gauge "AWG 42", say, or --diameter')
    if enamel is None and overall_mm is None:
        missing.append("how thick is its enamel? Give --enamel or, better, --overall from a micrometer")
    if missing:
        raise UsageError("\n".join(missing))
    if ohm_per_m_sd is not None and ohm_per_m is None:
        raise UsageError("--ohm-per-m-sd stands alone: give --ohm-per-m, whose uncertainty it is")
    new = NewSpool(
        name=spool_id,
        gauge=gauge,
        diameter_mm=diameter_mm,
        enamel=enamel,  # type: ignore[arg-type]  # a choice
        overall_mm=overall_mm,
        insulation=insulation or "",
        grams=grams,
        ohm_per_m=ohm_per_m,
        ohm_per_m_sd=ohm_per_m_sd,
        notes=notes or "",
    )
    name = keep_new(shared, new)
    _tell(shared, name)


@spool.command("list", short_help="The spools, and what is left on each.")
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
                words.ohm_per_m(state),
                words.left(state),
                "" if state.coils_left is None else present.counted(state.coils_left, "coil"),
                str(state.coils),
            ]
            for state in states
        ],
        right="  rrrr",
    )


@spool.command(short_help="Everything known of one spool.")
@click.argument("spool_id", metavar="ID")
@takes("book", "json")
def show(shared: Shared, spool_id: str) -> None:
    """Everything known of the spool ID: what was measured, what its coils taught, what is left."""
    _tell(shared, spool_id)


@spool.command(short_help="What the wire on it weighs now.")
@click.argument("spool_id", metavar="ID")
@click.argument("grams", metavar="G", type=typed.FiniteRange(min=0))
@click.option("--sd", "sd_g", type=typed.FiniteRange(min=0, min_open=True), default=SCALE_SD_G,
              show_default=True, metavar="G", help="Standard deviation of the weighing, g.")  # fmt: skip
@takes("book", "json")
def weigh(shared: Shared, spool_id: str, grams: float, sd_g: float) -> None:
    """Keep that the wire on spool ID now weighs G grams: the scale's reading less the empty spool."""
    from windctl.desk.spool_keeping import keep_weighing
    from windctl.desk.spools import state_of

    with book_to_read(shared) as book:
        before = state_of(book, spool_id).left_m
    keep_weighing(shared, spool_id, grams, sd_g)
    after = _tell(shared, spool_id).left_m
    if before is not None and after is not None and after > _MORE * before + _MORE_M:
        present.message(
            f"caution: that is more wire than there was, {present.grouped(max(before, 0.0))} m: was the "
            "empty spool taken off? Weigh it again; the last weighing counts"
        )


@spool.command(short_help="Ohm per metre from a piece of its loose end.")
@click.argument("spool_id", metavar="ID")
@click.option("--length", "metres", type=typed.FiniteRange(min=0, min_open=True), required=True, metavar="M",
              help="Length of the measured piece, m.")  # fmt: skip
@click.option("--ohm", callback=typed.ohm_option, required=True, metavar="OHM",
              help="Its resistance, the leads taken off.")  # fmt: skip
@click.option("--celsius", type=typed.FiniteRange(min=-40, max=60), required=True, metavar="C",
              help="Its temperature, °C.")  # fmt: skip
@click.option("--sd", "sd_pct", type=typed.FiniteRange(min=0, min_open=True, max=50),
              default=OHM_PER_M_SD_PCT, show_default=True, metavar="%",
              help="Standard deviation of length, meter and thermometer together, per cent.")  # fmt: skip
@takes("book", "json")
def measure(shared: Shared, spool_id: str, metres: float, ohm: float, celsius: float, sd_pct: float) -> None:
    """Keep what a piece from the loose end of spool ID measured: it says more of the wire than the table."""
    from windctl.desk.spool_keeping import keep_piece

    keep_piece(shared, spool_id, metres, ohm, celsius, sd_pct)
    _tell(shared, spool_id)


def _tell(shared: Shared, spool_id: str) -> SpoolState:
    from windctl.desk.spools import state_of

    with book_to_read(shared) as book:
        state = state_of(book, spool_id)
    if shared.json:
        present.result_json(state.as_json())
        return state
    rows = [
        ("spool", state.id),
        ("wire", words.wire(state)),
        ("ohm per metre", words.ohm_per_m(state) + f"; the table has {state.nominal_ohm_per_m:.4g} ohm/m"),
        ("known from", words.known_from(state)),
        ("coils wound", str(state.coils)),
        ("left", words.left(state)),
        ("enough for", words.enough(state)),
        ("notes", state.notes),
    ]
    present.pairs([(name, value) for name, value in rows if value])
    for line in words.told(state):
        present.result(line)
    return state
