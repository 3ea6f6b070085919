"""`windctl coils`: what the coil book holds."""

from __future__ import annotations

from collections.abc import Iterable
from typing import TYPE_CHECKING

import click

from windctl.cli import (
    coil_addenda,
    coil_backup,
    coil_compare,
    coil_exchange,
    coil_measure,
    coil_proof,
    label,
    pair,
    pair_told,
    present,
    report,
    typed,
)
from windctl.cli.options import Shared, takes
from windctl.desk.books import book_if_any, book_to_read
from windctl.errors import QueryError, UsageError

if TYPE_CHECKING:
    from windctl.book.heads import CoilHead
    from windctl.book.queries import CoilLine
    from windctl.record.addenda import Addendum, CoilImported
    from windctl.record.events import Event


@click.group()
def coils() -> None:
    """The coil book: every coil that was wound, and how."""


@coils.command("list", short_help="The coils in the book, the latest first.")
@click.argument("query", nargs=-1)
@click.option("--sort", default="", metavar="FIELDS",
              help="Sort by these, with commas between, - before one for the largest first: "
                   "started, coil, recipe, batch, spool, outcome, verdict, turns, ohm.")  # fmt: skip
@click.option("--recipe", metavar="NAME", help="Only coils of this very recipe.")
@click.option(
    "--outcome",
    type=click.Choice(["open", "finished", "stopped", "tripped"]),
    help="Only coils that ended so; open: not ended yet.",
)
@click.option("--limit", type=typed.WholeRange(min=1), metavar="N", help="Only the first N of them.")
@takes("book", "batch", "json")
def list_(
    shared: Shared,
    query: tuple[str, ...],
    sort: str,
    recipe: str | None,
    outcome: str | None,
    limit: int | None,
) -> None:
    """The coils in the book, the one started last first; with QUERY those that it asks for.

    \b
    A query is words, looked for in recipe, number, notes, and reasons to
    withdraw or part; and conditions:
      recipe:TEXT note:TEXT by:TEXT     anywhere within
      coil:NAME batch:NAME spool:NAME   whole, with * for anything
      outcome:finished verdict:within   open, finished, stopped, tripped; within,
                                        outside, "not judged"
      turns:7000..8000 ohm:..3.7k       a range, or a number as it is rounded
      since:2026-01 until:2026-03-15    also started:2026-02
      not CONDITION                     all but these
    All of them must hold; a,b means a or b. Texts with blanks stand in "quotes",
    the whole query then in 'others'.
    """
    asked = " ".join(query)
    try:
        with book_if_any(shared) as book:
            heads = (
                ()
                if book is None
                else book.lines(
                    asked, sort=sort, recipe=recipe, batch=shared.batch, outcome=outcome, limit=limit
                )
            )
    except QueryError as error:
        raise UsageError(f"{error}\n  {error.text}\n  {' ' * error.at}^") from error
    if shared.json:
        present.result_json_rows("coils", map(_row, heads))
        return
    if not heads:
        present.message("no coils")
        return
    present.table(
        ["coil", "recipe", "started", "outcome", "turns", "at 20 °C", "verdict"],
        [
            [
                head.number,
                head.recipe,
                head.started[:16].replace("T", " "),
                head.outcome,
                "" if head.turns is None else present.grouped(head.turns),
                _resistance(head),
                head.verdict,
            ]
            for head in heads
        ],
        right="    rr",
    )


def _row(head: CoilLine) -> dict[str, object]:
    return {
        "coil": head.number,
        "id": head.id,
        "recipe": head.recipe,
        "started": head.started,
        "outcome": head.outcome,
        "turns": head.turns,
        "dcr_20c_ohm": head.dcr_20c_ohm,
        "verdict": head.verdict,
        "batch": head.batch,
        "spool": head.spool,
    }


def _resistance(head: CoilHead | CoilLine) -> str:
    if head.dcr_20c_ohm is None:
        return ""
    return present.ohm(head.dcr_20c_ohm, head.dcr_u95_ohm or 0.0)


