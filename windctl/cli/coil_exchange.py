"""`windctl coils export`, `import`: coils from one book to another."""

from __future__ import annotations

import os
import sys
from collections.abc import Iterable, Iterator
from datetime import datetime
from pathlib import Path
from typing import TYPE_CHECKING, TypeVar

import click

from windctl.cli import present
from windctl.cli.exit_codes import ExitCode, code_for
from windctl.cli.options import Shared, takes
from windctl.desk.books import book_to_read, book_to_write
from windctl.errors import BookError, RecordBroken, UsageError

if TYPE_CHECKING:
    from windctl.book.book import Book
    from windctl.book.exchange import Taken
    from windctl.book.heads import CoilHead

T = TypeVar("T")

_SAYS = {
    "new": "imported",
    "same": "here already, the same",
    "more": "here already; what was said of it since was taken over",
    "less": "here already, with more said of it than in the file",
    "taught": "here already; it teaches from now on",
}


@click.command(short_help="Whole records as JSON, for another book.")
@click.argument("coil", nargs=-1)
@click.option("--query", metavar="QUERY", help="The coils that this asks for, as in 'windctl coils list'.")
@click.option("--to", "path", metavar="FILE", type=click.Path(dir_okay=False, path_type=Path),
              help="Write a file for 'windctl coils import': these coils, or all.")  # fmt: skip
@click.option("--replace", is_flag=True, help="Write over FILE.")
@takes("book", "json", "quiet")
def export(
    shared: Shared, coil: tuple[str, ...], query: str | None, path: Path | None, replace: bool
) -> None:
    """The whole record of COIL as JSON, with its digests: enough to check it, and to restore it elsewhere.

    With --to a file of many coils, one on each line, for another book: their records, and all that was said
    of them since. Coils that are still open are left out.
    """
    if path is None:
        if len(coil) != 1 or query is not None:
            raise UsageError("name one coil, or with --to the file that many are to go to")
        with book_to_read(shared) as book:
            present.result_json(dict(book.export(coil[0])))
        return
    if path.exists() and not replace:
        raise UsageError(f"{path} is there already: name another file, or write over it with --replace")
    with book_to_read(shared) as book:
        heads = _asked(book, coil, query)
        closed = [head for head in heads if head.sealed]
        written = _write(path, _shown(shared, book.export_lines(closed), len(closed) + 1, "exporting"))
    left_out = [head.number for head in heads if not head.sealed]
    if shared.json:
        coils = [head.number for head in closed]
        present.result_json({"file": str(path), "coils": coils, "left_out": left_out, "bytes": written})
        return
    if left_out:
        present.message(f"left out, still open: {', '.join(left_out)}")
    present.result(f"{present.counted(len(closed), 'coil')} in {path}, {present.grouped(written)} bytes")


def _asked(book: Book, coil: tuple[str, ...], query: str | None) -> list[CoilHead]:
    if not coil:
        return list(book.list(query or ""))
    named = {head.id: head for head in (book.find(one) for one in coil)}
    if query is not None:
        named |= {head.id: head for head in book.list(query)}
    return list(named.values())


def _write(path: Path, lines: Iterable[bytes]) -> int:
    """A whole file or none; its size."""
    half = path.with_name(f"{path.name}.part")
    try:
        with half.open("wb") as file:
            for line in lines:
                file.write(line)
            size = file.tell()
            file.flush()
            os.fsync(file.fileno())
        half.replace(path)
    except OSError as error:
        half.unlink(missing_ok=True)
        raise BookError(f"{path} cannot be written ({error.strerror}): choose another place") from error
    except BaseException:
        half.unlink(missing_ok=True)
        raise
    return size


@click.command("import", short_help="Take over exported coils.")
@click.argument("path", metavar="FILE", type=click.Path(exists=True, dir_okay=False, path_type=Path))
@click.option("--teach", is_flag=True,
              help="Let them teach here too; spools of one name are taken for one spool.")  # fmt: skip
@click.option("--by", metavar="NAME", help="Who says so; you, if not given.")
@takes("book", "json", "quiet")
def import_(shared: Shared, path: Path, teach: bool, by: str | None) -> ExitCode:
    """Take over the coils in FILE, which 'windctl coils export' wrote, with all that was said of them.

    Each is checked against its digests first. One that is here already is left as it is; what was said of it
    since is added. Another coil under the same id is refused. A coil whose number is another's here is told
    apart by a letter behind its bench. Later coils are planned without them, unless with --teach.
    """
    from windctl.book.exchange import Hand, coil_of, coils_in
    from windctl.desk.bench import operator

    n, texts = coils_in(path)
    hand = Hand(datetime.now().astimezone().isoformat(timespec="seconds"), by or operator(), teach)
    taken: list[Taken] = []
    refused: list[str] = []
    code = ExitCode.DONE
    with book_to_write(shared) as book:
        through = _shown(shared, texts, n, "importing")
        while True:
            try:
                text = next(through, None)
                if text is None:
                    break
                taken.append(book.take_in(coil_of(text), hand))
            except (BookError, RecordBroken) as error:
                refused.append(str(error))
                code = max(code, code_for(error))
    _tell(shared, taken, refused)
    return code


def _tell(shared: Shared, taken: list[Taken], refused: list[str]) -> None:
    if shared.json:
        coils = [{"coil": one.number, "recorded": one.recorded, "how": one.how} for one in taken]
        present.result_json({"coils": coils, "refused": refused})
        return
    for one in taken:
        if one.number != one.recorded:
            present.result(f"{one.recorded} is another coil's number here: it is kept as {one.number}")
        elif one.how in ("more", "less"):
            present.result(f"{one.number}: {_SAYS[one.how]}")
    for how, says in _SAYS.items():
        if n := sum(one.how == how for one in taken):
            present.result(f"{present.counted(n, 'coil')} {says}")
    for why in refused:
        present.result(f"refused: {why}")


def _shown(shared: Shared, items: Iterator[T], n: int, doing: str) -> Iterator[T]:
    """The items; at a terminal, how far it is, on a line of its own that is wiped out at the end."""
    shows = sys.stderr.isatty() and not shared.quiet and os.environ.get("TERM", "") != "dumb"
    for at, item in enumerate(items):
        if shows:
            click.echo(f"\r{doing}: {at + 1} of {n}", nl=False, err=True)
        yield item
    if shows:
        click.echo("\r\033[K", nl=False, err=True)
