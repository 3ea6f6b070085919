"""Fuzzes the core with libFuzzer, AddressSanitizer and UndefinedBehaviorSanitizer.

    python -m tests.firmware.fuzz --seconds 60 [--keep FOLDER] [--seed N]

Needs clang with its sanitizer runtime (Debian: clang libclang-rt-dev). With --keep the corpus stays in FOLDER
and the next run goes on from it; what was found lies there too. Exit code 0: nothing was found.
"""

from __future__ import annotations

import argparse
import struct
import subprocess
import sys
import tempfile
from pathlib import Path

from tests.firmware.build import HOST, core_sources, find, includes, run

HERE = Path(__file__).parent
SANITIZERS = ("-fsanitize=fuzzer,address,undefined,integer-divide-by-zero", "-fno-sanitize-recover=all")


def build(folder: Path, flags: tuple[str, ...] = ()) -> Path:
    """The fuzzer, FOLDER/fuzz. Raises MissingTool or BuildError."""
    built = folder / "fuzz"
    sources = [*core_sources(), HOST / "windctl_host.c", HERE / "fuzz.c"]
    run("clang", ["-std=c99", "-g", "-O1", *SANITIZERS, *flags, *includes(), "-o", built, *sources])
    return built


def seeds() -> list[bytes]:
    """Inputs that get to where it turns, by hand and driven, guided and not, for the fuzzer to begin from."""
    inputs = []
    for fitted in (0x07, 0x01, 0x00, 0x3F):
        ready = b"\xff\x00\x0a" + bytes((7, 0, 0, 0, 0, 0, 0, 0))
        ready += struct.pack("<BHH", 9, 399, 399)  # Setup: token, counts and steps per turn
        ready += struct.pack("<HB8HBB", 60_000, 3, 8000, 2000, 4000, 4000, 4000, 20, 20, 0, fitted, 1)
        ready += struct.pack("<HHIiiIH", 0, 0, 7, 0, 0, 0, 0)  # SetDatum
        ready += bytes(4) + struct.pack("<HHH", 0, 0, 6000)  # Arm, Pace
        lay = b"\x0b" + struct.pack("<IIB", 0, 0, 12) + struct.pack("<Hh", 400, 14) * 12
        measure = b"\x01\x0c" + struct.pack("<HH", 100, 200)
        stop = b"\x01\x07" + struct.pack("<HHI", 0, 0, 3000)
        go = b"\x0c" + bytes(4) + b"\xff"
        ticks = b"\x0e" + struct.pack("<H", 1000) + b"\x0d"
        inputs.append(ready + lay * 3 + measure + go + lay + stop + ticks * 3 + b"\x04\x1c" + ticks)
        inputs.append(ready + lay * 12 + go + b"\x01\x09" + ticks + b"\x05\x64\x00" * 20 + ticks)
        guide_to = b"\x01\x0a" + struct.pack("<HHiH", 0, 0, 40, 3000) + ticks
        back = b"\x01\x0a" + struct.pack("<HHiH", 0, 0, 0, 3000) + ticks
        inputs.append(ready + guide_to + go + back + b"\x04\x1f" + ticks + go + b"\x04\x1b" + ticks)
        clear = b"\x01\x0d" + bytes(4)
        trip = go + b"\x06" + struct.pack("<HHh", 0xFFFF, 900, 2100) + ticks + b"\x04\x19" + b"\x04\x1b"
        inputs.append(ready + lay + measure + trip + ticks + clear + b"\x01\x03" + bytes(4) + go + ticks)
    return inputs


def fuzz(folder: Path, seconds: int, seed: int = 1) -> tuple[int, str]:
    """Runs a built fuzzer for so long; returns its exit code and what it said."""
    corpus = folder / "corpus"
    corpus.mkdir(exist_ok=True)
    for place, seeding in enumerate(seeds()):
        (corpus / f"seed-{place}").write_bytes(seeding)
    command = [
        folder / "fuzz", corpus, f"-max_total_time={seconds}", f"-seed={seed}", "-max_len=2048",
        "-timeout=10", f"-artifact_prefix={folder}/", "-print_final_stats=1", "-verbosity=1",
    ]  # fmt: skip
    done = subprocess.run(
        command, capture_output=True, text=True, timeout=seconds + 120, check=False, errors="replace"
    )
    return done.returncode, done.stderr


def main(arguments: list[str] | None = None) -> int:
    """Command line; returns the exit code."""
    parser = argparse.ArgumentParser(prog="python -m tests.firmware.fuzz", description="Fuzzes the C core.")
    parser.add_argument("--seconds", type=int, default=60)
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--keep", type=Path, help="folder for program, corpus and findings")
    given = parser.parse_args(arguments)
    find("clang")
    with tempfile.TemporaryDirectory(prefix="windctl-fuzz-") as own:
        folder = given.keep or Path(own)
        folder.mkdir(parents=True, exist_ok=True)
        build(folder)
        code, said = fuzz(folder, given.seconds, given.seed)
    print("\n".join(said.splitlines()[-40 if code else -6 :]))
    return 1 if code else 0


if __name__ == "__main__":
    sys.exit(main())
