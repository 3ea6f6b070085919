"""A spool of wire: what is written on it, and what was measured on it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from windctl.errors import UsageError
from windctl.material.enamel import Grade
from windctl.material.wire import Wire, resolve

if TYPE_CHECKING:
    from windctl.recipe.tables import WireTable


@dataclass(frozen=True, slots=True)
class PieceMeasured:
    """Ohm per metre at 20 degrees C of a piece from a spool's loose end; `rel`: its relative sd."""

    spool: str
    ohm_per_m: float
    rel: float


@dataclass(frozen=True, slots=True)
class Spool:
    """One spool. Exactly one of `gauge` and `diameter_mm`, at least one of `enamel` and `overall_mm`."""

    id: str
    gauge: str | None = None
    diameter_mm: float | None = None
    enamel: Grade | None = None
    overall_mm: float | None = None  # by micrometer; beats the grade
    insulation: str | None = None

    def wire(self) -> Wire:
        """The wire as the tables have it, its thickness as measured; ohm per metre is learnt."""
        measured = self.overall_mm is not None
        return resolve(
            gauge=self.gauge,
            diameter_mm=self.diameter_mm,
            enamel=None if measured else self.enamel,
            overall_mm=self.overall_mm,
        )

    @property
    def size(self) -> str:
        """Its bare size, for people."""
        return self.gauge if self.gauge is not None else f"{self.diameter_mm:g} mm"

    def check_fits(self, wanted: WireTable) -> None:
        """Raises UsageError where a recipe asks for another wire than is on this spool."""
        asked = wanted.gauge if wanted.gauge is not None else f"{wanted.diameter_mm:g} mm"
        if asked != self.size:
            raise UsageError(
                f"the recipe asks for {asked}, and spool {self.id} has {self.size}: take another spool, or "
                "change wire in the recipe"
            )
        if wanted.enamel is not None and self.enamel is not None and wanted.enamel != self.enamel:
            raise UsageError(
                f"the recipe asks for enamel of {wanted.enamel}, and spool {self.id} has {self.enamel}: take "
                "another spool, or change wire.enamel in the recipe"
            )
