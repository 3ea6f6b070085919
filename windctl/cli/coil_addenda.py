"""`windctl coils note`, `withdraw`: what is said of a coil after its record was closed."""

from __future__ import annotations

from datetime import datetime
from typing import TYPE_CHECKING

import click

from windctl.cli import present
from windctl.cli.options import Shared, takes
from windctl.desk.books import book_to_write
from windctl.errors import UsageError

if TYPE_CHECKING:
    from windctl.book.book import Book
    from windctl.record.addenda import Addendum

by_option = click.option("--by", metavar="NAME", help="Who says so; you, if not given.")


def signed(by: str | None) -> tuple[str, str]:
    """When and who."""
    from windctl.desk.bench import operator

    return datetime.now().astimezone().isoformat(timespec="seconds"), by or operator()


def _keep(shared: Shared, book: Book, coil: str, fact: Addendum) -> None:
    from windctl.record.addenda import plain

    head = book.find(coil)
    book.amend(head.number, fact)
    if shared.json:
        present.result_json({"coil": head.number, "id": head.id, "kind": fact.kind, **plain(fact)})
        return
    present.result(f"{head.number}: {fact.kind.removeprefix('coil_')}")


@click.command(short_help="Write something down beside a closed record.")
@click.argument("coil")
@click.argument("text")
@by_option
@takes("book", "json")
def note(shared: Shared, coil: str, text: str, by: str | None) -> None:
    """Write TEXT down beside the closed record of COIL, with your name and the time."""
    from windctl.record.addenda import CoilNoted

    if not text.strip():
        raise UsageError("an empty note says nothing")
    with book_to_write(shared) as book:
        _keep(shared, book, coil, CoilNoted(*signed(by), text.strip()))


@click.command(short_help="Take out what a coil has taught, or let it teach again.")
@click.argument("coil")
@click.option("--reason", metavar="TEXT", required=True, help="Why.")
@click.option("--undo", is_flag=True, help="Let a withdrawn coil teach again.")
@by_option
@takes("book", "json")
def withdraw(shared: Shared, coil: str, reason: str, undo: bool, by: str | None) -> None:
    """Take out what COIL has taught: what is known becomes what it would be without it, to the last bit.

    Its record stays as it is. The wire it took stays counted as gone from its spool.
    """
    from windctl.record.addenda import CoilReadmitted, CoilWithdrawn, paired, withdrawn

    if not reason.strip():
        raise UsageError("say why, with --reason")
    with book_to_write(shared) as book:
        said = book.addenda(coil)
        out, partner = withdrawn(said), paired(said)
        if undo and out is None:
            raise UsageError(f"coil {book.find(coil).number} is not withdrawn")
        if not undo and out is not None:
            raise UsageError(f"coil {book.find(coil).number} is withdrawn already: {out.reason}")
        kind = CoilReadmitted if undo else CoilWithdrawn
        _keep(shared, book, coil, kind(*signed(by), reason.strip()))
    if partner is not None and not undo:
        present.message(
            f"{partner.partner_number} still goes with it and is not in stock; "
            "'windctl coils unpair' parts them"
        )
