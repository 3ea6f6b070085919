"""Which libraries are loaded by what: each in a fresh process, as an import is for the whole process."""

from __future__ import annotations

import json
import pkgutil
import subprocess
import sys
from pathlib import Path

import pytest

import windctl

ROOT = Path(__file__).parents[1]
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
    modules = [
        name
        for name in every_module()
        if name != "windctl.machine.serial_port" and not name.startswith("windctl.tui")
    ]
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


def cpu_s(*arguments: str) -> float:
    """Processor time of an interpreter with these arguments, the least of several: what a busy computer does
    besides hardly shows in it."""

    resource = pytest.importorskip("resource", reason="platform: resource usage is of POSIX")

    def once() -> float:
        before = resource.getrusage(resource.RUSAGE_CHILDREN)
        subprocess.run([sys.executable, *arguments], capture_output=True, check=True, timeout=60)
        after = resource.getrusage(resource.RUSAGE_CHILDREN)
        return after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime

    return min(once() for _ in range(5))


def test_help_costs_less_than_five_bare_interpreters_and_plan_less_than_a_hundred() -> None:
    bare = cpu_s("-c", "")
    assert cpu_s("-m", "windctl", "--help") < 5 * bare
    assert cpu_s("-m", "windctl", "plan", str(ROOT / "recipes/bridge-single-to-turns.toml")) < 100 * bare
