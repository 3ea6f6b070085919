"""A book with very many coils, made quickly and for real: every record is chained and sealed and verifies.

Of a made-up shop with three benches, wound over years: lots of 24, spools of 40 coils, notes at a third. Most
coils have their rare facts only; `dense` of them have the series of a run of six minutes as well. A shop that
teaches itself has a lesson of each coil in the coil's log.
"""

from __future__ import annotations

import random
import sqlite3
from collections.abc import Iterator
from contextlib import closing
from dataclasses import astuple, dataclass, replace
from datetime import datetime, timedelta, timezone
from pathlib import Path
from typing import Any

from tests.book.samples import coil_id, finished, packed, started, wound
from tests.cli.pairable import ROOT, planned
from windctl.book.heads import (
    SEAL,
    CoilHead,
    closed,
    coil_number,
    curve_rows,
    head_columns,
    opened,
    seal_payload,
)
from windctl.book.lessons import row_of
from windctl.book.logs import COIL, LOGS
from windctl.book.open import open_book
from windctl.book.words import words_of, written_in
from windctl.plan.experience.lesson import Lesson, Resistance, Share
from windctl.record.addenda import Addendum, CoilTaught, LogBegun
from windctl.record.addenda import encode as encode_said
from windctl.record.addenda import genesis as genesis_of_log
from windctl.record.canonical import encode
from windctl.record.chain import genesis, link
from windctl.record.curve import CurvePoint, review
from windctl.record.entries import Entry
from windctl.record.events import CoilStarted, NoteMade
from windctl.record.summary import CoilSummary, summarise
from windctl.record.trace import trace_digest

DENSE_TURNS = 720  # six minutes at two a second: 7 200 board reports, 1 440 readings
_RECIPES = ("Bridge single, scatter", "Neck single by hand", "Hum pair, north coil", "Bass single, even")
_READY = (
    "bridge-single-to-turns.toml",
    "bridge-single-to-resistance.toml",
    "hum-pair-north.toml",
    "hum-pair-south.toml",
)
_WORDS = (
    "spliced",
    "tight",
    "loose",
    "rewound",
    "breakage",
    "dull",
    "hum",
    "felt",
    "checked",
    "again",
    "wax",
)
_LESSON = "INSERT INTO lessons VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?)"
_BATCH = 2000  # coils written at once


@dataclass(frozen=True, slots=True)
class _Pattern:
    """The facts that all coils of a kind share, and what they come to."""

    rows: tuple[Entry, ...]
    summary: CoilSummary
    curve: tuple[CurvePoint, ...]


def fill(path: Path, n: int, dense: int, *, taught: bool = False) -> None:
    """A new book with `n` coils, the last `dense` of them with dense series. `taught`: they are of ready
    recipes, and each has its lesson."""
    draw = random.Random(n)
    open_book(path).close()
    patterns = {turns: _pattern(turns) for turns in (0, DENSE_TURNS)}
    serials: dict[tuple[str, int], int] = {}
    shop = _Shop(draw) if taught else None
    with closing(sqlite3.connect(path)) as connection:
        connection.execute("PRAGMA synchronous = OFF")
        for first in range(0, n, _BATCH):
            for k in range(first, min(first + _BATCH, n)):
                kind = patterns[DENSE_TURNS if k >= n - dense else 0]
                head, rows, links, curve = _coil(k, kind, serials, draw, shop)
                _write(connection, head, rows, links, curve)
                said = [] if shop is None else [shop.taught(connection, head)]
                row = row_of(head.started, head.bench, rows[:1], said, silent=False)
                connection.execute(_LESSON, [head.id, *astuple(row)])
            connection.commit()
        numbers = [(bench, year, last) for (bench, year), last in serials.items()]
        connection.executemany("INSERT INTO numbers VALUES (?, ?, ?)", numbers)
        connection.commit()


