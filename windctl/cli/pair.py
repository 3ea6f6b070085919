"""`windctl pair`, `windctl coils unpair`: hum-cancelling pairs from the coils in the book."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

import click

from windctl.cli import pair_told, present, typed
from windctl.cli.coil_addenda import by_option, signed
from windctl.cli.options import Shared, takes
from windctl.desk.books import book_if_any, book_to_read, book_to_write
from windctl.errors import QueryError, UsageError, WindctlError

if TYPE_CHECKING:
    from windctl.book.book import Book
    from windctl.desk.stock import Matched, Stock
    from windctl.shop.joining import Pole

SKIP = "skip"


@click.command(short_help="Hum-cancelling pairs from the coils in the book.")
@click.argument("query", nargs=-1)
@click.option("--north", multiple=True, metavar="COIL",
              help="This coil has north towards the strings; kept with your name.")  # fmt: skip
@click.option("--south", multiple=True, metavar="COIL",
              help="This coil has south towards the strings; kept with your name.")  # fmt: skip
@click.option("--at-most", "at_most_db", type=typed.FiniteRange(min=-200, max=0), metavar="DB",
              help="Only pairs that leave no more hum in a uniform field, such as -45.")  # fmt: skip
@click.option("--any-bobbin", is_flag=True, help="Pair coils on different bobbins, too.")
@click.option("--spacing", "apart_mm", type=typed.FiniteRange(min=0.1, max=500), metavar="MM",
              help="Between the middles of the two coils; else their flanges touch.")  # fmt: skip
@click.option("--stacked", is_flag=True, help="One coil above the other, not side by side.")
@click.option("--take", is_flag=True, help="Keep the pairs: part of both coils' records from then on.")
@click.option("--svg", "svg_file", type=click.Path(dir_okay=False, path_type=Path), metavar="FILE",
              help="Draw how the leads are joined, into a file.")  # fmt: skip
@by_option
@takes("book", "batch", "json", "no_input", "dry_run")
def pair(
    shared: Shared,
    query: tuple[str, ...],
    north: tuple[str, ...],
    south: tuple[str, ...],
    at_most_db: float | None,
    any_bobbin: bool,
    apart_mm: float | None,
    stacked: bool,
    take: bool,
    svg_file: Path | None,
    by: str | None,
) -> None:
    """The best hum-cancelling pairs from the coils in stock; with QUERY, of those that it asks for.

    In stock are finished coils that were not withdrawn, built in or returned, and go with no other. A
    pair has opposite magnets and as little difference in turns times area as can be told; all pairs
    together leave the least hum. QUERY is that of 'windctl coils list', such as recipe:hum since:2026-03
    or coil:b1-2026-0001,b1-2026-0004.

    Hum is told for a uniform field and without steel, and for a source a metre away, which is the limit
    that a room sets. Pairs are kept with --take alone; what is said of magnets is kept at once.
    """
    from windctl.desk.stock import Matched, Wish, matched, stock_of
    from windctl.shop.matching import Sitting

    wish = Wish(Sitting(stacked, apart_mm), at_most_db, any_bobbin)
    if set(north) & set(south):
        raise UsageError(f"coil {sorted(set(north) & set(south))[0]} cannot have both poles to the strings")
    asked = " ".join(query)
    try:
        with book_if_any(shared) as book:
            if book is None:
                found = Matched((), (), ())
            else:
                stock = stock_of(book, asked, shared.batch)
                poles = _poles(book, stock, north, south) | _asked(shared, stock, (*north, *south), book)
                found = matched(book, _with(stock, poles), wish)
    except QueryError as error:
        raise UsageError(f"{error}\n  {error.text}\n  {' ' * error.at}^") from error
    if svg_file is not None and found.pairs:
        from windctl.shop.leads_drawn import as_svg

        _write(svg_file, as_svg([each.pair.joined for each in found.pairs]))
    if book is not None and not shared.dry_run:
        _keep(shared, poles, found if take else None, by)
    if shared.json:
        present.result_json(pair_told.as_json(found, taken=take and not shared.dry_run))
    else:
        pair_told.show(found, stacked=stacked)
        pair_told.ending(found, take=take, dry_run=shared.dry_run)


def _poles(book: Book, stock: Stock, north: Sequence[str], south: Sequence[str]) -> dict[str, Pole]:
    """What the options say, by number. Raises UsageError for a coil that is not among those to be paired."""
    poles: dict[str, Pole] = {}
    here = {coil.head.number for coil in stock.coils}
    said: list[tuple[str, Pole]] = [
        *((each, "north") for each in north),
        *((each, "south") for each in south),
    ]
    for name, pole in said:
        number = book.find(name).number
        if number not in here:
            why = next((one.why for one in stock.left_out if one.number == number), "is not asked for")
            raise UsageError(f"--{pole}: coil {number} is not among those that can be paired: it {why}")
        if poles.setdefault(number, pole) != pole:
            raise UsageError(f"coil {number} cannot have both poles to the strings")
    return poles


def _asked(shared: Shared, stock: Stock, told: Sequence[str], book: Book) -> dict[str, Pole]:
    """What somebody at the terminal says of coils whose record lacks it."""
    if not typed.may_ask(shared.no_input):
        return {}
    known = {book.find(name).number for name in told}
    poles: dict[str, Pole] = {}
    for coil in stock.poleless:
        if coil.head.number not in known:
            answer = click.prompt(
                f"{coil.head.number}, {coil.head.recipe}: which pole is towards the strings?",
                type=click.Choice(["north", "south", SKIP], case_sensitive=False),
                default=SKIP,
                err=True,
            )
            if answer != SKIP:
                poles[coil.head.number] = "north" if answer == "north" else "south"
    return poles


def _with(stock: Stock, poles: Mapping[str, Pole]) -> Stock:
    coils = tuple(replace(coil, pole=poles.get(coil.head.number, coil.pole)) for coil in stock.coils)
    return replace(stock, coils=coils)


def _keep(shared: Shared, poles: Mapping[str, Pole], taken: Matched | None, by: str | None) -> None:
    """What was said of magnets, and the pairs that are taken."""
    from windctl.record.addenda import MagnetTold, PairMade

    pairs = () if taken is None else taken.pairs
    if not (poles or pairs):
        return
    when, who = signed(by)
    made = []
    for found in pairs:
        left, joined = found.pair.left, found.pair.joined.in_series
        both = ((found.north.head, found.south.head), (found.south.head, found.north.head))
        made.append(
            [
                (
                    one.id,
                    PairMade(when, who, other.id, other.number, joined, left.db, left.low_db, left.high_db),
                )
                for one, other in both
            ]
        )
    with book_to_write(shared) as book:
        if poles:
            book.amend_each([(coil, (MagnetTold(when, who, pole),)) for coil, pole in poles.items()])
        if made:
            book.make_pairs(made)
    for number, pole in poles.items():
        present.message(f"kept: {number} has {pole} towards the strings")


def _write(file: Path, text: str) -> None:
    try:
        file.write_text(text, encoding="utf-8", newline="\n")
    except OSError as error:
        raise WindctlError(f"{file} cannot be written: {error.strerror or error}") from error


@click.command(short_help="Part a coil from the one it goes with.")
@click.argument("coil")
@click.option("--reason", metavar="TEXT", required=True, help="Why.")
@by_option
@takes("book", "json")
def unpair(shared: Shared, coil: str, reason: str, by: str | None) -> None:
    """Part COIL from the one it goes with: both are in stock again. That they went together stays written."""
    if not reason.strip():
        raise UsageError("say why, with --reason")
    when, who = signed(by)
    with book_to_read(shared) as book:  # which makes none
        head = book.find(coil)
    with book_to_write(shared) as book:
        partner = book.part_pair(head.id, when, who, reason.strip())
    if shared.json:
        present.result_json({"coil": head.number, "id": head.id, "parted_from": partner})
    else:
        present.result(f"{head.number} and {partner} go together no longer")
