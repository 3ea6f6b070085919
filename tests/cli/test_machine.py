"""`windctl machine`: which machines there are, and the virtual board as a process of its own."""

from __future__ import annotations

import json
import os
import signal
import socket
from pathlib import Path

import pytest

from tests.cli import recipes
from tests.cli.processes import answer, begun, call
from windctl.cli.main import run
from windctl.desk import places

Printed = pytest.CaptureFixture[str]


def keep(name: str, text: str) -> None:
    """A profile in the user's folder."""
    folder = places.machines_folder()
    folder.mkdir(parents=True, exist_ok=True)
    (folder / f"{name}.toml").write_text(text, encoding="utf-8")


def test_list_names_the_virtual_one_and_those_that_are_kept(capsys: Printed) -> None:
    keep("north", 'format = 1\nname = "north"\nbench = "b1"\n[port]\nurl = "/dev/ttyUSB0"\n')
    keep("broken", "format = 1\nbench = 3\n")
    places.settings_file().write_text('machine = "north"\n', encoding="utf-8")
    assert run(["machine", "list", "--json"]) == 0
    machines = {one["machine"]: one for one in json.loads(capsys.readouterr().out)["machines"]}
    assert list(machines) == ["virtual", "broken", "north"]
    assert machines["north"]["port"] == "/dev/ttyUSB0"
    assert [name for name, one in machines.items() if one["usual"]] == ["north"]
    assert "broken.toml:2" in machines["broken"]["problem"]
    assert run(["machine", "list"]) == 0
    assert "*  north" in capsys.readouterr().out


def test_a_served_board_says_where_it_is_and_winds_a_coil(tmp_path: Path) -> None:
    recipe = str(recipes.to_turns(tmp_path, 12))
    options = ("--machine", "virtual", "--recipe", recipe, "--speed", "2", "--plant-seed", "4")
    with begun("machine", "serve", *options) as server:
        assert server.stdout is not None
        url = server.stdout.readline().strip()
        assert url.startswith("socket://127.0.0.1:")
        book = str(tmp_path / "shop.book")
        done = call(
            "wind", recipe, "--machine", "virtual", "--port", url, "--book", book, "--no-input", "--json"
        )
        assert done.returncode == 0, done.stderr
        assert answer(done)["turns"] == 12
        server.send_signal(signal.SIGTERM)
        assert server.wait(10) == 0


@pytest.mark.skipif(not hasattr(os, "openpty"), reason="platform: pseudo-terminals are of POSIX")
def test_a_pseudo_terminal_opens_like_a_device() -> None:
    with begun("machine", "serve", "--machine", "virtual", "--pty") as server:
        assert server.stdout is not None
        device = Path(server.stdout.readline().strip())
        assert device.is_char_device()
        server.send_signal(signal.SIGINT)
        assert server.wait(10) == 0


def test_an_address_that_is_none_is_a_usage_error(capsys: Printed) -> None:
    assert run(["machine", "serve", "--machine", "virtual", "--tcp", "localhost"]) == 2
    assert "HOST:PORT" in capsys.readouterr().err


def test_a_taken_port_is_a_busy_machine(capsys: Printed) -> None:
    with socket.create_server(("127.0.0.1", 0)) as taken:
        address = f"127.0.0.1:{taken.getsockname()[1]}"
        assert run(["machine", "serve", "--machine", "virtual", "--tcp", address]) == 4
    assert "another port" in capsys.readouterr().err


def test_a_served_machine_cannot_run_as_fast_as_possible(capsys: Printed) -> None:
    assert run(["machine", "serve", "--machine", "virtual", "--speed", "0"]) == 2
    assert "above 0" in capsys.readouterr().err


def test_two_hosts_cannot_have_one_port(tmp_path: Path) -> None:
    recipe = str(recipes.to_turns(tmp_path, 40))
    with begun("machine", "serve", "--machine", "virtual", "--recipe", recipe) as server:
        assert server.stdout is not None
        url = server.stdout.readline().strip()
        common = ("wind", recipe, "--machine", "virtual", "--port", url, "--no-input")
        with begun(*common, "--book", str(tmp_path / "a.book")) as first:
            assert first.stderr is not None
            while "turning:" not in first.stderr.readline():
                assert first.poll() is None
            second = call(*common, "--book", str(tmp_path / "b.book"))
            assert second.returncode == 4, second.stderr
            first.send_signal(signal.SIGINT)
            first.communicate(timeout=20)
            assert first.returncode == 130
