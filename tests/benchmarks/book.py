"""What a commit to the coil book costs, how much room a coil takes, how long it takes to find one of many;
and what a plan, a list, a chart and pairs cost in a book of very many coils beside one of few."""

from __future__ import annotations

import sqlite3
import statistics
import tempfile
import time
from collections.abc import Callable
from contextlib import closing
from pathlib import Path

from tests.book.many import DENSE_TURNS, fill
from tests.book.samples import finished, packed, seal, started, wound
from tests.cli.pairable import ROOT
from windctl.book.book import Book
from windctl.book.open import open_book
from windctl.book.shelf import history
from windctl.desk.lots import gather
from windctl.desk.stock import Wish, matched, stock_of
from windctl.plan.experience.fold import learn
from windctl.plan.experience.keys import asked_for
from windctl.recipe.load import parse_recipe
from windctl.shop.matching import Sitting

COILS = 3
MANY, DENSE = 50_000, 200
FEW = 480  # a small shop's first year
PAGE = 100  # coils on a screen
LIMIT_MS = 60.0

# What a list, a search and a filter ask for; the slowest of each kind are among them.
QUERIES = (
    "",
    "recipe:neck",
    "batch:lot*7 verdict:outside",
    "spool:s1100",
    "since:2025-01 until:2025-06 verdict:within",
    "turns:7000..7100 ohm:3.64k",
    "coil:north-2024-0147",
    "b1-2023-00",
    "rewound",
    '"wax again wax"',
    "nothing of the kind",
    "note:breakage not note:hum bench:b2",
    "sort:-ohm",
    "sort:recipe,coil not recipe:neck",
    "rewound sort:turns",
    "id:3f0",
)


def run() -> None:
    """Wind a few coils into a new book, a commit per stored row; then find coils among many."""
    with tempfile.TemporaryDirectory() as folder:
        _few(Path(folder) / "shop.book")
        _many(Path(folder) / "many.book")
        _taught(Path(folder))


def _few(path: Path) -> None:
    with open_book(path) as book:
        sizes = [path.stat().st_size]
        commits: list[float] = []
        seals: list[float] = []
        n_rows = n_bytes = 0
        for n in range(COILS):
            with book.begin_coil("b1", 2026, started(n)) as writer:
                rows = packed([*wound(writer.started, DENSE_TURNS), finished(DENSE_TURNS)])
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


def _many(path: Path) -> None:
    begun = time.perf_counter()
    fill(path, MANY, DENSE)
    made = time.perf_counter() - begun
    size = path.stat().st_size
    print(f"{MANY} coils        {DENSE} of them with dense series; made in {made:.0f} s")
    with closing(sqlite3.connect(path)) as connection:
        (dense,) = connection.execute(
            "SELECT sum(length(payload)) FROM entries WHERE coil IN "
            "(SELECT id FROM coils ORDER BY started DESC LIMIT ?)",
            [DENSE],
        ).fetchone()
        kept = connection.execute("SELECT name, sum(pgsize) FROM dbstat GROUP BY name ORDER BY 2 DESC")
        parts = ", ".join(f"{name} {room / MANY:.0f}" for name, room in kept.fetchmany(6))
    print(f"room of the book    {size / 1e6:.0f} MB: {size / MANY:.0f} bytes a coil ({parts})")
    print(f"                    {dense // DENSE} bytes in the record of one with dense series")
    with open_book(path, readonly=True) as book:
        took = [_timed(book, query) for query in QUERIES]
        for name in ("b1-2023-0147", book.list(limit=1)[0].id[:8]):
            _said(f"find {name}", lambda name=name: book.find(name), 1)  # type: ignore[misc]  # bound here
    slowest, busiest = max(wall for wall, _ in took), max(busy for _, busy in took)
    print(f"slowest query       {slowest:.1f} ms (processor {busiest:.1f}), at most {LIMIT_MS:.0f} wanted")


def _taught(folder: Path) -> None:
    """The same questions of a book of very many coils, each with its lesson, and of one of few."""
    took: dict[int, dict[str, float]] = {}
    for coils in (FEW, MANY):
        path = folder / f"taught-{coils}.book"
        fill(path, coils, 0, taught=True)
        print(f"{coils} coils with lessons")
        with open_book(path, readonly=True) as book:
            took[coils] = _asked(book, coils // 24 - 1)
    print(f"in the book of {MANY} beside that of {FEW}, processor's time:")
    for what, many in took[MANY].items():
        few = took[FEW][what]
        print(f"  {what:62} {many / few:6.1f} times, {many - few:+.0f} ms")


def _asked(book: Book, lot: int) -> dict[str, float]:
    """What is asked for every day, about the last lots; by name, the processor's time, ms."""
    recipe = parse_recipe((ROOT / "recipes" / "hum-pair-north.toml").read_text(encoding="utf-8"), "")
    about = asked_for(recipe, f"s{lot * 24 // 40}", "b1")
    heard = book.heard(about, simulated=False)
    lots = ",".join(f'"lot {lot - n}"' for n in range(8))
    one = f'batch:"lot {lot}"'
    whole = book.count()

    def pairs() -> object:
        return matched(book, stock_of(book, f"recipe:hum batch:{lots}", None), Wish(Sitting()))

    asked: dict[str, tuple[Callable[[], object], int]] = {
        "lessons that a plan hears": (lambda: book.heard(about, simulated=False), len(heard)),
        "what they come to": (lambda: learn(history(heard, ()), (), about), len(heard)),
        "chart of a lot": (lambda: gather(book, book.list(one)), book.count(one)),
        "pairs from eight lots": (pairs, book.count(f"recipe:hum batch:{lots}")),
        "a page of the list": (lambda: book.lines(limit=PAGE), PAGE),
        "the whole list": (book.lines, whole),
    }
    return {what: _said(what, ask, found)[1] for what, (ask, found) in asked.items()}


def _timed(book: Book, query: str) -> tuple[float, float]:
    """Print what a page of the list and its count take; of each the slower one, ms."""
    found = book.count(query)
    page = _said(f"list {query}", lambda: book.list(query, limit=PAGE), min(found, PAGE))
    whole = _said(f"count {query}", lambda: book.count(query), found)
    return max(page[0], whole[0]), max(page[1], whole[1])


def _said(what: str, ask: Callable[[], object], found: int) -> tuple[float, float]:
    """Ask a few times; the medians, ms, of the time that passed and of the processor's own."""
    took, used = [], []
    for _ in range(7):
        begun, begun_busy = time.perf_counter(), time.process_time()
        ask()
        took.append(1000 * (time.perf_counter() - begun))
        used.append(1000 * (time.process_time() - begun_busy))
    median, busy = statistics.median(took), statistics.median(used)
    print(f"  {what:62} {median:6.1f} ms (processor {busy:5.1f}) {found:6} found")
    return median, busy


if __name__ == "__main__":
    run()
