"""What a clause is, and how it ends."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING

from windctl.protocol.messages import Capability

if TYPE_CHECKING:
    from tests.firmware.conformance.rig import Rig


class NotAsWrittenError(Exception):
    """The board did something else than the specification says."""


class NotJudgedError(Exception):
    """Nothing can be said: a hand or a fitting was missing, or the line lost what was needed."""


def must(holds: bool, otherwise: str) -> None:
    """Raises NotAsWrittenError unless it holds."""
    if not holds:
        raise NotAsWrittenError(otherwise)


@dataclass(frozen=True)
class Clause:
    """One thing the specification says. `section` and `title` are the README's; an empty title is the plain
    text of the section. `check` returns a figure worth telling, or nothing."""

    section: int
    title: str
    says: str
    check: Callable[[Rig], str | None]
    needs: Capability
    hand: bool
    moves: bool


NOTHING = Capability(0)
CLAUSES: list[Clause] = []


def clause(
    section: int,
    title: str,
    says: str,
    *,
    needs: Capability = NOTHING,
    hand: bool = False,
    moves: bool = False,
) -> Callable[[Callable[[Rig], str | None]], Callable[[Rig], str | None]]:
    """Puts a check into the list, in the order of the files that `run` names."""

    def keep(check: Callable[[Rig], str | None]) -> Callable[[Rig], str | None]:
        CLAUSES.append(Clause(section, title, says, check, needs, hand, moves))
        return check

    return keep


# What the README says in a titled paragraph that no line can show, and how it is looked at instead.
NOT_ON_THE_LINE: dict[tuple[int, str], str] = {
    (5, "Power"): "measure at the enables' pins; seen from the line: nothing turns with the drives off",
    (6, "Rotation"): "look at the spindle: with rotation 0 its nose turns clockwise",
}
