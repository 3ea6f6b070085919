"""Which libraries are loaded by what: each in a fresh process, as an import is for the whole process."""

from __future__ import annotations

import json
import pkgutil
import subprocess
import sys
import time

import pytest

import windctl

HEAVY_FOR_HELP = ["textual", "numpy", "pydantic", "sqlalchemy", "serial", "scipy"]


def loaded_after(code: str, names: list[str]) -> list[str]:
    """Which of `names` a fresh process has loaded after running `code` (its output is discarded)."""
    tail = f"\nimport sys, json\nprint('\\n' + json.dumps([n for n in {names!r} if n in sys.modules]))"
    done = subprocess.run(
        [sys.executable, "-c", code + tail], capture_output=True, text=True, timeout=60, check=False
    )
    assert done.returncode == 0, done.stderr
    loaded: list[str] = json.loads(done.stdout.splitlines()[-1])
    return loaded


def every_module() -> list[str]:
    """All modules of the package, by walking its folders."""
    return [
        module.name
        for module in pkgutil.walk_packages(windctl.__path__, "windctl.")
        if "__main__" not in module.name
    ]


def test_nothing_loads_the_serial_library_but_the_serial_port_and_nothing_loads_the_terminal_library() -> (
    None
):
    modules = [name for name in every_module() if name != "windctl.machine.serial_port"]
    assert len(modules) > 30
    imports = "\n".join(f"import {name}" for name in modules)
    assert loaded_after(imports, ["serial", "textual"]) == []


def test_the_check_above_can_fail() -> None:
    assert loaded_after("import serial", ["serial", "textual"]) == ["serial"]


@pytest.mark.parametrize(
    "arguments",
    [["--help"], ["--version"], [], ["wind", "--help"], ["coils", "--help"], ["coils", "list", "--help"]],
    ids=" ".join,
)
def test_help_loads_nothing_heavy(arguments: list[str]) -> None:
    code = f"from windctl.cli.main import run\nassert run({arguments!r}) == 0"
    assert loaded_after(code, HEAVY_FOR_HELP) == []


def test_help_is_quick() -> None:
    """A bare interpreter with click takes about 35 ms; the bound leaves room for a slow, busy computer."""

    def once() -> float:
        begun = time.perf_counter()
        subprocess.run(
            [sys.executable, "-m", "windctl", "--help"], capture_output=True, check=True, timeout=60
        )
        return time.perf_counter() - begun

    assert min(once() for _ in range(5)) < 0.5
