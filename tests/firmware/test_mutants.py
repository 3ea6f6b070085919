"""The twin test is worth something: a core that is broken on purpose, in one line, is caught by it."""

from __future__ import annotations

import subprocess
from pathlib import Path

import pytest

from tests.firmware.build import CORE, HERE, includes, objects, run
from tests.firmware.mutants import MUTANTS, Mutant
from tests.firmware.recording import Recorded

TIMEOUT_S = 30  # a mutant may go round for ever; that shows too


def names() -> list[str]:
    return [mutant.what for mutant in MUTANTS]


@pytest.fixture(scope="module")
def kept(cc: str, recorded: Recorded, tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A folder with the core's modules compiled, unbroken, and the trace."""
    folder = tmp_path_factory.mktemp("mutants")
    objects(folder, cc, ("-O1",))
    (folder / "trace").write_bytes(recorded.trace.data)
    return folder


def played(folder: Path, program: Path) -> tuple[int, str]:
    """Exit code and word of the player."""
    done = subprocess.run(
        [program, folder / "trace"], capture_output=True, text=True, timeout=TIMEOUT_S, check=False
    )
    return done.returncode, done.stdout.strip()


def test_there_are_at_least_thirty_and_each_is_one_place() -> None:
    assert len(MUTANTS) >= 30
    assert len(set(names())) == len(MUTANTS)
    for mutant in MUTANTS:
        text = (CORE / f"windctl_{mutant.module}.c").read_text(encoding="utf-8")
        assert text.count(mutant.old) == 1, mutant.what


def test_the_unbroken_core_passes(cc: str, kept: Path) -> None:
    run(cc, ["-o", kept / "play", *kept.glob("*.o")])
    assert played(kept, kept / "play") == (0, f"-1 of {ticks_of(kept)}")


def ticks_of(folder: Path) -> str:
    """How many ticks the unbroken core plays."""
    return played(folder, folder / "play")[1].rpartition(" ")[2]


@pytest.mark.parametrize("mutant", MUTANTS, ids=names())
def test_it_is_caught(mutant: Mutant, cc: str, kept: Path, tmp_path: Path) -> None:
    name = f"windctl_{mutant.module}"
    text = (CORE / f"{name}.c").read_text(encoding="utf-8")
    assert text.count(mutant.old) == 1
    source = tmp_path / f"{name}.c"
    source.write_text(text.replace(mutant.old, mutant.new), encoding="utf-8")
    others = [built for built in kept.glob("*.o") if built.stem != name]
    program = tmp_path / "play"
    run(cc, ["-std=c99", "-O1", *includes(), f"-I{HERE}", "-o", program, source, *others])
    try:
        code, word = played(kept, program)
    except subprocess.TimeoutExpired:
        code, word = -1, "does not end"
    print(f"{mutant.what}: {word}")
    assert code != 2, "the trace could not be read"
    assert code != 0, f"not caught: {mutant.what}"
