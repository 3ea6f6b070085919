"""A click group that imports a command's module only when that command is asked for."""

from __future__ import annotations

import difflib
import importlib
from collections.abc import Mapping
from typing import Any

import click


class LazyGroup(click.Group):
    """A group whose members are import strings, `"package.module:attribute"`, by command name.

    Listing names imports nothing; help for the whole group imports the command modules, which therefore keep
    everything heavy inside their functions.
    """

    def __init__(self, *args: Any, lazy: Mapping[str, str], **kwargs: Any) -> None:
        super().__init__(*args, **kwargs)
        self._lazy = dict(lazy)

    def list_commands(self, ctx: click.Context) -> list[str]:
        """Names in the order of the table: the order in which a newcomer needs them."""
        return [*self._lazy, *super().list_commands(ctx)]

    def resolve_command(
        self, ctx: click.Context, args: list[str]
    ) -> tuple[str | None, click.Command | None, list[str]]:
        """As click does it, with what was probably meant where there is no such command."""
        if self.get_command(ctx, args[0]) is None and not args[0].startswith("-"):
            meant = difflib.get_close_matches(args[0], self.list_commands(ctx), n=1, cutoff=0.5)
            guess = f" Did you mean {meant[0]!r}?" if meant else ""
            ctx.fail(f"No such command {args[0]!r}.{guess}")
        return super().resolve_command(ctx, args)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        """The command itself, imported now; None if there is no such name."""
        if cmd_name not in self._lazy:
            return super().get_command(ctx, cmd_name)
        module, _, attribute = self._lazy[cmd_name].partition(":")
        command = getattr(importlib.import_module(module), attribute)
        if not isinstance(command, click.Command):
            raise TypeError(f"{self._lazy[cmd_name]} is not a command")
        return command
