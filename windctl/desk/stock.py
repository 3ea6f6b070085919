"""The coils in stock, and pairs of them: from the book's records to what the shop's rules ask for.

In stock is a finished coil that was not withdrawn, not returned, not built in, and goes with no other. Where
a query or a batch names the coils, what is not in stock among them is told with the reason.
"""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from windctl.errors import RecipeError, UsageError
from windctl.record.addenda import Addendum, CoilMeasured, magnet, paired, withdrawn

if TYPE_CHECKING:
    from windctl.book.book import Book
    from windctl.book.heads import CoilHead
    from windctl.book.lessons import CoilLesson
    from windctl.plan.experience.fold import Experience
    from windctl.recipe.model import Recipe
    from windctl.record.events import CoilStarted
    from windctl.shop.joining import Pole
    from windctl.shop.matching import Candidate, Pair, Sitting
    from windctl.shop.picks_up import PicksUp

_GONE = {"assembled": "is built in", "returned": "was returned"}  # by the stage of its latest measurement
_TYPED_TURNS = 3.0  # standard deviation of a count that somebody had to say. Our judgement
_TYPED = ("count_corrected", "wire_broke", "spliced")
_POLELESS = "nobody said which pole is towards the strings: --north or --south"
_UNFIT = "its resistance is far from that of so many turns: a shorted turn, another wire, a wrong count"
MOST = 1000  # coils that are taken at once


@dataclass(frozen=True, slots=True)
class InStock:
    """One coil that may be paired; `pole` None: nobody said which pole is towards the strings."""

    head: CoilHead
    recipe: Recipe
    typed: int  # how often its count had to be said
    lesson: CoilLesson
    pole: Pole | None


@dataclass(frozen=True, slots=True)
class LeftOut:
    """A coil that cannot be paired, and why."""

    number: str
    why: str


@dataclass(frozen=True, slots=True)
class Stock:
    """The coils that may be paired, in order of their numbers; those that were asked for and may not."""

    coils: tuple[InStock, ...]
    left_out: tuple[LeftOut, ...]
    lessons: tuple[CoilLesson, ...]  # those that count for them, real and simulated ones

    @property
    def poleless(self) -> tuple[InStock, ...]:
        """The coils whose magnet nobody told of."""
        return tuple(coil for coil in self.coils if coil.pole is None)


@dataclass(frozen=True, slots=True)
class Wish:
    """How pairs are wanted."""

    sitting: Sitting
    at_most_db: float | None = None
    any_form: bool = False


@dataclass(frozen=True, slots=True)
class Found:
    """Two coils of the stock that go together."""

    north: InStock
    south: InStock
    pair: Pair
    north_picks_up: PicksUp
    south_picks_up: PicksUp


@dataclass(frozen=True, slots=True)
class Matched:
    """The pairs in the order of the north coils' numbers; coils that found no partner; coils that cannot have
    one."""

    pairs: tuple[Found, ...]
    alone: tuple[InStock, ...]
    left_out: tuple[LeftOut, ...]


def stock_of(book: Book, query: str, batch: str | None) -> Stock:
    """The stock of a book, or what of it a query and a batch ask for.

    Raises QueryError, and UsageError where these are more coils than can be taken at once.
    """
    facts = book.stock_facts()
    named = bool(query) or batch is not None
    here: list[CoilHead] = []
    left_out: list[LeftOut] = []
    for head in sorted(book.list(query, batch=batch), key=_order):
        why = _not_in_stock(head, facts.get(head.id, ()))
        if why is None:
            here.append(head)
        elif named:
            left_out.append(LeftOut(head.number, why))
    if len(here) > MOST:
        raise UsageError(
            f"{len(here)} coils are in stock, more than the {MOST} that can be paired at once: name some, "
            "with a query such as recipe:NAME or since:2026-03, or with --batch"
        )
    lessons = _lessons(book, here)
    by_start = {(one.lesson.coil, one.began): one for one in lessons}
    recipes: dict[str, Recipe | None] = {}  # by their text: a stock is of a few recipes
    coils = []
    for head in here:
        coil = _in_stock(book, head, facts.get(head.id, ()), by_start, recipes)
        if isinstance(coil, LeftOut):
            left_out.append(coil)
        else:
            coils.append(coil)
    return Stock(tuple(coils), tuple(left_out), lessons)


