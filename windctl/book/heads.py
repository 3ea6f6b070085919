"""A coil's row in the book, and the seal that closes its record.

The row holds nothing of its own: what is in it at the beginning repeats the coil's first fact (coil_started),
what comes at the end repeats the seal, which is the last row of the record and so is tied into its digests.
"""

from __future__ import annotations

import hashlib
import math
from collections.abc import Sequence
from dataclasses import asdict, dataclass, fields, replace
from typing import Any

from windctl.book.tables import CURVE_POINTS
from windctl.errors import BookError
from windctl.record.canonical import dumps
from windctl.record.curve import CurvePoint
from windctl.record.events import CoilStarted
from windctl.record.summary import CoilSummary

SEAL = "sealed"  # the kind of the row that closes a record; no event has it

OPEN = "open"
NOT_JUDGED = "not judged"


@dataclass(frozen=True, slots=True)
class CoilHead:
    """One coil's row. `None` is "not known": the coil is open, or nothing was measured.

    Resistances are in ohm at 20 degrees C; `started` and `ended` are the texts the caller gave;
    `record_digest` is the last link of the chain so far, hex; `n_entries` the rows that it covers.
    """

    id: str
    number: str
    bench: str
    year: int
    serial: int
    recipe: str
    recipe_digest: str
    batch: str
    of: int
    operator: str
    started: str
    ended: str | None
    outcome: str
    reason: str
    turns: float | None
    dcr_20c_ohm: float | None
    dcr_u95_ohm: float | None
    target_kind: str
    target_value: float
    verdict: str
    program_digest: str
    trace_digest: str | None
    n_entries: int
    record_digest: str
    spool: str

    @property
    def sealed(self) -> bool:
        """True when the record is closed for ever."""
        return self.trace_digest is not None


def coil_number(bench: str, year: int, serial: int) -> str:
    """The number people say, e.g. b1-2026-0147; more than four digits from the 10 000th coil of a year on."""
    return f"{bench}-{year}-{serial:04d}"


def opened(started: CoilStarted, bench: str, year: int, serial: int, link: bytes) -> CoilHead:
    """The row of a coil whose record holds only `started`, tied by `link`."""
    return CoilHead(
        id=started.coil_id,
        number=started.number,
        bench=bench,
        year=year,
        serial=serial,
        recipe=started.recipe_name,
        recipe_digest=started.recipe_digest,
        batch=started.batch,
        of=started.of,
        operator=started.operator,
        started=started.wall_time,
        ended=None,
        outcome=OPEN,
        reason="",
        turns=None,
        dcr_20c_ohm=None,
        dcr_u95_ohm=None,
        target_kind=started.target.kind,
        target_value=_plain("target", started.target.value),
        verdict=NOT_JUDGED,
        program_digest=started.program_digest,
        trace_digest=None,
        n_entries=1,
        record_digest=link.hex(),
        spool=started.spool,
    )


def closed(head: CoilHead, summary: CoilSummary, trace_digest: str, ended: str) -> CoilHead:
    """The row with what is known at the end; its digests still cover what came before the seal.

    Raises BookError when the summary is of another coil or still open.
    """
    for name in ("recipe", "recipe_digest", "batch", "program_digest", "target_kind", "target_value"):
        if getattr(summary, name) != getattr(head, name):
            raise BookError(
                f"coil {head.number} cannot be closed: its {name} is {getattr(head, name)!r}, "
                f"the summary's is {getattr(summary, name)!r}"
            )
    if summary.outcome == OPEN:
        raise BookError(f"coil {head.number} cannot be closed: its record says it is still open")
    return replace(
        head,
        ended=ended,
        outcome=summary.outcome,
        reason=summary.reason,
        turns=_plain_or_none("turns", summary.turns),
        dcr_20c_ohm=_plain_or_none("dcr_20c_ohm", summary.dcr_20c_ohm),
        dcr_u95_ohm=_plain_or_none("dcr_u95_ohm", summary.dcr_u95_ohm),
        verdict=summary.verdict,
        trace_digest=trace_digest,
    )


# What the seal repeats of the row, in this order nowhere but here.
SEALED_COLUMNS = (
    "ended",
    "outcome",
    "reason",
    "turns",
    "dcr_20c_ohm",
    "dcr_u95_ohm",
    "verdict",
    "trace_digest",
)


def seal_payload(head: CoilHead, curve: Sequence[CurvePoint]) -> bytes:
    """The seal's canonical bytes: the closing columns of the row and the digest of the curve."""
    body: dict[str, object] = {name: getattr(head, name) for name in SEALED_COLUMNS}
    return dumps({**body, "curve_points": len(curve), "curve_digest": curve_digest(curve)})


def curve_digest(curve: Sequence[CurvePoint]) -> str:
    """SHA-256, hex, over the points in order."""
    return hashlib.sha256(dumps([_point_values(point) for point in curve])).hexdigest()


def curve_rows(coil_id: str, curve: Sequence[CurvePoint]) -> list[dict[str, Any]]:
    """The points as rows of the curve table."""
    return [{"coil": coil_id, "seq": seq, **asdict(point)} for seq, point in enumerate(curve)]


def plain_curve(number: str, curve: Sequence[CurvePoint]) -> list[CurvePoint]:
    """The points as they are stored.

    Raises BookError for more than 500, and for a value that is no number.
    """
    if len(curve) > CURVE_POINTS:
        raise BookError(
            f"coil {number} cannot be closed: its curve has {len(curve)} points, "
            f"at most {CURVE_POINTS} are kept"
        )
    return [
        CurvePoint(
            _plain("turn", point.turn),
            _plain("ohm_20c", point.ohm_20c),
            _plain("final_ohm", point.final_ohm),
            _plain("final_sd", point.final_sd),
        )
        for point in curve
    ]


def head_columns(head: CoilHead) -> dict[str, Any]:
    """The row as a dict, column by column."""
    return {field.name: getattr(head, field.name) for field in fields(CoilHead)}


def _point_values(point: CurvePoint) -> list[float]:
    return [point.turn, point.ohm_20c, point.final_ohm, point.final_sd]


def _plain(name: str, value: float) -> float:
    """A float that a database gives back bit for bit: no NaN, no infinity, no negative zero."""
    if not math.isfinite(value):
        raise BookError(f"{name} is {value}, which is no number that the coil book can keep")
    return float(value) + 0.0


def _plain_or_none(name: str, value: float | None) -> float | None:
    return None if value is None else _plain(name, value)
