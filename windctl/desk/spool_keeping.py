"""Keeping spools: a new one, what its wire weighs now, what a piece of it measured. Every face asks here."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import datetime
from typing import TYPE_CHECKING, Any

from windctl.desk.books import book_to_write
from windctl.errors import UsageError

if TYPE_CHECKING:
    from windctl.desk.asked import Shared
    from windctl.material.enamel import Grade

SCALE_SD_G = 0.5  # of a workshop's scale, the empty spool's own mass included
OHM_PER_M_SD_PCT = 0.5  # of a metre or two measured with a good meter

_LEAST, _MOST = 0.7, 1.4  # of the table's ohm per metre: beyond, it is another wire or a slipped point


@dataclass(frozen=True, slots=True)
class NewSpool:
    """What is said of a spool when it comes to the shop. None: not said. `name` None: the next free number.

    Exactly one of `gauge` and `diameter_mm`; `overall_mm`, by micrometer, beats the grade of the enamel.
    Resistances in ohm per metre at 20 degrees C; `grams` is the wire alone.
    """

    name: str | None = None
    gauge: str | None = None
    diameter_mm: float | None = None
    enamel: Grade | None = None
    overall_mm: float | None = None
    insulation: str = ""
    grams: float | None = None
    ohm_per_m: float | None = None
    ohm_per_m_sd: float | None = None
    notes: str = ""


def check_new(new: NewSpool) -> None:
    """Raises UsageError for a wire that there is none of, and for a name that is none."""
    from windctl.desk.spools import check_name
    from windctl.material.wire import resolve

    if new.name is not None:
        check_name(new.name)
    try:
        wire = resolve(
            gauge=new.gauge,
            diameter_mm=new.diameter_mm,
            enamel=None if new.overall_mm is not None else new.enamel,
            overall_mm=new.overall_mm,
        )
    except ValueError as error:
        raise UsageError(f"there is no such wire: {error}") from None
    if new.ohm_per_m is not None:
        _same_size(new.ohm_per_m, wire.ohm_per_m, "measure again, or check the gauge")


def keep_new(shared: Shared, new: NewSpool) -> str:
    """Keeps the spool; its name. Raises UsageError, BookError."""
    from windctl.desk.spools import next_name
    from windctl.record.addenda import SpoolAdded, SpoolMeasured, SpoolWeighed

    check_new(new)
    now, who = _signed()
    with book_to_write(shared) as book:
        name = next_name(book.spools()) if new.name is None else new.name
        wire = (new.gauge, new.diameter_mm, new.enamel, new.overall_mm)
        added = SpoolAdded(now, who, name, *wire, new.insulation, new.notes)
        more: list[Any] = []
        if new.grams is not None:
            more.append(SpoolWeighed(now, who, new.grams, SCALE_SD_G))
        if new.ohm_per_m is not None:
            usual = new.ohm_per_m * OHM_PER_M_SD_PCT / 100
            sd = usual if new.ohm_per_m_sd is None else new.ohm_per_m_sd
            more.append(SpoolMeasured(now, who, new.ohm_per_m, sd / new.ohm_per_m))
        book.add_spool(added, *more)
    return name


def keep_weighing(shared: Shared, spool: str, grams: float, sd_g: float = SCALE_SD_G) -> None:
    """Keeps what the wire on a spool weighs, g. Raises BookError."""
    from windctl.record.addenda import SpoolWeighed

    with book_to_write(shared) as book:
        book.add_to_spool(spool, SpoolWeighed(*_signed(), grams, sd_g))


def keep_piece(
    shared: Shared, spool: str, metres: float, ohm: float, celsius: float, sd_pct: float = OHM_PER_M_SD_PCT
) -> None:
    """Keeps what a piece of `metres` measured at `celsius`, the leads taken off. Raises UsageError,
    BookError."""
    from windctl.material.copper import to_20c
    from windctl.record.addenda import SpoolMeasured

    ohm_per_m = to_20c(ohm, celsius) / metres
    with book_to_write(shared) as book:
        _same_size(ohm_per_m, book.spool(spool).spool.wire().ohm_per_m, "measure again")
        book.add_to_spool(spool, SpoolMeasured(*_signed(), ohm_per_m, sd_pct / 100))


def _same_size(ohm_per_m: float, nominal: float, what_to_do: str) -> None:
    if not _LEAST < ohm_per_m / nominal < _MOST:
        raise UsageError(
            f"{ohm_per_m:.3g} ohm per metre is no wire of this size, which has about {nominal:.3g} ohm per "
            f"metre: {what_to_do}"
        )


def _signed() -> tuple[str, str]:
    """When and who."""
    from windctl.desk.bench import operator

    return datetime.now().astimezone().isoformat(timespec="seconds"), operator()
