"""Shared options: before the command's name or behind it."""

from __future__ import annotations

from pathlib import Path

import click
import pytest
from click.testing import CliRunner

from windctl.cli import options
from windctl.cli.options import Shared


def tool() -> tuple[click.Group, list[Shared]]:
    """A group with one command that takes some of the options, and what it was called with."""
    seen: list[Shared] = []

    @click.group()
    @options.all_options
    def root() -> None:
        """The tool."""

    @root.command()
    @click.argument("name")
    @options.takes("machine", "json", "speed", "book")
    def act(shared: Shared, name: str) -> None:
        """Act."""
        assert name == "n"
        seen.append(shared)

    return root, seen


@pytest.mark.parametrize(
    "arguments",
    [
        ["--machine", "m", "--json", "act", "n"],
        ["act", "n", "--machine", "m", "--json"],
        ["--machine", "m", "act", "--json", "n"],
        ["--machine", "other", "act", "--json", "n", "--machine", "m"],
    ],
    ids=" ".join,
)
def test_either_place_means_the_same_and_the_nearer_wins(arguments: list[str]) -> None:
    root, seen = tool()
    result = CliRunner().invoke(root, arguments)
    assert result.exit_code == 0, result.output
    assert seen == [Shared(machine="m", json=True)]


def test_zero_is_a_speed_and_nothing_given_is_nothing() -> None:
    root, seen = tool()
    assert CliRunner().invoke(root, ["--speed", "0", "act", "n"]).exit_code == 0
    assert CliRunner().invoke(root, ["act", "n", "--book", "b"]).exit_code == 0
    assert seen == [Shared(speed=0.0), Shared(book=Path("b"))]


def test_before_the_name_an_option_without_use_is_passed_over_behind_it_it_is_an_error() -> None:
    root, seen = tool()
    assert CliRunner().invoke(root, ["--batch", "x", "act", "n"]).exit_code == 0
    assert seen == [Shared()]
    assert CliRunner().invoke(root, ["act", "n", "--batch", "x"]).exit_code == 2


def test_a_dry_run_that_cannot_be_promised_is_refused_in_either_place() -> None:
    root, seen = tool()
    assert CliRunner().invoke(root, ["--dry-run", "act", "n"]).exit_code == 2
    assert CliRunner().invoke(root, ["act", "n", "--dry-run"]).exit_code == 2
    assert seen == []
