"""What a book knows of the coils it has from other books, and of the numbers that it passed over for them."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field, replace

import sqlalchemy as sa

from windctl.book.heads import CoilHead, coil_number
from windctl.book.logs import IMPORTS, append, decoded, read
from windctl.book.tables import coils, numbers
from windctl.errors import BookError, RecordBroken
from windctl.record.addenda import CoilImported, NumbersPassed

_NUMBER = re.compile(r"([a-z0-9]+)-([0-9]{4})-([0-9]{4,})", re.ASCII)
_TELLING_APART = "bcdefghijklmnopqrstuvwxyz"  # the bench that a number clashes with is the first of its name


@dataclass(frozen=True, slots=True)
class Imports:
    """The latest that was said of each imported coil, by id, and the numbers that no coil was given here."""

    coils: Mapping[str, CoilImported] = field(default_factory=dict)
    passed: tuple[NumbersPassed, ...] = ()

    @property
    def silent(self) -> frozenset[str]:
        """Ids of those that teach nothing here."""
        return frozenset(coil for coil, fact in self.coils.items() if not fact.teaches)


def imports_in(connection: sa.Connection) -> Imports:
    """All of it. A row that cannot be read is passed over here, and told by the check of its log."""
    facts = decoded(read(connection, IMPORTS))
    latest = {fact.coil: fact for fact in facts if isinstance(fact, CoilImported)}
    return Imports(latest, tuple(fact for fact in facts if isinstance(fact, NumbersPassed)))


def parts_of(number: str) -> tuple[str, int, int]:
    """Bench, year and serial number of a coil's number. Raises RecordBroken for a text that is none."""
    match = _NUMBER.fullmatch(number)
    if match is None:
        raise RecordBroken(f"{number!r} is not the number of a coil")
    return match[1], int(match[2]), int(match[3])


def recorded_head(head: CoilHead, recorded: str) -> CoilHead:
    """The row with the number that the coil's record has."""
    bench, year, serial = parts_of(recorded)
    return replace(head, number=recorded, bench=bench, year=year, serial=serial)


def free_number(connection: sa.Connection, bench: str, year: int, serial: int) -> tuple[str, str]:
    """What an imported coil is called here: (bench, number). Another bench of the same name has wound where
    the number is taken, and is told apart by a letter."""
    for letter in ("", *_TELLING_APART):
        number = coil_number(bench + letter, year, serial)
        if connection.scalar(sa.select(coils.c.id).where(coils.c.number == number)) is None:
            return bench + letter, number
    taken = coil_number(bench, year, serial)
    raise BookError(f"{taken} and all that could tell it apart are taken: give the benches other names")


def next_serial(connection: sa.Connection, bench: str, year: int) -> int:
    """The next number of a bench's year, behind those of imported coils as well; the transaction's lock keeps
    others from getting the same."""
    here = (numbers.c.bench == bench, numbers.c.year == year)
    last = connection.scalar(sa.select(numbers.c.last).where(*here).with_for_update())
    of_bench = (coils.c.bench == bench, coils.c.year == year)
    highest = connection.scalar(sa.select(sa.func.max(coils.c.serial)).where(*of_bench)) or 0
    allotted = 0 if last is None else int(last)
    if highest > allotted:
        between = sa.select(coils.c.serial).where(*of_bench, coils.c.serial > allotted)
        taken = [(serial, serial) for serial in connection.scalars(between)]
        passed = [NumbersPassed(bench, year, *gap) for gap in gaps(taken, allotted + 1, highest)]
        if passed:
            append(connection, IMPORTS, passed)
        allotted = highest
    serial = allotted + 1
    if last is None:
        connection.execute(sa.insert(numbers), [{"bench": bench, "year": year, "last": serial}])
    else:
        connection.execute(sa.update(numbers).where(*here).values(last=serial))
    return serial


def gaps(present: Iterable[tuple[int, int]], first: int, last: int) -> list[tuple[int, int]]:
    """What is missing of `first..last`, as (from, to); so is what is present, in any order."""
    missing: list[tuple[int, int]] = []
    for begin, end in [*sorted(present), (last + 1, last + 1)]:
        if min(begin, last + 1) > first:
            missing.append((first, min(begin, last + 1) - 1))
        first = max(first, end + 1)
    return missing
