"""`windctl coils verify`: records against their digests, those in the book and those on paper."""

from __future__ import annotations

from dataclasses import asdict
from pathlib import Path
from typing import TYPE_CHECKING

import click

from windctl.cli import present
from windctl.cli.exit_codes import ExitCode
from windctl.cli.options import Shared, takes
from windctl.desk.books import book_if_any, book_to_read
from windctl.errors import BookError, UsageError

if TYPE_CHECKING:
    from windctl.book.book import Book
    from windctl.book.claims import Claim
    from windctl.book.verify import BrokenCoil


@click.command(short_help="Check records against their digests.")
@click.argument("what", metavar="[COIL|FILE]...", nargs=-1)
@click.option("--digest", metavar="HEX",
              help="The digest that the record of COIL must have, from a report or label; "
                   "its first 12 digits are enough.")  # fmt: skip
@takes("book", "json")
def verify(shared: Shared, what: tuple[str, ...], digest: str | None) -> ExitCode:
    """Check the record of COIL, or of all coils, against its digests: any change to it shows.

    With the digest that a report or a label carries, or with the FILE itself (a report, labels, a file of
    exported coils), it shows as well that the record's end was cut off, or that all of it was written anew.
    """
    if digest is not None and len(what) > 1:
        raise UsageError("one digest belongs to one coil: name one, or none")
    if not what and digest is None:
        with book_if_any(shared) as book:
            report = None if book is None else book.verify()
        return _tell(shared, report.checked if report else 0, list(report.broken) if report else [])
    files = [Path(one) for one in what if _is_file(one)]
    if digest is not None and files:
        raise UsageError(f"{files[0]} says itself which digests it carries: leave out --digest")
    named = [one for one in what if not _is_file(one)]
    with _book(shared, named) as book:
        return _check(shared, book, named, files, digest)


def _is_file(text: str) -> bool:
    """A coil's number has no point and no slash in it."""
    return Path(text).suffix != "" or Path(text).name != text


def _book(shared: Shared, named: list[str]) -> Book:
    with book_if_any(shared) as there:
        if there is None:
            asked = f"no coil {named[0]!r}: " if named else ""
            raise BookError(f"{asked}no coil has been wound yet")
    return book_to_read(shared)


def _check(shared: Shared, book: Book, named: list[str], files: list[Path], digest: str | None) -> ExitCode:
    from windctl.book.claims import Claim, claims_in, digest_of
    from windctl.book.verify import VerifyReport

    checked = 0
    broken: list[BrokenCoil] = []
    wanted: list[tuple[str, Claim]] = []
    for one in named:
        head = book.find(one)
        claim = Claim(head.number, head.id, "" if digest is None else digest_of(digest))
        wanted.append((head.number, claim))
    if digest is not None and not named:
        wanted.append(("--digest", Claim("", "", digest_of(digest))))
    for file in files:
        wanted += [(f"{file.name}, {claim.number}", claim) for claim in claims_in(file)]
    for where, claim in wanted:
        report = book.check_claim(claim, where)
        if claim.proven and report.checked == 0:
            present.message(f"{where}: whole, and not in this book")
            report = VerifyReport(1, ())
        checked += report.checked
        broken += report.broken
    return _tell(shared, checked, broken)


def _tell(shared: Shared, checked: int, broken: list[BrokenCoil]) -> ExitCode:
    if shared.json:
        present.result_json({"checked": checked, "broken": [asdict(one) for one in broken]})
    else:
        present.result(f"{checked} checked, {len({one.coil for one in broken})} broken")
        for one in broken:
            says_where = one.event_seq is None or one.what.startswith("row ")
            place = "" if says_where else f", row {one.event_seq} of its record"
            present.result(f"{one.coil}{place}: {one.what}")
    return ExitCode.RECORD_BROKEN if broken else ExitCode.DONE
