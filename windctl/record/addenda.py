"""Facts that come after a coil's record is sealed, and facts about spools of wire.

They stand in logs of their own, chained as coils are: a sealed record never changes. A log is named after
what it is about: "coil" and the coil's id, "spool" and the spool's. Written as canonical JSON, like events.
"""

from __future__ import annotations

import dataclasses
import hashlib
import json
from collections.abc import Iterable
from dataclasses import dataclass
from typing import Any, ClassVar

from windctl.errors import RecordBroken
from windctl.plan.experience.basis import Basis
from windctl.plan.experience.lesson import Build, Lesson, Mass, Measured, Resistance, Share
from windctl.record.canonical import dumps

STAGES = ("on-machine", "leads-on", "potted", "assembled", "returned")  # of a coil's life
_TEACH_NO_OHM = ("assembled", "returned")


@dataclass(frozen=True, slots=True)
class CoilTaught:
    """What the record of a coil says for the coils to come. The latest one counts: a later version of the
    program may read the same record better."""

    kind: ClassVar[str] = "coil_taught"
    version: str
    lesson: Lesson


@dataclass(frozen=True, slots=True)
class CoilMeasured:
    """The finished coil was measured by hand. None: not measured.

    `ohm` is what the meter showed at `celsius`; `dcr_20c_ohm` that at 20 degrees C without the leads, and
    `dcr_rel` its own relative sd, without what the bench's instruments are off by for every coil.

    `stage`: where the coil was in its life, one of STAGES. `minutes` since it was wound; None: long since.
    `meter` and `thermometer` are names, and what follows them is how far both were trusted then, so that no
    later profile changes what was known. Inductance in henry and quality at `test_hz`; the resonance with
    `load_pf` and `load_ohm` across the coil.
    """

    kind: ClassVar[str] = "coil_measured"
    wall_time: str
    by: str
    ohm: float | None = None
    celsius: float | None = None
    dcr_20c_ohm: float | None = None
    dcr_rel: float | None = None
    grams: float | None = None
    grams_sd: float | None = None
    build_mm: float | None = None
    build_sd_mm: float | None = None
    stage: str = ""
    minutes: float | None = None
    meter: str = ""
    thermometer: str = ""
    gain_rel: float | None = None
    noise_rel: float | None = None
    floor_ohm: float | None = None
    lead_ohm: float | None = None
    lead_sd_ohm: float | None = None
    celsius_sd: float | None = None
    over_air_k: float | None = None
    over_air_sd_k: float | None = None
    henry: float | None = None
    quality: float | None = None
    test_hz: float | None = None
    resonance_hz: float | None = None
    load_pf: float | None = None
    load_ohm: float | None = None

    @property
    def measured(self) -> tuple[Measured, ...]:
        """The same as a lesson takes it. What has left the bench, or is joined to more than its leads,
        teaches no resistance."""
        seen: list[Measured] = []
        if self.stage not in _TEACH_NO_OHM and self.dcr_20c_ohm is not None and self.dcr_rel is not None:
            seen.append(Resistance(self.dcr_20c_ohm, self.dcr_rel))
        if self.grams is not None and self.grams_sd is not None:
            seen.append(Mass(self.grams, self.grams_sd))
        if self.build_mm is not None and self.build_sd_mm is not None:
            seen.append(Build(self.build_mm, self.build_sd_mm))
        return tuple(seen)


@dataclass(frozen=True, slots=True)
class CoilWithdrawn:
    """Somebody says that this coil shall teach nothing."""

    kind: ClassVar[str] = "coil_withdrawn"
    wall_time: str
    by: str
    reason: str


@dataclass(frozen=True, slots=True)
class CoilReadmitted:
    """Somebody says that a withdrawn coil shall teach again."""

    kind: ClassVar[str] = "coil_readmitted"
    wall_time: str
    by: str
    reason: str


@dataclass(frozen=True, slots=True)
class CoilNoted:
    """Somebody wrote something down about a coil."""

    kind: ClassVar[str] = "coil_noted"
    wall_time: str
    by: str
    text: str


@dataclass(frozen=True, slots=True)
class MagnetTold:
    """Somebody says which pole of a coil's magnet is towards the strings. Beats what the recipe says: the
    latest one counts. `pole`: "north" or "south"."""

    kind: ClassVar[str] = "magnet_told"
    wall_time: str
    by: str
    pole: str


@dataclass(frozen=True, slots=True)
class PairMade:
    """This coil and `partner` (id; `partner_number`) go together. Stands in both coils' logs.

    `joined`: how their leads are joined. Hum left in a uniform field, in dB against both in phase, as it was
    known then: of the expected square, and the ends of its 95 % interval.
    """

    kind: ClassVar[str] = "pair_made"
    wall_time: str
    by: str
    partner: str
    partner_number: str
    joined: str
    left_db: float
    left_low_db: float
    left_high_db: float


@dataclass(frozen=True, slots=True)
class PairParted:
    """This coil and `partner` go together no longer. Stands in both coils' logs."""

    kind: ClassVar[str] = "pair_parted"
    wall_time: str
    by: str
    partner: str
    partner_number: str
    reason: str


