"""`windctl diagnose`, `machine ports`, and the log that turns over."""

from __future__ import annotations

import json
import os
import zipfile
from pathlib import Path

import pytest

from tests.cli import recipes
from tests.cli.processes import served
from windctl.cli.main import run
from windctl.desk import log, places
from windctl.machine import ports_listed
from windctl.machine.port_lock import PortLock, holder_of
from windctl.machine.ports_listed import ListedPort

Printed = pytest.CaptureFixture[str]


def gathered(file: Path) -> dict[str, str]:
    """What is in a zip, by name."""
    with zipfile.ZipFile(file) as held:
        assert held.testzip() is None
        return {name: held.read(name).decode() for name in held.namelist()}


def test_after_a_coil_on_a_served_board_everything_is_in_it(tmp_path: Path, capsys: Printed) -> None:
    recipe, book = recipes.to_turns(tmp_path, turns=30), tmp_path / "coils.book"
    with served(recipe, speed=8.0) as (url, _):  # its board is silent after a quarter of a second of ours
        assert run(["wind", str(recipe), "--port", url, "--book", str(book), "--no-input", "-q"]) == 0
    file = tmp_path / "report.zip"
    capsys.readouterr()
    assert run(["diagnose", "--out", str(file), "--book", str(book), "--json"]) == 0
    told = json.loads(capsys.readouterr().out)
    held = gathered(file)
    assert told == {"format": 1, "file": str(file), "holds": list(held)}
    versions = json.loads(held["versions.json"])
    assert versions["libraries"]["pyserial"] != "not found"
    assert json.loads(held["machine.json"])["profile"]["name"] == "virtual"
    assert json.loads(held["book.json"])["coils"] == 1
    line = held["line.txt"]
    assert url in line.splitlines()[0]
    for said in ("Greet(", "Identity(", "Setup(", "Lay(", "Go(", "Status(", "Reading("):
        assert said in line
    assert "bad frames" not in line
    assert f"opened {url}" in held["log/windctl.log"]
    assert "coil v1-" in held["log/windctl.log"]
    assert "demo small coil" not in held["versions.json"] + held["machine.json"] + held["book.json"]


def test_on_a_computer_that_has_done_nothing_yet(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    assert run(["diagnose"]) == 0
    (file,) = tmp_path.glob("windctl-*.zip")
    held = gathered(file)
    assert json.loads(held["book.json"]) == {"file": None}
    assert held["line.txt"].startswith("not to be had: ")


def test_what_is_broken_is_told_in_its_place(tmp_path: Path) -> None:
    places.machines_folder().mkdir(parents=True)
    (places.machines_folder() / "north.toml").write_bytes(b"\xff\xfe broken")
    places.settings_file().write_text('machine = "north"\n', encoding="utf-8")
    book = tmp_path / "coils.book"
    book.write_text("this is no book", encoding="utf-8")
    file = tmp_path / "report.zip"
    assert run(["diagnose", "--out", str(file), "--book", str(book)]) == 0
    held = gathered(file)
    assert held["machine.json"].startswith("not to be had: ")
    assert held["book.json"].startswith("not to be had: ")
    assert "broken" in held["machines/north.toml"]


def test_nothing_is_written_over_and_nothing_half_written(tmp_path: Path, capsys: Printed) -> None:
    file = tmp_path / "report.zip"
    file.write_text("mine", encoding="utf-8")
    assert run(["diagnose", "--out", str(file)]) == 2
    assert file.read_text(encoding="utf-8") == "mine"
    assert "is there already" in capsys.readouterr().err
    assert run(["diagnose", "--out", str(tmp_path / "nowhere" / "report.zip")]) == 1
    assert "No such file" in capsys.readouterr().err


def test_a_zip_that_cannot_be_finished_is_taken_away(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def full(*_: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(zipfile.ZipFile, "writestr", full)
    assert run(["diagnose", "--out", str(tmp_path / "report.zip")]) == 1
    assert list(tmp_path.iterdir()) == []


def test_ports_say_whose_they_are_and_who_has_them(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: Printed
) -> None:
    found = [
        ListedPort("/dev/ttyUSB7", "USB serial", 0x1A86, 0x7523, "A1"),
        ListedPort("/dev/ttyS9", "", None, None, ""),
    ]
    monkeypatch.setattr(ports_listed, "listed_ports", lambda: found)
    folder = places.machines_folder()
    folder.mkdir(parents=True)
    (folder / "north.toml").write_text('format = 1\n[port]\nurl = "/dev/ttyUSB7"\n', encoding="utf-8")
    (folder / "south.toml").write_text("format = 3\n", encoding="utf-8")
    lock = PortLock("/dev/ttyUSB7", coil="v1-2026-0007")
    try:
        assert run(["machine", "ports", "--json"]) == 0
        usb, plain = json.loads(capsys.readouterr().out)["ports"]
        assert (usb["port"], usb["usb"], usb["serial_number"]) == ("/dev/ttyUSB7", "1a86:7523", "A1")
        assert usb["machines"] == ["north"]
        assert (usb["in_use"]["pid"], usb["in_use"]["coil"]) == (os.getpid(), "v1-2026-0007")
        assert plain["in_use"] is None
        assert plain["machines"] == []
        assert run(["machine", "ports"]) == 0
        shown = capsys.readouterr().out.splitlines()
        assert shown[1].split() == ["/dev/ttyUSB7", "USB", "serial", "1a86:7523", "north", "in", "use"]
    finally:
        lock.release()
    assert holder_of("/dev/ttyUSB7") is None
    monkeypatch.setattr(ports_listed, "listed_ports", list)
    assert run(["machine", "ports"]) == 0
    assert "no serial port is there" in capsys.readouterr().err


def test_asking_who_has_a_port_leaves_no_file(tmp_path: Path) -> None:
    assert holder_of("/dev/ttyUSB8", tmp_path) is None
    assert list(tmp_path.iterdir()) == []


def test_the_log_turns_over_and_keeps_four_files_of_half_a_megabyte() -> None:
    for number in range(3000):
        log.note(f"{number:6} " + "x" * 1000)
    folder = places.log_file().parent
    sizes = {file.name: file.stat().st_size for file in folder.iterdir()}
    assert set(sizes) == {"windctl.log", "windctl.log.1", "windctl.log.2", "windctl.log.3"}
    assert max(sizes.values()) <= 500_000
    assert "  2999 " in places.log_file().read_text(encoding="utf-8").splitlines()[-1]


def test_where_no_log_can_be_kept_the_work_goes_on(home: Path, tmp_path: Path) -> None:
    places.log_file().parent.parent.mkdir(parents=True, exist_ok=True)
    places.log_file().parent.write_text("a file where the folder should be", encoding="utf-8")
    log.note("heard by nobody")
    assert log.start_log() is None
