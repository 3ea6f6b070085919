"""Builds the firmware's core with whatever compilers this computer has.

    python -m tests.firmware.build FOLDER     the core as a shared library, FOLDER/libwindctl.so

A compiler that is missing is a `MissingTool`; conftest.py makes of it a skip that says so, in CI a failure.
"""

from __future__ import annotations

import atexit
import shutil
import subprocess
import sys
import tempfile
from collections.abc import Sequence
from functools import cache
from pathlib import Path
from typing import Final

ROOT: Final = Path(__file__).parents[2]
HERE: Final = Path(__file__).parent
CORE: Final = ROOT / "firmware_protocol" / "core"
HOST: Final = ROOT / "firmware_protocol" / "ports" / "host"

WARNINGS: Final = (
    "-std=c99", "-pedantic", "-Wall", "-Wextra", "-Wconversion", "-Wsign-conversion", "-Wshadow",
    "-Wmissing-prototypes", "-Werror",
)  # fmt: skip
AVR: Final = ("-mmcu=atmega328p", "-Os")
PACKAGES: Final = {"cc": "gcc", "gcc": "gcc", "clang": "clang", "avr-gcc": "gcc-avr avr-libc"}
LIBRARIES: Final = {"yasimavr": "pip install yasimavr, which is built with Debian's g++ and libelf-dev"}


class MissingTool(Exception):
    """A compiler that is not on this computer."""

    def __init__(self, tool: str) -> None:
        self.tool = tool
        where = LIBRARIES.get(tool, f"Debian: {PACKAGES.get(tool, tool)}")
        super().__init__(f"no {tool} on this computer ({where})")


class BuildError(Exception):
    """A compiler's complaint."""


def core_sources() -> list[Path]:
    """Every module of the core."""
    return sorted(CORE.glob("*.c"))


def find(tool: str) -> str:
    """The program's path. Raises MissingTool."""
    found = shutil.which(tool)
    if found is None:
        raise MissingTool(tool)
    return found


def run(tool: str, arguments: Sequence[str | Path], *, cwd: Path | None = None) -> str:
    """Runs a compiler or binary tool; returns what it printed. Raises BuildError with its complaint."""
    command = [find(tool), *map(str, arguments)]
    done = subprocess.run(command, capture_output=True, text=True, timeout=120, check=False, cwd=cwd)
    if done.returncode:
        raise BuildError(f"{tool} {' '.join(map(str, arguments))}\n{done.stderr}")
    return done.stdout


def includes() -> list[str]:
    """Where the headers are."""
    return [f"-I{folder}" for folder in (CORE, HOST, HERE)]


def library(folder: Path, queue: int = 128, tool: str = "cc", flags: Sequence[str] = ("-O2",)) -> Path:
    """The core, the host's port and the player of traces as a shared library."""
    built = folder / "libwindctl.so"
    sources = [*core_sources(), HOST / "windctl_host.c", HERE / "play.c"]
    define = f"-DWINDCTL_QUEUE={queue}"
    run(tool, ["-std=c99", *flags, *includes(), define, "-fPIC", "-shared", "-o", built, *sources])
    return built


def objects(folder: Path, tool: str = "cc", flags: Sequence[str] = ("-O0",)) -> dict[str, Path]:
    """Every module of the core and of the player, compiled apart; by file name."""
    built: dict[str, Path] = {}
    for source in [*core_sources(), HOST / "windctl_host.c", HERE / "play.c", HERE / "play_main.c"]:
        built[source.name] = folder / f"{source.stem}.o"
        run(tool, [*flags, "-std=c99", *includes(), "-c", source, "-o", built[source.name]])
    return built


@cache
def chip_elf(variant: str = "full", more: str = "") -> Path:
    """The program of the ATmega328P, built by its own Makefile. Raises MissingTool."""
    find("avr-gcc")
    folder = Path(tempfile.mkdtemp(prefix="windctl-chip-"))
    atexit.register(shutil.rmtree, folder, ignore_errors=True)
    run(
        "make",
        ["-C", ROOT / "firmware_protocol/ports/avr", f"VARIANT={variant}", f"BUILD={folder}", f"MORE={more}"],
    )
    return next(folder.glob("*.elf"))


@cache
def shared_library(queue: int = 128) -> Path:
    """The library, built once in this process and thrown away at its end."""
    folder = Path(tempfile.mkdtemp(prefix="windctl-core-"))
    atexit.register(shutil.rmtree, folder, ignore_errors=True)
    return library(folder, queue)


if __name__ == "__main__":
    target = Path(sys.argv[1])
    target.mkdir(parents=True, exist_ok=True)
    print(library(target))