@coils.command(short_help="Everything known of one coil.")
@click.argument("coil")
@takes("book", "json")
def show(shared: Shared, coil: str) -> None:
    """Everything known of COIL: by its number, the number's last digits, or the beginning of its id."""
    from windctl.desk.stock import picks_up_of
    from windctl.paper.told import story
    from windctl.record.addenda import paired
    from windctl.record.events import CoilStarted

    with book_to_read(shared) as book:
        head, imported = book.find(coil), book.imported(coil)
        picks_up = picks_up_of(book, head.id)
        addenda = book.addenda(head.id)
        partner = paired(addenda)
        if shared.json:
            hum = None if picks_up is None else picks_up.as_json()
            goes_with = None if partner is None else partner.partner_number
            present.result_json({**book.show(coil), "hum": hum, "goes_with": goes_with})
            return
        rare, reports, readings = _parted(book.events(head.id))
    target = (
        present.turns(head.target_value)
        if head.target_kind == "turns"
        else f"{present.ohm(head.target_value)} at 20 °C"
    )
    rows = [
        ("coil", head.number),
        ("id", head.id),
        ("recipe", head.recipe),
        ("batch", head.batch),
        ("spool", head.spool),
        ("started", _moment(head.started)),
        ("ended", _moment(head.ended or "")),
        ("outcome", f"{head.outcome}: {head.reason}" if head.reason else head.outcome),
        ("turns", "" if head.turns is None else present.turns(head.turns)),
        ("resistance", _resistance(head) and f"{_resistance(head)} at 20 °C"),
        ("target", target),
        ("verdict", head.verdict),
        ("hum", "" if picks_up is None else pair_told.both_hums(picks_up)),
        ("goes with", "" if partner is None else partner.partner_number),
        ("program", head.program_digest),
        ("record", head.record_digest),
        ("imported", "" if imported is None else _imported(imported)),
    ]
    present.pairs([(name, value) for name, value in rows if value])
    present.result()
    for line in story(rare, rare[0].setup.counts_per_turn if isinstance(rare[0], CoilStarted) else 1):
        present.result(f"{line.when:>10}  {line.what}", under=12)
    present.result(
        f"{present.counted(reports, 'board report')} and {present.counted(readings, 'reading')} besides"
    )
    for fact in addenda:
        _show_addendum(fact)


def _parted(events: Iterable[Event]) -> tuple[list[Event], int, int]:
    """The rare facts, and how many board reports and readings there are besides."""
    from windctl.record.events import ReadingTaken, StatusHeard

    rare: list[Event] = []
    reports = readings = 0
    for event in events:
        if isinstance(event, StatusHeard):
            reports += 1
        elif isinstance(event, ReadingTaken):
            readings += 1
        else:
            rare.append(event)
    return rare, reports, readings


def _imported(fact: CoilImported) -> str:
    """How a coil came from another book."""
    when = fact.wall_time[:16].replace("T", " ")
    known = "" if fact.recorded == fact.number else f"its record calls it {fact.recorded}; "
    return f"{when} by {fact.by}; {known}{'teaches' if fact.teaches else 'teaches nothing'}"


def _moment(wall_time: str) -> str:
    """Date, time and zone, as they stand in the record, to be read by people."""
    return wall_time.replace("T", " ", 1)


_TAUGHT = {"share": "how it grew"}  # the others are words as they stand


def _show_addendum(fact: Addendum) -> None:
    """What was said after the record was closed."""
    from windctl.paper.told import said_since
    from windctl.record.addenda import CoilTaught, plain

    if isinstance(fact, CoilTaught):
        kinds = ", ".join(_TAUGHT.get(one["what"], one["what"]) for one in plain(fact)["lesson"]["measured"])
        present.result(f"taught: {kinds or 'nothing, but that it took wire'}")
    elif (said := said_since(fact)) is not None:
        when, who, what = said
        present.result(f"{when}, {who}: {what}")


for _command in (
    coil_proof.verify,
    coil_exchange.export,
    coil_exchange.import_,
    coil_backup.backup,
    coil_backup.restore,
    report.report,
    label.label,
    coil_addenda.note,
    coil_measure.measure,
    coil_measure.budget,
    coil_compare.compare,
    coil_addenda.withdraw,
    pair.unpair,
):
    coils.add_command(_command)