def _lessons(book: Book, heads: Sequence[CoilHead]) -> tuple[CoilLesson, ...]:
    """Those of these coils, of all others from the same spools, and of the last ones in the book."""
    if not heads:
        return ()
    spools = {("level", head.spool) for head in heads if head.spool}
    ids = [head.id for head in heads]
    return tuple(one for kind in (False, True) for one in book.heard(spools, simulated=kind, also=ids))


def _order(head: CoilHead) -> tuple[str, int, int]:
    return head.bench, head.year, head.serial


def _not_in_stock(head: CoilHead, said: Sequence[Addendum]) -> str | None:
    if head.outcome != "finished" or not head.turns:
        return "is not finished" if head.outcome == "open" else f"was {head.outcome}"
    out, other = withdrawn(said), paired(said)
    if out is not None:
        return f"is withdrawn: {out.reason}"
    if other is not None:
        return f"goes with {other.partner_number}"
    stages = [fact.stage for fact in said if isinstance(fact, CoilMeasured)]
    return _GONE.get(stages[-1]) if stages else None


def _in_stock(
    book: Book,
    head: CoilHead,
    said: Sequence[Addendum],
    lessons: Mapping[tuple[str, str], CoilLesson],
    recipes: dict[str, Recipe | None],
) -> InStock | LeftOut:
    from windctl.record.canonical import decode
    from windctl.record.events import CoilStarted

    rows = iter(book.entries(head.number))
    first = next(rows)
    started = decode(first.kind, first.payload)
    assert isinstance(started, CoilStarted)  # every record begins so
    lesson = lessons.get((started.number, started.wall_time))
    if started.recipe_text not in recipes:
        recipes[started.recipe_text] = recipe_of(started)
    recipe = recipes[started.recipe_text]
    if lesson is None or recipe is None:
        return LeftOut(head.number, "its record does not say what it was planned to be")
    told = magnet(said)
    pole: Pole | None = recipe.coil.magnet_up
    if told is not None:
        pole = "north" if told.pole == "north" else "south"
    typed = sum(row.kind in _TYPED for row in rows)
    return InStock(head, recipe, typed, lesson, pole)


def recipe_of(started: CoilStarted) -> Recipe | None:
    """The recipe in a record; None where this version cannot read it."""
    from windctl.recipe.load import parse_recipe

    try:
        return parse_recipe(started.recipe_text, started.number)
    except RecipeError:
        return None


def picks_up_of(book: Book, coil: str) -> PicksUp | None:
    """What a recorded coil encloses and picks up, by its own record; None where that does not say enough."""
    from windctl.coil.geometry import core_of
    from windctl.record.events import CoilStarted
    from windctl.shop.picks_up import recorded

    started = next(book.events(coil), None)
    recipe = recipe_of(started) if isinstance(started, CoilStarted) else None
    if recipe is None or not isinstance(started, CoilStarted):
        return None
    return recorded(core_of(recipe.bobbin), book.addenda(coil), started.prior)


def matched(book: Book, stock: Stock, wish: Wish) -> Matched:
    """The best pairs of the stock. Coils without a pole are left out and named; simulated coils are paired
    with simulated ones only."""
    left_out = [*stock.left_out, *(LeftOut(coil.head.number, _POLELESS) for coil in stock.poleless)]
    parts = [_matched(book, stock, wish, simulated) for simulated in (False, True)]
    left_out += [one for part in parts for one in part.left_out]
    return Matched(
        tuple(pair for part in parts for pair in part.pairs),
        tuple(coil for part in parts for coil in part.alone),
        tuple(sorted(left_out, key=lambda one: one.number)),
    )


