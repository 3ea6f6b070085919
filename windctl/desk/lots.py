"""The coils of a lot as the book has them."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from windctl.errors import UsageError

if TYPE_CHECKING:
    from windctl.book.book import Book
    from windctl.book.heads import CoilHead
    from windctl.record.addenda import Addendum
    from windctl.shop.lot import LotCoil


@dataclass(frozen=True, slots=True)
class Gathered:
    """Coils in the order in which they were begun, and those that do not count, each with the reason."""

    coils: tuple[LotCoil, ...]
    left_out: tuple[tuple[str, str], ...]
    recipe: str
    versions: int  # of that recipe


def gather(book: Book, heads: Sequence[CoilHead]) -> Gathered:
    """Of these coils the finished ones that are not withdrawn.

    Raises UsageError where there is none, and where they are of several recipes.
    """
    from windctl.record.addenda import withdrawn

    if not heads:
        raise UsageError("there are no such coils; 'windctl coils list' shows what there is")
    coils, left_out, used = [], [], []
    said = book.said_of(heads)
    tolerances = {coil: started.target.tolerance_pct for coil, started in book.starts_of(heads)}
    for head in sorted(heads, key=lambda head: (head.started, head.number)):
        facts = said.get(head.id, ())
        if head.outcome != "finished":
            left_out.append((head.number, head.outcome))
        elif withdrawn(facts) is not None:
            left_out.append((head.number, "withdrawn"))
        else:
            coils.append(_coil(book, head, facts, tolerances[head.id]))
            used.append(head)
    if not coils:
        raise UsageError("none of these coils is finished")
    recipes = sorted({head.recipe for head in used})
    if len(recipes) > 1:
        names = ", ".join(f'"{name}"' for name in recipes)
        raise UsageError(f"a chart is of one recipe, and these coils are of {len(recipes)}: {names}; "
                         f"add recipe:\"{recipes[0]}\", say")  # fmt: skip
    versions = len({head.recipe_digest for head in used})
    return Gathered(tuple(coils), tuple(left_out), recipes[0], versions)


def _coil(book: Book, head: CoilHead, facts: Sequence[Addendum], tolerance_pct: float) -> LotCoil:
    """With the resistance that the winding measured, else the first that was measured by hand."""
    from windctl.plan.experience.lesson import Resistance
    from windctl.record.addenda import CoilMeasured, CoilTaught
    from windctl.shop.lot import LotCoil

    lessons = [fact.lesson for fact in facts if isinstance(fact, CoilTaught)]
    if lessons:
        read = any(isinstance(one, Resistance) for one in lessons[-1].measured)
    else:
        read = bool(book.curve(head.number))
    ohm, u95 = (head.dcr_20c_ohm, head.dcr_u95_ohm) if read else (None, None)
    if ohm is None:
        by_hand = (fact.dcr_20c_ohm for fact in facts if isinstance(fact, CoilMeasured))
        ohm = next((value for value in by_hand if value is not None), None)
    return LotCoil(
        head.number,
        head.turns or 0.0,
        ohm,
        u95,
        head.target_kind,
        head.target_value,
        tolerance_pct,
    )
