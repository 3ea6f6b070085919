"""Pairs in the book: what is said of two coils stands in both their logs, at once or not at all."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import fields

import sqlalchemy as sa

from windctl.book.heads import CoilHead
from windctl.book.logs import COIL, LogFault, decoded, facts_of, read
from windctl.book.queries import HEAD_COLUMNS, head_of
from windctl.book.shelf import amend
from windctl.book.store import Store
from windctl.book.tables import coils, log_entries
from windctl.errors import BookError, RecordBroken
from windctl.record.addenda import (
    Addendum,
    CoilMeasured,
    CoilReadmitted,
    CoilWithdrawn,
    MagnetTold,
    PairMade,
    PairParted,
    decode,
    paired,
)

_AT_ONCE = 500  # values in one statement

# What decides whether a coil is in stock, and which way its magnet points.
_OF_STOCK = tuple(
    fact.kind for fact in (CoilMeasured, CoilWithdrawn, CoilReadmitted, MagnetTold, PairMade, PairParted)
)


def make_pairs(store: Store, pairs: Sequence[tuple[tuple[CoilHead, PairMade], ...]]) -> None:
    """Each pair: both coils with what is said in their logs. All pairs or none.

    Raises BookError where a coil has found another partner since, or stands in two of these pairs.
    """
    said = [each for pair in pairs for each in pair]

    def free(connection: sa.Connection) -> None:
        for head, _ in said:
            other = paired(facts_of(read(connection, COIL + head.id)))
            if other is not None:
                raise BookError(
                    f"coil {head.number} goes with {other.partner_number} already: part them first, with "
                    "'windctl coils unpair'"
                )

    if len({head.id for head, _ in said}) < len(said):
        raise BookError("a coil can only go with one other")
    amend(store, [(head, (fact,)) for head, fact in said], free)


def part_pair(store: Store, coil: CoilHead, wall_time: str, by: str, reason: str) -> str:
    """Part a coil from its partner, in both logs; in its own alone where the partner is in another book.

    Returns the partner's number. Raises BookError where it has none.
    """
    other: PairMade | None

    def still_so(connection: sa.Connection) -> None:
        if paired(facts_of(read(connection, COIL + coil.id))) != other:
            raise BookError(f"coil {coil.number} was parted or paired by somebody else just now")

    with store.reading() as connection:
        other = paired(facts_of(read(connection, COIL + coil.id)))
    if other is None:
        raise BookError(f"coil {coil.number} goes with no other")
    parted: list[tuple[CoilHead, tuple[Addendum, ...]]] = [
        (coil, (PairParted(wall_time, by, other.partner, other.partner_number, reason),))
    ]
    with store.reading() as connection:
        row = connection.execute(sa.select(*HEAD_COLUMNS).where(coils.c.id == other.partner)).one_or_none()
    if row is not None:
        parted.append((head_of(row), (PairParted(wall_time, by, coil.id, coil.number, reason),)))
    amend(store, parted, still_so)
    return other.partner_number


def stock_facts(store: Store) -> dict[str, list[Addendum]]:
    """By coil id, in order: what was said of each that decides about stock and magnets. Coils of which
    nothing of the kind was said are not in it."""
    facts: dict[str, list[Addendum]] = {}
    query = (
        sa.select(log_entries.c.log, log_entries.c.kind, log_entries.c.payload)
        .where(log_entries.c.kind.in_(_OF_STOCK))
        .order_by(log_entries.c.log, log_entries.c.seq)
    )
    with store.reading() as connection:
        for log, kind, payload in connection.execute(query):
            facts.setdefault(log.removeprefix(COIL), []).append(decode(kind, payload))
    return facts


# In which the two halves of a pair differ: each names the other.
_OF_THE_OTHER = ("partner", "partner_number")


def check_pairs(store: Store, coil_id: str | None = None) -> Iterator[LogFault]:
    """The two halves of each pair against each other: that each goes with the other, joined alike.

    `coil_id`: only this coil's. Half a pair stands alone where the partner is in another book.
    """
    halves = _halves(store, coil_id)
    names = _numbers(store, halves)
    for coil, half in halves.items():
        if half is None or half.partner not in names or coil_id not in (None, coil):
            continue
        other = names[half.partner]
        answer = halves[half.partner]
        says = f"it goes with {other}"
        if answer is None:
            yield LogFault(COIL + coil, None, f"{says}, and that coil goes with no other")
        elif answer.partner != coil:
            third = names.get(answer.partner, answer.partner_number)
            yield LogFault(COIL + coil, None, f"{says}, and that coil goes with {third}")
        else:
            for field in fields(half):
                here, there = getattr(half, field.name), getattr(answer, field.name)
                if field.name not in _OF_THE_OTHER and here != there:
                    what = f"{says}, and {field.name} is {here!r} here, {there!r} there"
                    yield LogFault(COIL + coil, None, what)


def _halves(store: Store, coil_id: str | None) -> dict[str, PairMade | None]:
    """By coil id: the pair that it is now part of, if it is of one; of one coil alone with its partner's.
    Logs that cannot be read are told by their own check."""
    if coil_id is not None:
        with store.reading() as connection:
            half = _half(decoded(read(connection, COIL + coil_id)))
            if half is None:
                return {}
            answer = _half(decoded(read(connection, COIL + half.partner)))
        return {coil_id: half, half.partner: answer}
    query = (
        sa.select(log_entries.c.log, log_entries.c.kind, log_entries.c.payload)
        .where(log_entries.c.kind.in_((PairMade.kind, PairParted.kind)))
        .order_by(log_entries.c.log, log_entries.c.seq)
    )
    said: dict[str, list[Addendum]] = {}
    with store.reading() as connection:
        for log, kind, payload in connection.execute(query):
            try:
                said.setdefault(str(log).removeprefix(COIL), []).append(decode(kind, payload))
            except (RecordBroken, TypeError):
                continue
    halves = {coil: _half(facts) for coil, facts in said.items()}
    lone = [half.partner for half in halves.values() if half is not None and half.partner not in halves]
    return {**halves, **dict.fromkeys(lone)}


def _half(said: Sequence[Addendum]) -> PairMade | None:
    half = paired(said)
    return half if half is not None and isinstance(half.partner, str) else None


def _numbers(store: Store, halves: dict[str, PairMade | None]) -> dict[str, str]:
    """The numbers of those coils that are in the book."""
    numbers: dict[str, str] = {}
    ids = list(halves)
    with store.reading() as connection:
        for at in range(0, len(ids), _AT_ONCE):
            query = sa.select(coils.c.id, coils.c.number).where(coils.c.id.in_(ids[at : at + _AT_ONCE]))
            numbers |= {coil: str(number) for coil, number in connection.execute(query)}
    return numbers