def _matched(book: Book, stock: Stock, wish: Wish, simulated: bool) -> Matched:
    from windctl.coil.geometry import core_of
    from windctl.shop.enclosed import Known, enclosed
    from windctl.shop.matching import best
    from windctl.shop.picks_up import one_of

    coils = [coil for coil in stock.coils if coil.pole and coil.lesson.lesson.simulated == simulated]
    if not coils:
        return Matched((), (), ())
    every = [one for one in stock.lessons if one.lesson.simulated == simulated and one.withdrawn is None]
    sources = {coil.lesson.lesson.source for coil in coils}
    together, experience, unfit = _learnt(book, every, sources)
    fit = [coil for coil in coils if _key(coil.lesson) not in unfit]
    left_out = [LeftOut(coil.head.number, _UNFIT) for coil in coils if _key(coil.lesson) in unfit]
    if not fit:
        return Matched((), (), tuple(left_out))
    known = [
        Known(
            core_of(coil.recipe.bobbin),
            replace(coil.lesson.lesson, coil=_key(coil.lesson)),
            _TYPED_TURNS * coil.typed**0.5,
        )
        for coil in fit
    ]
    told = enclosed(known, [replace(one.lesson, coil=_key(one)) for one in together], experience)
    pairs = best(
        [_candidate(coil) for coil in fit],
        told,
        wish.sitting,
        at_most_db=wish.at_most_db,
        any_form=wish.any_form,
    )
    taken = {at for pair in pairs for at in (pair.north, pair.south)}
    return Matched(
        tuple(
            Found(fit[pair.north], fit[pair.south], pair, one_of(told, pair.north), one_of(told, pair.south))
            for pair in pairs
        ),
        tuple(coil for at, coil in enumerate(fit) if at not in taken),
        tuple(left_out),
    )


def _key(lesson: CoilLesson) -> str:
    """A number is said once per bench; two books that were merged may both have it."""
    return f"{lesson.lesson.coil} {lesson.began}"


def _learnt(
    book: Book, lessons: Sequence[CoilLesson], sources: Collection[str]
) -> tuple[list[CoilLesson], Experience, set[str]]:
    """The coils from the spools in question, to be taken together; what all others taught, and all of them of
    how much coils differ; and the coils that are too far off to say anything."""
    from windctl.book.shelf import history
    from windctl.plan.experience.fold import learn
    from windctl.shop.enclosed import unknowns_of

    spools = book.spools()
    wires = [each.spool for each in spools]
    renamed = [replace(one, lesson=replace(one.lesson, coil=_key(one))) for one in lessons]
    whole = learn(history(renamed, spools), wires, keep=())
    unfit = {one.coil for one in whole.unfit}
    together = [one for one in lessons if one.lesson.source in sources and _key(one) not in unfit]
    rest = [one for one in lessons if one.lesson.source not in sources]
    keep = set().union(*(unknowns_of(one.lesson) for one in together))
    others = learn(history(rest, spools), wires, keep)
    return together, replace(others, unrest=whole.unrest), unfit


def _candidate(coil: InStock) -> Candidate:
    from windctl.shop.joining import Handed
    from windctl.shop.matching import Candidate

    bobbin = coil.recipe.bobbin
    assert coil.pole is not None  # the others were left out
    return Candidate(
        Handed(coil.head.number, coil.recipe.coil.direction_from_face, coil.pole),
        _order(coil.head),
        (bobbin.core_length_mm, bobbin.core_width_mm, bobbin.corner_radius_mm, bobbin.flange_gap_mm),
        bobbin.flange_gap_mm,
        bobbin.core_width_mm / 2 + bobbin.flange_depth_mm,
    )