@dataclass(frozen=True, slots=True)
class SpoolAdded:
    """A spool of wire came to the shop: what is written on it, and its thickness by micrometer."""

    kind: ClassVar[str] = "spool_added"
    wall_time: str
    by: str
    spool: str
    gauge: str | None
    diameter_mm: float | None
    enamel: str | None
    overall_mm: float | None
    insulation: str
    notes: str


@dataclass(frozen=True, slots=True)
class SpoolWeighed:
    """The wire on a spool weighs so much, the empty spool taken off."""

    kind: ClassVar[str] = "spool_weighed"
    wall_time: str
    by: str
    grams: float
    grams_sd: float


@dataclass(frozen=True, slots=True)
class SpoolMeasured:
    """Ohm per metre at 20 degrees C of a piece from the spool's loose end; `rel`: its relative sd."""

    kind: ClassVar[str] = "spool_measured"
    wall_time: str
    by: str
    ohm_per_m: float
    rel: float


@dataclass(frozen=True, slots=True)
class CoilImported:
    """A coil was taken over from another book, with its record and all that was said of it.

    `number` is what it is called here, `recorded` what its record calls it: they differ where the number was
    another coil's here already. It teaches only when `teaches`; the latest of these counts.
    """

    kind: ClassVar[str] = "coil_imported"
    wall_time: str
    by: str
    coil: str  # its id
    number: str
    recorded: str
    teaches: bool


@dataclass(frozen=True, slots=True)
class NumbersPassed:
    """Numbers of a bench that this book never gave to a coil: it went on behind those of imported coils."""

    kind: ClassVar[str] = "numbers_passed"
    bench: str
    year: int
    first: int
    last: int


@dataclass(frozen=True, slots=True)
class LogBegun:
    """Another log exists from here on. Stands in the log of logs, so that none can vanish unseen."""

    kind: ClassVar[str] = "log_begun"
    log: str


Addendum = (
    CoilTaught
    | CoilMeasured
    | CoilWithdrawn
    | CoilReadmitted
    | CoilNoted
    | MagnetTold
    | PairMade
    | PairParted
    | SpoolAdded
    | SpoolWeighed
    | SpoolMeasured
    | CoilImported
    | NumbersPassed
    | LogBegun
)

KINDS: dict[str, type[Addendum]] = {
    cls.kind: cls
    for cls in (
        CoilTaught,
        CoilMeasured,
        CoilWithdrawn,
        CoilReadmitted,
        CoilNoted,
        MagnetTold,
        PairMade,
        PairParted,
        SpoolAdded,
        SpoolWeighed,
        SpoolMeasured,
        CoilImported,
        NumbersPassed,
        LogBegun,
    )
}

_MEASURED: dict[str, type[Measured]] = {
    "resistance": Resistance,
    "share": Share,
    "mass": Mass,
    "build": Build,
}
_WORDS = {cls: word for word, cls in _MEASURED.items()}


def genesis(log: str) -> bytes:
    """The link before the first fact of a log: no chain fits another one."""
    return hashlib.sha256(b"windctl log 1\0" + log.encode()).digest()


def plain(fact: Addendum) -> dict[str, Any]:
    """The fields as plain values."""
    fields = dataclasses.asdict(fact)
    if isinstance(fact, CoilTaught):
        fields["lesson"]["measured"] = [
            {"what": _WORDS[type(one)], **dataclasses.asdict(one)} for one in fact.lesson.measured
        ]
    return fields


def encode(fact: Addendum) -> bytes:
    """The canonical bytes of a fact, without its kind. Raises ValueError for NaN and infinities."""
    return dumps(plain(fact))


def decode(kind: str, payload: bytes) -> Addendum:
    """The fact of `kind` that `payload` describes. Raises RecordBroken when it describes none."""
    try:
        fields = json.loads(payload)
        if kind == CoilTaught.kind:
            fields["lesson"] = _lesson(fields["lesson"])
        return KINDS[kind](**fields)
    except (ValueError, KeyError, TypeError, AttributeError) as error:
        raise RecordBroken(f"a stored fact of kind {kind!r} cannot be read: {error}") from error


def _lesson(fields: dict[str, Any]) -> Lesson:
    measured = tuple(
        _MEASURED[one["what"]](**{name: value for name, value in one.items() if name != "what"})
        for one in fields["measured"]
    )
    return Lesson(**{**fields, "basis": Basis(**fields["basis"]), "measured": measured})


def withdrawn(facts: Iterable[Addendum]) -> CoilWithdrawn | None:
    """The withdrawal that now holds, if one does."""
    last: CoilWithdrawn | None = None
    for fact in facts:
        if isinstance(fact, CoilWithdrawn):
            last = fact
        elif isinstance(fact, CoilReadmitted):
            last = None
    return last


def paired(facts: Iterable[Addendum]) -> PairMade | None:
    """The pair that a coil is now part of, if it is of one."""
    last: PairMade | None = None
    for fact in facts:
        if isinstance(fact, PairMade):
            last = fact
        elif isinstance(fact, PairParted):
            last = None
    return last


def magnet(facts: Iterable[Addendum]) -> MagnetTold | None:
    """What was last said of a coil's magnet."""
    last: MagnetTold | None = None
    for fact in facts:
        if isinstance(fact, MagnetTold):
            last = fact
    return last