class _Shop:
    """What coils of ready recipes were planned to be, and what they taught: wire that strays by 3 % from
    spool to spool, coils by 0.5 %."""

    def __init__(self, draw: random.Random) -> None:
        texts = [(name, (ROOT / "recipes" / name).read_text(encoding="utf-8")) for name in _READY]
        self.plans = [(planned(name, text), text) for name, text in texts]
        self._draw = draw
        self._levels: dict[str, float] = {}
        self._begun, self._last = 0, genesis_of_log(LOGS)

    def planned(self, k: int, first: CoilStarted) -> CoilStarted:
        """The same start of a coil of one of these recipes."""
        plan, text = self.plans[k // 24 % len(self.plans)]
        return replace(
            first, recipe_name=plan.recipe_name, recipe_text=text, prior=plan.prior, basis=plan.basis
        )

    def taught(self, connection: sqlite3.Connection, head: CoilHead) -> CoilTaught:
        """Write down what a coil teaches."""
        plan = next(plan for plan, _ in self.plans if plan.recipe_name == head.recipe)
        level = self._levels.setdefault(head.spool, self._draw.gauss(0.0, 0.03))
        turns = head.turns or 0.0
        usual = plan.basis.ohm_per_m * plan.basis.coil.wire_length_m(turns)
        ohm = usual * (1.0 + level + self._draw.gauss(0.0, 0.005))
        lesson = Lesson(
            coil=head.number,
            bench=head.bench,
            spool=head.spool,
            basis=plan.basis,
            turns=turns,
            meter_rel=0.004,
            measured=(Resistance(ohm, 0.002), Share(0.1, 0.004)),
        )
        log = COIL + head.id
        self._begun += 1
        self._last = _say(connection, LOGS, self._begun, self._last, LogBegun(log))
        taught = CoilTaught("0", lesson)
        _say(connection, log, 1, genesis_of_log(log), taught)
        return taught


def _say(connection: sqlite3.Connection, log: str, n: int, last: bytes, fact: Addendum) -> bytes:
    """Make `fact` the n-th row of a log that ends with `last`; what it ends with then."""
    payload = encode_said(fact)
    tie = link(last, fact.kind, payload)
    connection.execute("INSERT OR REPLACE INTO logs VALUES (?, ?, ?)", (log, n, tie.hex()))
    connection.execute(
        "INSERT INTO log_entries VALUES (?, ?, ?, ?, ?)", (log, n - 1, fact.kind, payload, tie)
    )
    return tie


def _pattern(turns: int) -> _Pattern:
    first = started(0)
    events = wound(first, turns)
    seen = review([first, *events, finished(max(turns, 1))])
    return _Pattern(tuple(packed(events)), summarise(seen.state), seen.curve)


def _coil(
    k: int,
    pattern: _Pattern,
    serials: dict[tuple[str, int], int],
    draw: random.Random,
    shop: _Shop | None,
) -> tuple[CoilHead, list[Entry], list[bytes], tuple[CurvePoint, ...]]:
    """A coil's row, the rows of its record with their links, its curve."""
    at = datetime(2019, 1, 7, 8, 0, tzinfo=timezone(timedelta(hours=1))) + timedelta(minutes=80 * k)
    bench = draw.choice(("b1", "b2", "north"))
    serial = serials[bench, at.year] = serials.get((bench, at.year), 0) + 1
    base = started(0)
    first = replace(
        base,
        coil_id=coil_id(k),
        number=coil_number(bench, at.year, serial),
        wall_time=at.isoformat(),
        recipe_name=f"{draw.choice(_RECIPES)} (demo)",
        batch=f"lot {k // 24}",
        of=24,
        spool=f"s{k // 40}",
    )
    if shop is not None:
        first = shop.planned(k, first)
    notes = [NoteMade(98_000, " ".join(draw.choices(_WORDS, k=8)), "Demo Winder")] * (draw.random() < 0.33)
    verdict = draw.choices(("within", "outside", "not judged"), (90, 6, 4))[0]
    end = replace(
        finished(1, verdict=verdict, dcr_20c_ohm=draw.gauss(3640.0, 60.0), dcr_u95_ohm=9.5),
        turns=draw.uniform(6900.0, 8100.0),
    )
    rows = [_entry(first), *pattern.rows, *(_entry(note) for note in notes), _entry(end)]
    summary = replace(
        pattern.summary,
        recipe=first.recipe_name,
        batch=first.batch,
        turns=end.turns,
        dcr_20c_ohm=end.dcr_20c_ohm,
        dcr_u95_ohm=end.dcr_u95_ohm,
        verdict=end.verdict,
    )
    head = opened(first, bench, at.year, serial, b"")
    ended = (at + timedelta(minutes=7)).isoformat()
    head = closed(head, summary, trace_digest(rows), ended)
    rows.append(Entry(SEAL, seal_payload(head, pattern.curve), 0))
    links = list(_links(first, rows))
    return replace(head, n_entries=len(rows), record_digest=links[-1].hex()), rows, links, pattern.curve


def _entry(event: Any) -> Entry:
    return Entry(event.kind, encode(event), 1)


def _links(first: CoilStarted, rows: list[Entry]) -> Iterator[bytes]:
    last = genesis(first.coil_id)
    for row in rows:
        last = link(last, row.kind, row.payload)
        yield last


def _write(
    connection: sqlite3.Connection,
    head: CoilHead,
    rows: list[Entry],
    links: list[bytes],
    curve: tuple[CurvePoint, ...],
) -> None:
    columns = {**head_columns(head), "words": words_of(head.recipe, head.number, written_in(rows))}
    names = ", ".join(f'"{name}"' for name in columns)
    marks = ", ".join("?" * len(columns))
    connection.execute(f"INSERT INTO coils ({names}) VALUES ({marks})", list(columns.values()))
    stored = [
        (head.id, seq, row.kind, row.events, row.payload, tie)
        for seq, (row, tie) in enumerate(zip(rows, links, strict=True))
    ]
    connection.executemany("INSERT INTO entries VALUES (?, ?, ?, ?, ?, ?)", stored)
    points = [tuple(point.values()) for point in curve_rows(head.id, curve)]
    connection.executemany("INSERT INTO curve VALUES (?, ?, ?, ?, ?, ?)", points)
