"""The words of a coil: what a search for free text looks through.

Line by line, folded so that capitals make no difference: the recipe, the number, and whatever people wrote
about the coil while it was wound or after. Another rule would make every older book disagree with itself, so
a change of it is a step of the ledger.
"""

from __future__ import annotations

from collections.abc import Iterable

from windctl.errors import RecordBroken
from windctl.record.addenda import Addendum, CoilNoted, CoilReadmitted, CoilWithdrawn, PairParted
from windctl.record.canonical import decode
from windctl.record.entries import Entry
from windctl.record.events import NoteMade

# The kinds that hold what people wrote: of rows of a record, and of rows of a coil's log.
IN_RECORD = (NoteMade.kind,)
IN_LOG = (CoilNoted.kind, CoilWithdrawn.kind, CoilReadmitted.kind, PairParted.kind)


def fold(text: str) -> str:
    """One line without capitals."""
    return " ".join(text.casefold().splitlines())


def first_words(recipe: str, number: str) -> str:
    """The words of a coil of which nobody wrote anything yet."""
    return f"{fold(recipe)}\n{fold(number)}\n"


def written_in(rows: Iterable[Entry]) -> tuple[str, ...]:
    """What people wrote while the coil was wound. A row that cannot be read says nothing: `verify` tells."""
    texts: list[str] = []
    for row in rows:
        if row.kind in IN_RECORD:
            try:
                fact = decode(row.kind, row.payload)
            except RecordBroken:
                continue
            if isinstance(fact, NoteMade):
                texts.append(fact.text)
    return tuple(texts)


def said_in(facts: Iterable[Addendum]) -> tuple[str, ...]:
    """What people wrote after the coil was closed."""
    texts: list[str] = []
    for fact in facts:
        if isinstance(fact, CoilNoted):
            texts.append(fact.text)
        elif isinstance(fact, CoilWithdrawn | CoilReadmitted | PairParted):
            texts.append(fact.reason)
    return tuple(texts)


def more_words(texts: Iterable[str]) -> str:
    """What these add to a coil's words."""
    return "".join(f"{fold(text)}\n" for text in texts)


def words_of(recipe: str, number: str, written: Iterable[str]) -> str:
    """All words of a coil."""
    return first_words(recipe, number) + more_words(written)
