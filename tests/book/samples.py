"""Coils for the tests: made-up facts of a demo shop, in the form that a run records them."""

from __future__ import annotations

import dataclasses
import uuid
from collections.abc import Iterable, Sequence
from pathlib import Path
from typing import Any, TypeVar

from windctl import __version__
from windctl.book.book import Book
from windctl.book.heads import CoilHead
from windctl.book.writer import CoilWriter
from windctl.plan.pace import PaceSpec
from windctl.plan.prior import Prior
from windctl.protocol.messages import Identity, Reading, ReadingFlag, Setup, State, Status, Trust
from windctl.record.addenda import CoilMeasured, CoilNoted, SpoolAdded, SpoolWeighed
from windctl.record.curve import review
from windctl.record.entries import Entry, Packer
from windctl.record.events import (
    BoardGreeted,
    CoilFinished,
    CoilStarted,
    Event,
    GoGiven,
    Held,
    NoteMade,
    ReadingTaken,
    StatusHeard,
    Target,
    WentOn,
)
from windctl.record.fold import setup_crc
from windctl.record.program import stored
from windctl.record.summary import summarise
from windctl.record.trace import trace_digest

STARTED = "2026-05-04T08:30:00+02:00"
ENDED = "2026-05-04T08:36:10+02:00"

COUNTS = 400  # per turn
OHM_PER_TURN = 0.85

M = TypeVar("M")


def made(kind: type[M], **values: Any) -> M:
    """A message or record of `kind` with zeros wherever nothing else is said."""
    zeros = {field.name: 0 for field in dataclasses.fields(kind)}  # type: ignore[arg-type]  # any dataclass
    return kind(**{**zeros, **values})


def coil_id(n: int) -> str:
    """A unique id that is the same every time."""
    return str(uuid.uuid5(uuid.NAMESPACE_OID, f"demo coil {n}"))


def started(n: int = 1, **changes: Any) -> CoilStarted:
    """The first fact of demo coil `n`, 30 turns."""
    usual = CoilStarted(
        coil_id=coil_id(n),
        number="",
        wall_time=STARTED,
        operator="Demo Winder",
        version=__version__,
        recipe_name="demo bridge",
        recipe_text='format = 1\nname = "demo bridge"  # größer als nötig: Ω\n',
        recipe_digest="ab" * 32,
        profile_json='{"name":"virtual"}',
        machine="virtual seed 1",
        readings_mode="live",
        program_digest="cd" * 32,
        program_id=0xCDCDCDCD,
        program_packed=stored(bytes([144, 1, 20, 0]) * 30),
        total_counts=30 * COUNTS,
        setup=made(Setup, coil_token=n, counts_per_turn=COUNTS, max_count=30 * COUNTS),
        pace=PaceSpec(500, 400, 4000, 800, 2000),
        prior=Prior(
            ohm_per_turn=OHM_PER_TURN,
            growth=1e-5,
            var_ohm_per_turn=(0.05 * OHM_PER_TURN) ** 2,
            var_growth=1e-12,
            cov=0.0,
            growth_walk_rel=0.05,
            turns=30.0,
            offset_ohm=0.5,
            offset_sd=0.3,
            gain_sd=0.003,
            celsius_sd=0.5,
            coil_over_air_k=0.7,
            coil_over_air_sd=0.7,
            noise_rel=0.001,
            floor_ohm=0.2,
            contact_length_ohm=0.0,
        ),
        target=Target("turns", 30.0, 2.0, 1, 30),
        planned_turns=30.0,
        spool="",
        batch="demo lot",
        of=6,
    )
    return dataclasses.replace(usual, **changes)


def wound(first: CoilStarted, turns: int = 30) -> list[Event]:
    """What happened after the first fact: `turns` turns at two a second, a reading every half turn."""
    token, crc = first.setup.coil_token, setup_crc(first)
    trust = int(Trust.COUNT | Trust.GUIDE)
    greeted = made(Identity, boot=1, epoch=7, trust=trust, coil_token=token, setup_crc=crc, contact_scale=16)
    events: list[Event] = [BoardGreeted(5, greeted), GoGiven(900, 1, 7, "virtual"), WentOn(1000, 0)]
    for step in range(1, turns * 10 + 1):
        ticks = 1000 + 50 * step
        count = COUNTS * step // 10
        status = made(
            Status, ticks=ticks, boot=1, epoch=7, state=int(State.TURNING), trust=trust, count=count, next=30
        )
        events.append(StatusHeard(ticks + step % 3, status))
        if step % 5 == 0:
            ohm = 0.5 + OHM_PER_TURN * count / COUNTS + 0.01 * (step % 7)
            events.append(
                ReadingTaken(
                    ticks + 4,
                    made(
                        Reading,
                        ticks=ticks,
                        window=200,
                        count=count,
                        value=round(ohm * 16_000 / 16),
                        flags=int(ReadingFlag.TURNING),
                        celsius=2150,
                    ),
                )
            )
    end = 1000 + 500 * turns
    events.append(Held(end + 40, end, COUNTS * turns, 1))
    return events


def finished(turns: int = 30, **changes: Any) -> CoilFinished:
    """The last fact."""
    usual = CoilFinished(
        at_ms=99_000,
        outcome="finished",
        reason="the target is reached",
        count=turns * COUNTS,
        turns=float(turns),
        dcr_20c_ohm=25.512345678901234,
        dcr_u95_ohm=0.31,
        verdict="within",
    )
    return dataclasses.replace(usual, **changes)


def packed(events: Iterable[Event]) -> list[Entry]:
    """Events as rows of a record."""
    packer = Packer()
    return [*packer.add(events), *packer.flush()]


def seal(book: Book, writer: CoilWriter) -> CoilHead:
    """Close a coil with what its own facts say, as a run does."""
    events = list(book.events(writer.id))
    seen = review(events)
    return writer.seal(summarise(seen.state), seen.curve, trace_digest(book.entries(writer.id)), ENDED)


def wind(book: Book, n: int = 1, *, bench: str = "b1", turns: int = 30, **changes: Any) -> CoilHead:
    """Demo coil `n` from beginning to seal."""
    writer = book.begin_coil(bench, 2026, started(n, **changes))
    writer.commit(packed([*wound(writer.started, turns), NoteMade(98_000, "splice-free", "Demo Winder")]))
    writer.commit(packed([finished(turns)]))
    return seal(book, writer)


def stocked(book: Book) -> None:
    """A spool in the book, and something said of the closed coil 1."""
    added = SpoolAdded(STARTED, "Demo Winder", "s1", "AWG 42", None, "grade 1", None, "polyurethane", "")
    book.add_spool(added, SpoolWeighed(STARTED, "Demo Winder", 250.0, 0.5))
    book.amend(coil_id(1), CoilNoted(ENDED, "Demo Winder", "größer als nötig: Ω"))
    book.amend(coil_id(1), CoilMeasured(ENDED, "Demo Winder", grams=28.4, grams_sd=0.02))


def files_beside(path: Path) -> Sequence[str]:
    """Names of the files in the folder of a book, the book itself left out."""
    return sorted(entry.name for entry in path.parent.iterdir() if entry.name != path.name)
