"""`windctl`: the commands, and the outermost frame that turns every ending into words and an exit code."""

from __future__ import annotations

import importlib
import os
import sys
from collections.abc import Sequence

import click

from windctl import __version__
from windctl.cli import options, present
from windctl.cli.exit_codes import ExitCode, code_for
from windctl.cli.lazy import LazyGroup
from windctl.errors import WindctlError

COMMANDS = {
    "plan": "windctl.cli.plan:plan",
    "wind": "windctl.cli.wind:wind",
    "resume": "windctl.cli.wind:resume",
    "forecast": "windctl.cli.forecast:forecast",
    "estimate": "windctl.cli.estimate:estimate",
    "pair": "windctl.cli.pair:pair",
    "coils": "windctl.cli.coils:coils",
    "chart": "windctl.cli.chart:chart",
    "spool": "windctl.cli.spool:spool",
    "machine": "windctl.cli.machine:machine",
    "recipe": "windctl.cli.recipe:recipe",
    "diagnose": "windctl.cli.diagnose:diagnose",
}

INTERFACE = ("windctl.tui.start", "start")

_ALONE = """\
windctl winds pickup coils on a motorised winding machine and keeps a record of every coil.

  windctl plan RECIPE                      what this coil will be, before any wire is cut
  windctl wind RECIPE --machine virtual    wind it on the simulated machine
  windctl coils list                       the coils in the book
  windctl --help                           all commands and options
"""


@click.group(
    cls=LazyGroup,
    lazy=COMMANDS,
    invoke_without_command=True,
    context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100},
    epilog="Options may stand before or behind the command's name. Results go to standard output, "
    "progress and messages to standard error. No key and no command here is an emergency stop: "
    "use the hardware stop.",
)
@options.all_options
@click.version_option(__version__, prog_name="windctl")
@click.pass_context
def root(ctx: click.Context) -> None:
    """Winds pickup coils on a motorised winding machine and keeps a record of every coil."""
    if ctx.invoked_subcommand is not None:
        return
    if not (sys.stdin.isatty() and sys.stderr.isatty()):
        click.echo(_ALONE, nl=False)
        return
    start = getattr(importlib.import_module(INTERFACE[0]), INTERFACE[1])
    ctx.exit(start(options.given(ctx)))


def run(arguments: Sequence[str] | None = None) -> ExitCode:
    """One call of windctl, from its arguments to its exit code. Never raises, never shows a traceback."""
    try:
        result = root.main(args=arguments, prog_name="windctl", standalone_mode=False)
        return ExitCode(result or 0)
    except click.ClickException as error:
        error.show()
        return code_for(error)
    except WindctlError as error:
        present.message(str(error))
        return code_for(error)
    except (click.exceptions.Abort, KeyboardInterrupt) as error:
        present.message("interrupted; nothing was turning")
        return code_for(error)
    except BrokenPipeError:
        # The reader of our output has gone. Whatever is still buffered must not raise again at exit.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return ExitCode.FAILED
    except Exception as error:  # noqa: BLE001 - the outermost frame: told, logged, and an exit code
        return _fault(error)


def _fault(error: Exception) -> ExitCode:
    from windctl.desk.log import log_fault

    path = log_fault(error)
    present.message(f"windctl met a fault of its own: {type(error).__name__}: {error}")
    present.message(f"The log has the details: {path}" if path else "No log could be written.")
    return ExitCode.FAILED


def main() -> None:
    """The console script."""
    for stream in (sys.stdout, sys.stderr):
        # A terminal that lacks a character shows a substitute; it never ends a run.
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="replace")
    sys.exit(run())
