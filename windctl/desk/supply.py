"""What a plan may draw on: the spool that was named, and what the coils in the book have taught.

Simulated coils teach only simulated ones, and those only where a spool is named: without one, the same seed
draws the same wire again, and the same coil is to come out again.

Where nothing is to turn, a named spool tells by its own coils which kind is meant.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from windctl.desk.books import book_if_any, there_is_a_book
from windctl.desk.machines import VIRTUAL
from windctl.errors import BookError

if TYPE_CHECKING:
    from windctl.book.book import Book
    from windctl.desk.asked import Shared
    from windctl.plan.experience.supply import Supply
    from windctl.profile.model import MachineProfile
    from windctl.recipe.model import Recipe


def supply_of(
    shared: Shared, profile: MachineProfile, recipe: Recipe, *, simulated: bool | None = None
) -> Supply:
    """The supply for a coil of this recipe. The book is only read. `simulated` None: nothing is to turn.

    Raises BookError for a spool that is not in it, UsageError for one with another wire.
    """
    from windctl.plan.experience.supply import UNKNOWN

    by_profile = profile.name == VIRTUAL and profile.port.url is None
    if shared.spool is None and (by_profile if simulated is None else simulated):
        return UNKNOWN
    if shared.spool is None and not there_is_a_book(shared):  # it is made when the first coil is wound
        return UNKNOWN
    with book_if_any(shared) as book:
        if book is not None:
            return _from_book(book, shared.spool, profile, recipe, simulated, by_profile)
    raise BookError(
        f"there is no spool {shared.spool!r}: no coil book was made yet; 'windctl spool add' makes one"
    )


def _from_book(
    book: Book,
    spool: str | None,
    profile: MachineProfile,
    recipe: Recipe,
    simulated: bool | None,
    by_profile: bool,
) -> Supply:
    from windctl.book.shelf import history, left_in
    from windctl.plan.experience.fold import learn
    from windctl.plan.experience.keys import asked_for
    from windctl.plan.experience.supply import Supply

    record = None if spool is None else book.spool(spool)
    if record is not None:
        record.spool.check_fits(recipe.wire)
    spools = book.spools()
    if simulated is None:
        kinds = book.kinds_of(spool) if spool else set()
        simulated = all(kinds) if kinds else by_profile
    keep = asked_for(recipe, spool or "", profile.bench)
    lessons = book.heard(keep, simulated=simulated)
    experience = learn(history(lessons, spools), [each.spool for each in spools], keep)
    if record is None:
        return Supply(None, experience)
    wound = [one.lesson.metres for one in lessons if one.lesson.spool == record.spool.id]
    return Supply(record.spool, experience, left_in(record, lessons, experience), len(wound), sum(wound))
