"""`windctl coils report`: a coil or a batch as a page to print and to keep."""

from __future__ import annotations

import sys
from pathlib import Path

import click

from windctl.cli import present
from windctl.cli.options import Shared, takes
from windctl.desk.books import book_to_read
from windctl.errors import WindctlError

STDOUT = Path("-")


@click.command(short_help="A coil or a batch as a page to print.")
@click.argument("coil", required=False)
@click.option(
    "-o",
    "--output",
    type=click.Path(dir_okay=False, path_type=Path, allow_dash=True),
    metavar="FILE",
    help="The file to write, - for standard output; else one named after the coil, in this folder.",
)
@takes("book", "batch", "json")
def report(shared: Shared, coil: str | None, output: Path | None) -> None:
    """Write the report of COIL as one HTML file that stands by itself: its curve and how the forecast closed
    in, readings and their uncertainty, speed and tension, the section, settings, what happened, and the
    digest that `windctl coils verify` checks.

    With --batch instead of COIL, the report of that batch. Print it from a browser, on A4 or Letter.
    """
    from windctl.desk.papers import batch_text, report_text
    from windctl.paper.html import ident_of

    if (coil is None) == (shared.batch is None):
        raise click.UsageError("name one coil, or a batch with --batch.")
    with book_to_read(shared) as book:
        if coil is not None:
            head = book.find(coil)
            text, name, numbers = report_text(book, head), head.number, [head.number]
        else:
            assert shared.batch is not None  # one of the two
            heads, text = batch_text(book, shared.batch)
            name, numbers = f"batch-{ident_of(shared.batch)}", [head.number for head in heads]
    written(shared, text, output or Path(f"{name}.html"), numbers)


def written(shared: Shared, text: str, file: Path, numbers: list[str]) -> None:
    """Write a page to its file, and say so. Raises WindctlError where it cannot be written."""
    if file == STDOUT:
        if shared.json:
            raise click.UsageError("--json says which file was written: give -o a name.")
        sys.stdout.buffer.write(text.encode())
        sys.stdout.buffer.flush()
        return
    try:
        file.write_text(text, encoding="utf-8", newline="\n")
    except OSError as error:
        raise WindctlError(f"{file} cannot be written: {error.strerror or error}") from error
    if shared.json:
        present.result_json({"file": str(file), "coils": numbers})
    else:
        present.result(str(file))
