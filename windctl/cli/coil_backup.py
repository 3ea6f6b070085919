"""`windctl coils backup`, `restore`: the whole book to another place and back."""

from __future__ import annotations

from pathlib import Path

import click

from windctl.cli import present
from windctl.cli.options import Shared, takes
from windctl.desk.books import book_to_read, where_the_book_is

_file = click.Path(dir_okay=False, path_type=Path)


@click.command(short_help="Copy the whole book, and verify the copy.")
@click.argument("to", metavar="FILE", type=_file)
@click.option("--replace", is_flag=True, help="Write over FILE.")
@takes("book", "json")
def backup(shared: Shared, to: Path, replace: bool) -> None:
    """Copy the whole book to FILE, while coils may be wound into it, and verify the copy."""
    from windctl.book.backup import back_up

    with book_to_read(shared) as book:
        path = book.path
    report = back_up(path, to, replace=replace)
    if shared.json:
        present.result_json({"file": str(to), "checked": report.checked, "bytes": to.stat().st_size})
    else:
        present.result(f"{present.counted(report.checked, 'coil')} in {to}, all verified")


@click.command(short_help="Make a backup the book.")
@click.argument("backup_file", metavar="FILE", type=click.Path(exists=True, dir_okay=False, path_type=Path))
@click.option("--replace", is_flag=True, help="Put it in the place of the book there is, which is kept.")
@takes("book", "json")
def restore(shared: Shared, backup_file: Path, replace: bool) -> None:
    """Make the backup in FILE the book, after it was verified; FILE stays as it is."""
    from windctl.book.backup import restore

    path = where_the_book_is(shared)
    report, kept = restore(backup_file, path, replace=replace)
    if shared.json:
        answer = {"book": str(path), "checked": report.checked, "kept": None if kept is None else str(kept)}
        present.result_json(answer)
        return
    present.result(f"{present.counted(report.checked, 'coil')} in {path}, all verified")
    if kept is not None:
        present.result(f"the book before it is kept as {kept}")
