"""The fuzzer runs and finds nothing in the core, and does find what is broken in it on purpose.

The long search is `python -m tests.firmware.fuzz --seconds 600`.
"""

from __future__ import annotations

import subprocess
from collections.abc import Callable
from pathlib import Path

from tests.firmware.build import CORE, HOST, core_sources, includes, run
from tests.firmware.build import HERE as TESTS
from tests.firmware.fuzz import __main__ as fuzzer
from tests.firmware.recording import Recorded

SECONDS = 4


def test_nothing_is_found_in_a_short_search(tool: Callable[[str], str], tmp_path: Path) -> None:
    tool("clang")
    fuzzer.build(tmp_path)
    code, said = fuzzer.fuzz(tmp_path, SECONDS)
    assert code == 0, said
    assert "Done" in said


def test_the_recorded_ticks_do_nothing_undefined(
    tool: Callable[[str], str], recorded: Recorded, tmp_path: Path
) -> None:
    compiler = tool("clang")
    sources = [*core_sources(), HOST / "windctl_host.c", TESTS / "play.c", TESTS / "play_main.c"]
    flags = ["-std=c99", "-g", "-O1", "-fsanitize=address,undefined", "-fno-sanitize-recover=all"]
    run(compiler, [*flags, *includes(), "-o", tmp_path / "play", *sources])
    trace = tmp_path / "trace"
    trace.write_bytes(recorded.trace.data)
    done = subprocess.run(
        [tmp_path / "play", trace], capture_output=True, text=True, timeout=120, check=False
    )
    assert done.returncode == 0, done.stderr[-2000:]


def test_a_queue_without_an_end_is_found(tool: Callable[[str], str], tmp_path: Path) -> None:
    text = (CORE / "windctl_commands.c").read_text(encoding="utf-8")
    broken = text.replace("if (next.n > free) {", "if (0 && next.n > free) {")
    assert broken != text
    source = tmp_path / "windctl_commands.c"
    source.write_text(broken, encoding="utf-8")
    others = [module for module in core_sources() if module.name != source.name]
    run(
        tool("clang"),
        ["-std=c99", "-g", "-O1", *fuzzer.SANITIZERS, *includes(), "-o", tmp_path / "fuzz", source, *others,
         HOST / "windctl_host.c", fuzzer.HERE / "fuzz.c"],
    )  # fmt: skip
    code, said = fuzzer.fuzz(tmp_path, SECONDS)
    assert code != 0
    assert "queue within its places" in said
