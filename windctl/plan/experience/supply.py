"""What a plan may draw on: the spool on the machine, and what the shop's coils have taught."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from windctl.material.wire import Wire
from windctl.plan.experience.fold import Experience
from windctl.plan.experience.spool import Spool

if TYPE_CHECKING:
    from windctl.recipe.model import Recipe


@dataclass(frozen=True, slots=True)
class Left:
    """Wire still on a spool, in metres, and the standard deviation of that."""

    metres: float
    sd: float


@dataclass(frozen=True, slots=True)
class Supply:
    """`spool` None: any spool of the recipe's wire. `left` None: nobody weighed it."""

    spool: Spool | None = None
    experience: Experience = field(default_factory=Experience)
    left: Left | None = None
    wound_coils: int = 0  # from this spool
    wound_m: float = 0.0

    @property
    def id(self) -> str:
        """The spool's name; empty where none is meant."""
        return "" if self.spool is None else self.spool.id

    def wire_for(self, recipe: Recipe) -> Wire:
        """The spool's wire, else the recipe's. Raises UsageError where the spool has another one."""
        if self.spool is None:
            return recipe.wire_data()
        self.spool.check_fits(recipe.wire)
        return self.spool.wire()


UNKNOWN = Supply()
