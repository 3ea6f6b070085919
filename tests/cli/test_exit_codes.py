"""Every way in which windctl can end has one code, and none shows a traceback."""

from __future__ import annotations

import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import click
import pytest

from windctl import errors
from windctl.cli import main
from windctl.cli.exit_codes import ExitCode, code_for, code_for_coil

PROMISED = {  # as the head of windctl.errors draws the tree
    errors.UsageError: 2,
    errors.QueryError: 2,
    errors.RecipeError: 3,
    errors.ProfileError: 3,
    errors.ReadingsError: 3,
    errors.PlanRefused: 3,
    errors.MachineError: 4,
    errors.RunFailed: 1,
    errors.LinkLost: 1,
    errors.BookError: 1,
    errors.RecordBroken: 7,
}


def every_class(base: type[errors.WindctlError]) -> Iterator[type[errors.WindctlError]]:
    """`base` and all below it."""
    yield base
    for below in base.__subclasses__():
        yield from every_class(below)


def made(cls: type[errors.WindctlError]) -> errors.WindctlError:
    """An instance of any class of the tree."""
    if issubclass(cls, errors.FileInvalid):
        return cls([errors.Problem("x.toml", 1, 2, "is wrong")])
    return cls("why", 0) if issubclass(cls, errors.QueryError) else cls("why")


def test_every_exception_of_the_tree_has_the_code_it_promises() -> None:
    for cls, code in PROMISED.items():
        assert code_for(made(cls)) == code
    for cls in every_class(errors.WindctlError):
        assert code_for(made(cls)) != ExitCode.DONE


def test_signals_and_the_unforeseen() -> None:
    assert code_for(KeyboardInterrupt()) == 130
    assert code_for(click.exceptions.Abort()) == 130
    assert code_for(click.UsageError("no")) == 2
    assert code_for(ZeroDivisionError()) == 1


@pytest.mark.parametrize(
    ("outcome", "verdict", "code"),
    [
        ("finished", "within", 0),
        ("finished", "not judged", 0),
        ("finished", "outside", 6),
        ("stopped", "not judged", 5),
        ("tripped", "not judged", 5),
        ("open", "not judged", 130),
    ],
)
def test_a_coil_that_ended_has_the_code_of_its_outcome(outcome: str, verdict: str, code: int) -> None:
    assert code_for_coil(outcome, verdict) == code


@pytest.mark.parametrize("cls", sorted(PROMISED, key=lambda cls: cls.__name__))
def test_a_foreseen_error_is_its_own_text_and_nothing_more(
    cls: type[errors.WindctlError], monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    def fail(**_: object) -> None:
        raise made(cls)

    monkeypatch.setattr(main.root, "main", fail)
    assert main.run([]) == PROMISED[cls]
    printed = capsys.readouterr()
    assert printed.out == ""
    assert printed.err == str(made(cls)) + "\n"


def test_an_unforeseen_error_says_where_the_log_is_and_the_log_holds_the_traceback(
    monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    def fail(**_: object) -> None:
        raise ZeroDivisionError("by nought")

    monkeypatch.setattr(main.root, "main", fail)
    assert main.run([]) == 1
    message, where = capsys.readouterr().err.splitlines()
    assert "ZeroDivisionError: by nought" in message
    log = Path(where.partition(": ")[2]).read_text(encoding="utf-8")
    assert "Traceback" in log
    assert "by nought" in log


@pytest.mark.parametrize(
    ("typed", "meant"), [("wnd", "wind"), ("coil", "coils"), ("spools", "spool"), ("go", "")]
)
def test_a_command_that_was_meant_is_named(
    capsys: pytest.CaptureFixture[str], typed: str, meant: str
) -> None:
    assert main.run([typed]) == 2
    told = capsys.readouterr().err
    assert f"No such command {typed!r}." in told
    assert (f"Did you mean {meant!r}?" in told) if meant else ("Did you mean" not in told)


@pytest.mark.parametrize("group", ["coils", "spool", "machine", "recipe"])
def test_the_list_of_a_groups_commands_is_not_cut_short(
    capsys: pytest.CaptureFixture[str], group: str
) -> None:
    assert main.run([group, "--help"]) == 0
    assert "..." not in capsys.readouterr().out.partition("Commands:")[2]


def test_usage_errors_name_the_way_to_help(capsys: pytest.CaptureFixture[str]) -> None:
    assert main.run(["wind"]) == 2
    assert main.run(["no-such-command"]) == 2
    assert main.run(["plan", "x.toml", "--no-such-option"]) == 2
    assert "--help" in capsys.readouterr().err


def test_a_reader_that_goes_away_ends_the_program_quietly() -> None:
    code = "import sys; from windctl.cli.main import main; sys.argv=['windctl','--help']; main()"
    with subprocess.Popen(
        [sys.executable, "-c", code], stdout=subprocess.PIPE, stderr=subprocess.PIPE
    ) as process:
        assert process.stdout is not None and process.stderr is not None
        process.stdout.close()
        assert process.stderr.read() == b""
        assert process.wait(30) in (0, 1)
