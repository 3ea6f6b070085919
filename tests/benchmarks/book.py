"""What a commit to the coil book costs, and how much room a coil takes."""

from __future__ import annotations

import statistics
import tempfile
import time
from pathlib import Path

from tests.book.samples import finished, packed, seal, started, wound
from windctl.book.open import open_book

TURNS = 720  # six minutes at two a second: 7 200 board reports, 1 440 readings
COILS = 3


def run() -> None:
    """Wind a few coils into a new book, a commit per stored row, and print what it took."""
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "shop.book"
        with open_book(path) as book:
            sizes = [path.stat().st_size]
            commits: list[float] = []
            seals: list[float] = []
            n_rows = n_bytes = 0
            for n in range(COILS):
                with book.begin_coil("b1", 2026, started(n)) as writer:
                    rows = packed([*wound(writer.started, TURNS), finished(TURNS)])
                    n_rows, n_bytes = len(rows), sum(len(row.payload) for row in rows)
                    for row in rows:
                        begun = time.perf_counter()
                        writer.commit([row])
                        commits.append(time.perf_counter() - begun)
                    begun = time.perf_counter()
                    seal(book, writer)
                    seals.append(time.perf_counter() - begun)
                sizes.append(path.stat().st_size)
            begun = time.perf_counter()
            report = book.verify()
            verified = time.perf_counter() - begun
            begun = time.perf_counter()
            book.list(limit=40)
            listed = time.perf_counter() - begun
    assert report.good
    commits.sort()
    print(
        f"commit of one row   median {1000 * statistics.median(commits):.2f} ms, "
        f"slowest of {len(commits)} {1000 * commits[-1]:.1f} ms"
    )
    print(f"end of a coil       {1000 * statistics.median(seals):.0f} ms (fold, curve, seal)")
    print(
        f"room of a coil      {(sizes[-1] - sizes[1]) // (COILS - 1)} bytes in the file, "
        f"of these {n_bytes} in {n_rows} rows of the record"
    )
    print(f"room of no coil     {sizes[0]} bytes")
    print(f"verify              {1000 * verified / COILS:.0f} ms a coil")
    print(f"list                {1000 * listed:.1f} ms a page")


if __name__ == "__main__":
    run()
