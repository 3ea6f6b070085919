"""`windctl coils label`: labels for coils, one by one or on sheets."""

from __future__ import annotations

from pathlib import Path

import click

from windctl.cli import typed
from windctl.cli.options import Shared, takes
from windctl.cli.report import STDOUT, written
from windctl.desk.books import book_to_read
from windctl.errors import UsageError


@click.command(short_help="Labels to print.")
@click.argument("coils", nargs=-1, metavar="COIL...")
@click.option(
    "-o",
    "--output",
    type=click.Path(dir_okay=False, path_type=Path, allow_dash=True),
    metavar="FILE",
    help="The file to write: .svg is one label, anything else sheets as HTML; - is standard output. "
    "Else sheets, named after the first coil, in this folder.",
)
@click.option(
    "--paper",
    type=click.Choice(["a4", "letter"]),
    default="a4",
    show_default=True,
    help="The sheets' paper.",
)
@click.option(
    "--columns",
    type=typed.WholeRange(1, 6),
    default=3,
    show_default=True,
    metavar="N",
    help="Labels side by side; three on A4 are about 64 mm wide each.",
)
@click.option(
    "--start",
    type=typed.WholeRange(min=1),
    default=1,
    show_default=True,
    metavar="N",
    help="The first free place on the first sheet, counted row by row.",
)
@takes("book", "batch", "json")
def label(
    shared: Shared, coils: tuple[str, ...], output: Path | None, paper: str, columns: int, start: int
) -> None:
    """Write labels for coils, or with --batch for all coils of a batch: number, turns, cold resistance, date,
    and a QR code of number, id and the digest of the record.

    Print sheets at full size, without scaling.
    """
    from windctl.desk.papers import batch_coils, labels_of
    from windctl.paper.html import ident_of
    from windctl.paper.label import Sheet, label_sheets, label_svg
    from windctl.paper.svg import standalone

    if bool(coils) == (shared.batch is not None):
        raise click.UsageError("name coils, or a batch with --batch.")
    sheet = Sheet(paper, columns, start)
    if start > sheet.places:
        raise UsageError(f"--start is {start}, and a sheet of {columns} columns has {sheet.places} labels")
    with book_to_read(shared) as book:
        if shared.batch is not None:
            heads, name = batch_coils(book, shared.batch), ident_of(shared.batch)
        else:
            heads = tuple(book.find(coil) for coil in coils)
            name = heads[0].number
        labels = labels_of(book, heads)
    numbers = [head.number for head in heads]
    file = output or Path(f"labels-{name}.html")
    if file != STDOUT and file.suffix.lower() == ".svg":
        if len(labels) != 1:
            raise UsageError(f"{file} would hold one label, and {len(labels)} are asked for: write .html")
        written(shared, standalone(label_svg(labels[0])), file, numbers)
    else:
        written(shared, label_sheets(labels, sheet), file, numbers)
