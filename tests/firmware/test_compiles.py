"""The core compiles clean everywhere, asks nothing of its surroundings, and fits the target."""

from __future__ import annotations

import re
import sys
from collections.abc import Callable, Sequence
from graphlib import TopologicalSorter
from pathlib import Path

import pytest

from tests.firmware.build import AVR, CORE, HOST, WARNINGS, core_sources, includes, run

# What a freestanding C compiler may call by itself: gcc's manual, section "Language Standards", lists these.
COMPILERS_OWN = {"memcpy", "memmove", "memset", "memcmp"}

# Where the core divides, and what for: never in a tick in which nothing but counts, steps and samples come.
DIVIDES = {
    "windctl_set_up": "a Setup came",
    "windctl_spindle_configure": "a Setup came",
    "windctl_guide_line:begin": "for the one segment that SetDatum began inside",
    "windctl_spindle_steps_to": "a stop is aimed at: a command, a check, a coarse count",
    "windctl_spindle_nearest_stand": "a StopAt came",
    "windctl_turns_passed": "a turn ended",
    "windctl_mean_value": "a reading ended",
    "windctl_judge": "a Measure came",
}


def compile_core(compiler: str, flags: Sequence[str], folder: Path) -> list[Path]:
    """Compiles every module of the core; returns the objects."""
    run(compiler, [*flags, *includes(), "-c", *core_sources()], cwd=folder)
    return sorted(folder.glob("*.o"))


@pytest.mark.parametrize("name", ["gcc", "clang", "avr-gcc"])
def test_it_compiles_without_a_warning(name: str, tool: Callable[[str], str], tmp_path: Path) -> None:
    target = AVR if name == "avr-gcc" else ("-O2",)
    compile_core(tool(name), [*WARNINGS, "-ffreestanding", *target], tmp_path)


@pytest.mark.parametrize("name", ["gcc", "clang"])
def test_the_host_port_compiles_without_a_warning(
    name: str, tool: Callable[[str], str], tmp_path: Path
) -> None:
    run(tool(name), [*WARNINGS, *includes(), "-c", HOST / "windctl_host.c", "-o", tmp_path / "host.o"])


def test_it_includes_no_header_but_stdint() -> None:
    for file in (*CORE.glob("*.c"), *CORE.glob("*.h")):
        system = re.findall(r"#\s*include\s*<([^>]+)>", file.read_text(encoding="utf-8"))
        assert set(system) <= {"stdint.h"}, file.name


def test_it_calls_nothing_outside_itself(cc: str, tmp_path: Path) -> None:
    symbols = run("nm", compile_core(cc, [*WARNINGS, "-ffreestanding", "-O2"], tmp_path))
    begins = "_" if sys.platform == "darwin" else ""  # what the platform puts before a name of C
    defined = set(re.findall(rf"^\S+ [TtRrDdBbSs] {begins}(\w+)$", symbols, re.MULTILINE))
    wanted = set(re.findall(rf"^\s+U {begins}(\w+)$", symbols, re.MULTILINE))
    assert "windctl_tick" in defined
    assert wanted - defined <= COMPILERS_OWN
    # No memory of its own either: everything is in the struct that is handed in.
    assert not re.findall(r"^\S+ [DdBbC] (\w+)$", symbols, re.MULTILINE)


def test_it_neither_floats_nor_allocates() -> None:
    for file in (*CORE.glob("*.c"), *CORE.glob("*.h")):
        code = re.sub(r"/\*.*?\*/", "", file.read_text(encoding="utf-8"), flags=re.DOTALL)
        assert not re.search(r"\b(float|double|malloc|calloc|free\s*\(|goto|setjmp)\b", code), file.name


@pytest.fixture(scope="module")
def calls(tool: Callable[[str], str], tmp_path_factory: pytest.TempPathFactory) -> dict[str, set[str]]:
    """Who calls whom on the chip, from the disassembly. A static function is named file:function."""
    flags = [*AVR, "-std=c99", "-ffunction-sections"]
    built = compile_core(tool("avr-gcc"), flags, tmp_path_factory.mktemp("avr"))
    called: dict[str, set[str]] = {}
    for module in built:
        shared = set(re.findall(r"^\S+ T (\w+)$", run("avr-nm", [module]), re.MULTILINE))

        def full(name: str, module: Path = module, shared: set[str] = shared) -> str:
            own = name.removeprefix(".text.")
            return own if own in shared or own == name else f"{module.stem}:{own}"

        function = ""
        for line in run("avr-objdump", ["-dr", module]).splitlines():
            if head := re.match(r"^Disassembly of section (\.text\.\w+):$", line):
                function = full(head[1])
                called[function] = set()
            elif target := re.search(r"R_AVR_(?:CALL|13_PCREL)\s+(\.text\.\w+|\w+)$", line):
                called[function].add(full(target[1]))
    return called


def test_nothing_in_it_calls_itself_by_any_way(calls: dict[str, set[str]]) -> None:
    order = TopologicalSorter(calls).static_order()  # raises CycleError, with the circle
    assert "windctl_tick" in set(order)


def test_on_the_chip_it_divides_only_where_it_says(calls: dict[str, set[str]]) -> None:
    divides = {name for name, called in calls.items() if any(re.match("__u?div", c) for c in called)}
    assert divides <= set(DIVIDES)
    assert "windctl_mean_value" in divides  # the search finds what is there


def test_its_memory_leaves_room_on_a_chip_with_2_kilobytes(
    tool: Callable[[str], str], tmp_path: Path
) -> None:
    source = tmp_path / "size.c"
    source.write_text(
        '#include "windctl_core.h"\nchar core[sizeof(struct windctl_core)];\n', encoding="utf-8"
    )
    run(tool("avr-gcc"), [*AVR, "-std=c99", *includes(), "-c", source, "-o", tmp_path / "size.o"])
    [size] = re.findall(r"^\S+ (\S+) . core$", run("avr-nm", ["-S", tmp_path / "size.o"]), re.MULTILINE)
    print(f"struct windctl_core: {int(size, 16)} bytes on the ATmega328P")
    assert int(size, 16) <= 1250
