"""Bad files and options through the real commands: what is said, with which exit code, and that nothing else
happens: no traceback, no result, no file, not even half of one."""

from __future__ import annotations

import os
import sys
from pathlib import Path

import pytest

from tests.cli.bad_input import (
    BROKEN,
    CSVS,
    NO_FILES,
    OPTIONS,
    PROFILE,
    PROFILES,
    READINGS,
    RECIPES,
    REFUSALS,
    Bad,
)
from tests.recipe.samples import GOOD
from windctl.cli.main import run
from windctl.desk import places

Printed = pytest.CaptureFixture[str]


class Shop:
    """A folder with good files, and what was there before a command."""

    def __init__(self, folder: Path, capsys: Printed) -> None:
        self.folder, self._capsys = folder, capsys
        self.recipe = self.put("good.toml", GOOD)
        self.profile = self.put("north.toml", PROFILE)
        self.readings = self.put("good.csv", READINGS)
        self.book = str(folder / "coils.book")

    def put(self, name: str, content: str | bytes | None) -> str:
        file = self.folder / name
        if content is not None:
            file.write_bytes(
                content.encode("utf-8", "surrogatepass") if isinstance(content, str) else content
            )
        return str(file)

    def refuses(self, code: int, *arguments: str) -> list[str]:
        """The lines of a refusal on standard error; that it is all that happened is held here."""
        before = self._all_files()
        assert run(arguments) == code, (arguments, self._capsys.readouterr())
        shown = self._capsys.readouterr()
        assert "Traceback" not in shown.err
        assert "fault of its own" not in shown.err
        assert "\x1b" not in shown.err
        assert shown.out == ""
        assert self._all_files() == before
        assert not places.log_file().parent.exists() or "unforeseen" not in places.log_file().read_text()
        return shown.err.splitlines()

    def _all_files(self) -> dict[Path, bytes]:
        return {file: file.read_bytes() for file in self.folder.rglob("*") if file.is_file()}


@pytest.fixture
def shop(tmp_path: Path, capsys: Printed) -> Shop:
    return Shop(tmp_path, capsys)


def names(case: Bad) -> str:
    return case.name


def said(case: Bad, file: str) -> list[str]:
    return [line.replace("{file}", file) for line in case.said]


def test_there_are_enough_of_them() -> None:
    assert len(NO_FILES + BROKEN + RECIPES + PROFILES + CSVS) + len(OPTIONS) >= 120


@pytest.mark.parametrize("case", NO_FILES + BROKEN + RECIPES, ids=names)
def test_a_bad_recipe_stops_every_command_that_reads_one(shop: Shop, case: Bad) -> None:
    file = shop.put("bad.toml", case.content)
    book = ("--book", shop.book, "--machine", "virtual", "--no-input")
    assert shop.refuses(3, "recipe", "check", file) == said(case, file)
    assert shop.refuses(3, "plan", file) == said(case, file)
    assert shop.refuses(3, "wind", file, *book) == said(case, file)
    assert shop.refuses(3, "forecast", file, shop.readings) == said(case, file)


@pytest.mark.parametrize("case", NO_FILES + BROKEN + PROFILES, ids=names)
def test_a_bad_profile_stops_every_command_that_reads_one(shop: Shop, case: Bad) -> None:
    file = shop.put("bad.toml", case.content)
    assert shop.refuses(3, "plan", shop.recipe, "--machine", file) == said(case, file)
    wind = ("wind", shop.recipe, "--book", shop.book, "--port", "virtual", "--no-input")
    assert shop.refuses(3, *wind, "--machine", file) == said(case, file)


@pytest.mark.parametrize("case", CSVS, ids=names)
def test_a_bad_readings_file_stops_the_forecast(shop: Shop, case: Bad) -> None:
    file = shop.put("bad.csv", case.content)
    assert shop.refuses(3, "forecast", shop.recipe, file) == said(case, file)


def test_a_folder_is_no_file(shop: Shop) -> None:
    folder = str(shop.folder)
    for arguments in (
        ("recipe", "check", folder),
        ("plan", folder),
        ("plan", shop.recipe, "--machine", folder),
        ("forecast", shop.recipe, folder),
    ):
        assert shop.refuses(3, *arguments) == [f"{folder}: is a folder, not a file"]


@pytest.mark.skipif(sys.platform == "win32", reason="platform: POSIX permissions")
def test_a_file_that_may_not_be_read(shop: Shop, monkeypatch: pytest.MonkeyPatch) -> None:
    file = shop.put("secret.toml", GOOD)
    Path(file).chmod(0)
    if os.access(file, os.R_OK):  # root reads everything: let the system refuse in its place
        monkeypatch.setattr(Path, "open", _refused)
    for arguments in (
        ("plan", file),
        ("plan", shop.recipe, "--machine", file),
        ("forecast", shop.recipe, file),
    ):
        assert f"{file}: may not be read by this user" in _first_of(shop, monkeypatch, *arguments)


def _refused(self: Path, *arguments: object, **named: object) -> object:
    if self.name == "secret.toml":
        raise PermissionError(13, "Permission denied", str(self))
    return open(self, *arguments, **named)  # type: ignore[call-overload]  # noqa: PTH123 - as Path.open


def _first_of(shop: Shop, monkeypatch: pytest.MonkeyPatch, *arguments: str) -> list[str]:
    assert run(arguments) == 3
    return shop._capsys.readouterr().err.splitlines()


@pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="platform: no named pipes")
def test_a_device_without_end_is_not_read_to_its_end(shop: Shop) -> None:
    assert shop.refuses(3, "plan", "/dev/zero") == ["/dev/zero: is larger than 64 KiB, which no such file is"]


def test_all_files_of_a_check_are_told_of_and_the_good_ones_named(shop: Shop, capsys: Printed) -> None:
    one, two = shop.put("one.toml", ""), shop.put("two.toml", "[")
    assert run(["recipe", "check", one, shop.recipe, two]) == 3
    shown = capsys.readouterr()
    assert shown.err.splitlines() == [
        f"{one}: is empty",
        f"{two}:1:2: is not valid TOML: Invalid initial character for a key part",
    ]
    assert shown.out.startswith(f"{shop.recipe}: good: Sample, ")


@pytest.mark.parametrize(
    ("code", "arguments", "expected"),
    OPTIONS,
    ids=lambda value: " ".join(value) if isinstance(value, tuple) else None,
)
def test_options_that_cannot_be(shop: Shop, code: int, arguments: tuple[str, ...], expected: str) -> None:
    places_of = {"recipe": shop.recipe, "book": shop.book, "profile": shop.profile, "readings": shop.readings}
    shown = shop.refuses(code, *(argument.format(**places_of) for argument in arguments))
    assert expected in "\n".join(shown), shown


@pytest.mark.parametrize(("recipe", "profile", "expected"), REFUSALS, ids=lambda value: value[:24])
def test_a_good_recipe_on_a_good_machine_that_do_not_go_together(
    shop: Shop, recipe: str, profile: str, expected: str
) -> None:
    text = GOOD
    if recipe:
        key = recipe.split(" = ")[0]
        text = "\n".join(recipe if line.startswith(f"{key} =") else line for line in GOOD.splitlines())
    files = shop.put("r.toml", text), shop.put("m.toml", PROFILE + profile + "\n")
    shown = shop.refuses(3, "plan", files[0], "--machine", files[1])
    assert any(line.startswith(expected) for line in shown), shown
    wind = ("wind", files[0], "--machine", files[1], "--port", "virtual", "--book", shop.book, "--no-input")
    assert shop.refuses(3, *wind) == shown
