"""Options that many commands share. Each may stand before the command's name or behind it; the latter wins.

Before the name, an option that the command has no use for is passed over, so that a shell alias can carry it.
The one exception is --dry-run: a command that cannot promise it refuses.
"""

from __future__ import annotations

import functools
from collections.abc import Callable
from dataclasses import fields
from pathlib import Path
from typing import Any, Concatenate, ParamSpec, TypeVar

import click

from windctl.cli import typed
from windctl.desk.asked import Shared

__all__ = ["Shared", "all_options", "given", "takes"]

P = ParamSpec("P")
R = TypeVar("R")

_GIVEN = "windctl.options"


def _keep(ctx: click.Context, param: click.Parameter, value: Any) -> None:
    if value is not None and value is not False:
        ctx.meta.setdefault(_GIVEN, {})[param.name] = value


_Decorator = Callable[[Callable[..., Any]], Callable[..., Any]]


def _shared(*declarations: str, **kwargs: Any) -> _Decorator:
    return click.option(*declarations, callback=_keep, expose_value=False, **kwargs)


_OPTIONS: dict[str, _Decorator] = {
    "json": _shared("--json", is_flag=True, help="Print the result as one JSON object."),
    "book": _shared(
        "--book",
        metavar="FILE",
        type=click.Path(dir_okay=False, path_type=Path),
        help="The coil book; else WINDCTL_BOOK, else the one in the data folder.",
    ),
    "machine": _shared(
        "--machine",
        metavar="NAME|FILE|virtual",
        help="The machine's profile; else the configured one, else virtual.",
    ),
    "port": _shared("--port", metavar="URL", help="Where the board is: a device name or any pyserial URL."),
    "speed": _shared(
        "--speed",
        metavar="N",
        type=typed.FiniteRange(min=0),
        help="Virtual machine: 1 is real time, 40 forty times that, 0 (the default) as fast as possible.",
    ),
    "plant_seed": _shared(
        "--plant-seed",
        metavar="N",
        type=typed.WholeRange(min=0),
        help="Virtual machine: which wire and which fate is drawn.",
    ),
    "readings": _shared(
        "--readings",
        type=click.Choice(["live", "checks", "none"]),
        help="How the coil is measured while it is wound, in place of what the profile says.",
    ),
    "spool": _shared(
        "--spool", metavar="ID", help="The spool that the wire comes from; its coils have taught how it is."
    ),
    "dry_run": _shared("--dry-run", is_flag=True, help="Say what would be done; move and record nothing."),
    "at_turn": _shared(
        "--at-turn", metavar="N", type=typed.FiniteRange(min=0), help="The turn, counted or confirmed by you."
    ),
    "batch": _shared("--batch", metavar="NAME", help="The batch that the coil belongs to."),
    "of": _shared(
        "--of", metavar="N", type=typed.WholeRange(min=1), help="How many coils the batch is to have."
    ),
    "quiet": _shared("-q", "--quiet", is_flag=True, help="No progress; results, questions and errors only."),
    "no_input": _shared(
        "--no-input", is_flag=True, help="Never ask; refused where a real machine would turn."
    ),
}


def all_options(command: Callable[..., Any]) -> Callable[..., Any]:
    """Give a group every shared option, for its commands to find."""
    for option in reversed(_OPTIONS.values()):
        command = option(command)
    return command


def given(ctx: click.Context) -> Shared:
    """What was told before any command's name."""
    return Shared(**ctx.meta.get(_GIVEN, {}))


def takes(*names: str) -> Callable[[Callable[Concatenate[Shared, P], R]], Callable[P, R]]:
    """Give a command the shared options of these names; its function gets a `Shared` as first argument."""
    unknown = set(names) - {field.name for field in fields(Shared)}
    if unknown:
        raise ValueError(f"no such shared option: {', '.join(sorted(unknown))}")

    def decorate(function: Callable[Concatenate[Shared, P], R]) -> Callable[P, R]:
        @functools.wraps(function)
        def with_shared(*args: P.args, **kwargs: P.kwargs) -> R:
            ctx = click.get_current_context()
            given: dict[str, Any] = ctx.meta.get(_GIVEN, {})
            if "dry_run" in given and "dry_run" not in names:
                raise click.UsageError("--dry-run has no meaning here: this command moves no machine.", ctx)
            return function(Shared(**{name: given[name] for name in names if name in given}), *args, **kwargs)

        command: Callable[..., Any] = with_shared
        for name in reversed(names):
            command = _OPTIONS[name](command)
        return command

    return decorate
