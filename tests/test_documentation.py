"""What is documented exists, and what exists is documented."""

from __future__ import annotations

import re
import subprocess
from collections.abc import Iterator
from pathlib import Path

import click
import pytest

from windctl.cli.exit_codes import ExitCode
from windctl.cli.main import root

ROOT = Path(__file__).resolve().parents[1]
README = (ROOT / "README.md").read_text(encoding="utf-8")
DOCUMENTS = [ROOT / "README.md", ROOT / "DEVELOPERS.md", ROOT / "firmware_protocol/README.md"]

TOP_LEVEL = {
    "README.md",
    "DEVELOPERS.md",
    "LICENSE",
    "pyproject.toml",
    "windctl",
    "firmware_protocol",
    "tests",
    "recipes",
}


def every_command(
    command: click.Command, path: tuple[str, ...] = ()
) -> Iterator[tuple[tuple[str, ...], click.Command]]:
    """All commands that can be called, with their names."""
    if isinstance(command, click.Group):
        ctx = click.Context(command)
        for name in command.list_commands(ctx):
            below = command.get_command(ctx, name)
            assert below is not None
            yield from every_command(below, (*path, name))
    else:
        yield path, command


COMMANDS = dict(every_command(root))


def tracked_files() -> list[Path]:
    """Files under version control."""
    listed = subprocess.run(
        ["git", "ls-files", "-z"], cwd=ROOT, capture_output=True, text=True, check=True, timeout=30
    )
    return [ROOT / name for name in listed.stdout.split("\0") if name]


def commands_of(text: str) -> list[str]:
    """The windctl calls of a document: indented lines and code spans that begin with one."""
    calls: list[str] = []
    for line in text.splitlines():
        if line.startswith("    "):
            calls.extend(
                part.strip() for part in line.split("&&") if re.search(r"(^|/)windctl ", part.strip())
            )
        else:
            calls.extend(re.findall(r"`(windctl [^`]+)`", line))
    return calls


def test_the_outermost_names_are_the_agreed_ones() -> None:
    names = {file.relative_to(ROOT).parts[0] for file in tracked_files()}
    assert {name for name in names if not name.startswith(".")} <= TOP_LEVEL


@pytest.mark.parametrize("path", COMMANDS, ids=" ".join)
def test_every_command_has_help_and_stands_in_the_readme(path: tuple[str, ...]) -> None:
    command = COMMANDS[path]
    assert command.help
    assert len(command.help.split()) >= 4
    for parameter in command.params:
        if isinstance(parameter, click.Option):
            assert parameter.help, f"{' '.join(path)} {parameter.opts[0]} has no help"
    assert f"`windctl {' '.join(path)}" in README


@pytest.mark.parametrize("document", DOCUMENTS, ids=lambda file: str(file.relative_to(ROOT)))
def test_every_command_in_a_document_exists(document: Path) -> None:
    for call in commands_of(document.read_text(encoding="utf-8")):
        words = re.sub(r"^.*?windctl ", "", call).split()
        command: click.Command = root
        while isinstance(command, click.Group) and words and not words[0].startswith("-"):
            if words[0] == "COMMAND":
                break
            below = command.get_command(click.Context(command), words[0])
            assert below is not None, f"{document.name}: {call}"
            command = below
            words = words[1:]
        known = {
            name for parameter in command.params for name in (*parameter.opts, *parameter.secondary_opts)
        }
        for word in words:
            if word.startswith("-") and word not in ("--help", "--version"):
                assert word in known, f"{document.name}: {call}"


@pytest.mark.parametrize("document", DOCUMENTS, ids=lambda file: str(file.relative_to(ROOT)))
def test_whatever_turns_something_in_a_document_does_so_on_the_virtual_machine(document: Path) -> None:
    moving = [
        call
        for call in commands_of(document.read_text(encoding="utf-8"))
        if re.search(r"windctl (wind|resume|machine serve)\b.", call)
    ]
    assert [call for call in moving if "--machine virtual" not in call] == []
    if document.name == "README.md" and document.parent == ROOT:
        assert len(moving) >= 3


def test_the_readme_opens_with_the_job_in_one_paragraph_and_two_commands() -> None:
    blocks = re.split(r"\n{2,}", README.strip())
    assert blocks[0].startswith("# ")
    assert not blocks[1].startswith((" ", "#", "-", "|"))
    indented = [line for line in README.splitlines() if line.startswith("    ")]
    assert len(indented) == 2
    first, second = indented
    assert first.strip().startswith("python3 -m venv .venv && ")
    assert "windctl wind recipes/" in first
    assert (ROOT / re.findall(r"recipes/\S+", first)[0]).is_file()
    assert second.strip().startswith("python3 -m venv .venv && ")
    assert "-c tests/constraints.txt" in second
    assert " -m pytest" in second


def test_the_readme_gives_every_exit_code() -> None:
    table = README.partition("### Exit codes")[2].partition("\n## ")[0]
    assert {int(code) for code in re.findall(r"^\| (\d+) \|", table, re.MULTILINE)} == set(ExitCode)


def test_no_address_of_a_registry_and_no_path_of_one_machine_is_in_the_repository() -> None:
    for file in tracked_files():
        if not file.is_file() or file.suffix in (".png", ".svg"):
            continue
        text = file.read_text(encoding="utf-8")
        if file.suffix in (".toml", ".txt", ".cfg", ".lock") or ".ci" in file.parts:
            assert not re.search(r"https?://", text), file
        assert not re.search(r"(?<![\w.])/(?:work|root|home/\w+)/", text), file


def test_versions_are_pinned_by_name_only() -> None:
    lines = (ROOT / "tests/constraints.txt").read_text(encoding="utf-8").splitlines()
    pins = [line for line in lines if not line.startswith("#")]
    assert len(pins) > 20
    for pin in pins:
        assert re.fullmatch(r"[A-Za-z0-9._-]+==[A-Za-z0-9.]+", pin), pin


def test_the_project_needs_what_it_says_and_every_direct_need_is_pinned() -> None:
    import tomllib

    project = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["project"]
    wanted = [*project["dependencies"], *project["optional-dependencies"]["test"]]
    names = {re.split(r"[<>=!~ ]", need)[0].lower().replace("_", "-") for need in wanted}
    pins = (ROOT / "tests/constraints.txt").read_text(encoding="utf-8").lower().replace("_", "-")
    assert {name for name in names if f"\n{name}==" not in pins} == set()
