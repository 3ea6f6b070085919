"""How long the report of one coil takes, once its book is open, and as a command of its own."""

from __future__ import annotations

import subprocess
import sys
import tempfile
import time
from pathlib import Path

from windctl.book.open import open_book
from windctl.desk.papers import coil_facts, labels_of
from windctl.paper.label import Sheet, label_sheets
from windctl.paper.report import coil_report

TURNS = 8000
ROUNDS = 5
RECIPE = Path(__file__).parents[2] / "recipes" / "bridge-single-to-turns.toml"


def run() -> None:
    """Wind a coil of 8 000 turns on the simulated machine, read live; then write its report and label."""
    with tempfile.TemporaryDirectory() as folder:
        book_file = Path(folder) / "shop.book"
        command = [sys.executable, "-m", "windctl"]
        wind = ["wind", str(RECIPE), "--machine", "virtual", "--readings", "live", "-q"]
        book = ["--book", str(book_file)]
        subprocess.run([*command, *wind, *book], check=True, stdout=subprocess.DEVNULL)
        times: dict[str, list[float]] = {"facts": [], "page": [], "label": []}
        with open_book(book_file, create=False, readonly=True) as opened:
            head = opened.find("1")
            assert head.turns == TURNS
            for _ in range(ROUNDS):
                at = time.perf_counter()
                facts = coil_facts(opened, head)
                read = time.perf_counter()
                text = coil_report(facts)
                written = time.perf_counter()
                label_sheets(labels_of(opened, [head]), Sheet("a4", 3))
                times["facts"].append(read - at)
                times["page"].append(written - read)
                times["label"].append(time.perf_counter() - written)
        whole = []
        for _ in range(ROUNDS):
            at = time.perf_counter()
            out = ["-o", str(Path(folder) / "report.html")]
            subprocess.run([*command, "coils", "report", "1", *out, *book], check=True, capture_output=True)
            whole.append(time.perf_counter() - at)
    facts_s, page_s, label_s = (min(times[name]) for name in ("facts", "page", "label"))
    both = f"{1000 * facts_s:.0f} to read and fold the record, {1000 * page_s:.0f} to write"
    print(f"report of a coil    {1000 * (facts_s + page_s):.0f} ms ({both}), {len(text) // 1024} kB")
    print(f"label               {1000 * label_s:.0f} ms")
    print(f"as a command        {1000 * min(whole):.0f} ms, interpreter and imports included")
