"""`windctl diagnose`: one zip for a fault report."""

from __future__ import annotations

from datetime import datetime
from pathlib import Path

import click

from windctl.cli import present
from windctl.cli.options import Shared, takes
from windctl.errors import UsageError, WindctlError


@click.command(short_help="One zip for a fault report.")
@click.option(
    "--out",
    type=click.Path(dir_okay=False, path_type=Path),
    metavar="FILE",
    help="The zip to make; else one named by date and time, in this folder.",
)
@takes("machine", "port", "readings", "book", "json")
def diagnose(shared: Shared, out: Path | None) -> None:
    """Gather versions, profile, ports, log and the last frames into one zip file.

    It stays on this computer, holds no recipe and no coil, and is yours to look through before you send it.
    """
    from windctl.desk.diagnosis import write_zip

    file = out or Path(f"windctl-{datetime.now().astimezone():%Y%m%d-%H%M%S}.zip")
    try:
        names = write_zip(file, shared)
    except FileExistsError:
        raise UsageError(f"{file} is there already: name another with --out") from None
    except OSError as error:
        raise WindctlError(f"{file} cannot be written: {error.strerror or error}") from error
    if shared.json:
        present.result_json({"file": str(file), "holds": names})
        return
    present.result(str(file))
    for name in names:
        present.message(f"  {name}")
