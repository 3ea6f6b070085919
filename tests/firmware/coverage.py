"""Which lines of the core a trace runs through, by gcc's own coverage."""

from __future__ import annotations

import gzip
import json
import shutil
import subprocess
from pathlib import Path

from tests.firmware.build import CORE, objects, run


def missed_lines(folder: Path, trace: Path) -> tuple[list[str], int]:
    """Lines of the core's own modules that were never run, as file:line: text, and how many there are in all.

    The generated codec is left out: a board packs half of its messages and unpacks the other half.
    """
    built = objects(folder, "gcc", ("-O0", "--coverage"))
    program = folder / "play"
    run("gcc", ["--coverage", "-o", program, *built.values()])
    done = subprocess.run([program, trace], capture_output=True, text=True, timeout=120, check=False)
    assert done.returncode == 0, done.stdout
    missed: list[str] = []
    total = 0
    gcov = shutil.which("gcov")
    assert gcov is not None, "gcov comes with gcc"
    for module in sorted(CORE.glob("*.c")):
        if module.name == "windctl_messages.c":
            continue
        subprocess.run(
            [gcov, "--json-format", f"{module.stem}.gcda"],
            cwd=folder,
            capture_output=True,
            check=True,
            timeout=60,
        )
        [found] = folder.glob(f"*{module.stem}*.gcov.json.gz")
        text = module.read_text(encoding="utf-8").splitlines()
        for file in json.loads(gzip.decompress(found.read_bytes()))["files"]:
            if Path(file["file"]).name == module.name:
                total += len(file["lines"])
                missed += [
                    f"{module.name}:{line['line_number']}: {text[line['line_number'] - 1].strip()}"
                    for line in file["lines"]
                    if line["count"] == 0
                ]
    return missed, total
