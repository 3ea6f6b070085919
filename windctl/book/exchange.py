"""Coils from one book to another, in a file: lossless, exported again they are the same to the byte.

A file of coils is text: a line that says what it holds and how many, then a line for each coil, canonical
JSON (sorted keys, no blanks). A single coil as `coils export` prints it is read as well. Every coil is
checked against its own digests before anything of it is written, and written in one transaction: an import
that is cut off leaves whole coils behind, and goes on where it is begun again.
"""

from __future__ import annotations

import json
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

import sqlalchemy as sa

from windctl.book.export import FORMAT, Restored, exported, restored
from windctl.book.heads import CoilHead, curve_rows, head_columns
from windctl.book.imports import free_number, imports_in
from windctl.book.lessons import keep_row
from windctl.book.logs import COIL, IMPORTS, Log, LogRow, append, append_stored, facts_of, read
from windctl.book.queries import HEAD_COLUMNS, head_of
from windctl.book.store import Store
from windctl.book.tables import coils, curve, entries
from windctl.book.words import IN_RECORD, more_words, said_in, words_of, written_in
from windctl.errors import BookError, RecordBroken
from windctl.record.addenda import CoilImported
from windctl.record.canonical import dumps

HOLDS = "coils of a coil book"


@dataclass(frozen=True, slots=True)
class Taken:
    """What became of one coil. `how`: "new", "same" (nothing was to be done), "more" (what was said since was
    taken over), "less" (here more is said of it than in the file), "taught" (teaches from now on).

    `number` is what it is called here, `recorded` in its record.
    """

    number: str
    recorded: str
    how: str


@dataclass(frozen=True, slots=True)
class Hand:
    """Who imports, and when."""

    wall_time: str
    by: str
    teach: bool


def lines_of(store: Store, heads: Sequence[CoilHead]) -> Iterator[bytes]:
    """A file of these coils, line by line, in the order of their beginnings, however they were asked for.

    Raises RecordBroken for one that cannot be read.
    """
    yield dumps({"format": FORMAT, "holds": HOLDS, "coils": len(heads)}) + b"\n"
    for head in sorted(heads, key=lambda head: (head.started, head.id)):
        yield dumps(exported(store, head, told=False)) + b"\n"


def coils_in(path: Path) -> tuple[int, Iterator[bytes]]:
    """How many coils a file says it holds, and the text of each, for `coil_of`; read as it is gone through.

    Raises BookError for a file that cannot be read, RecordBroken for one that holds no coils, and on the way
    where it ends too early.
    """
    try:
        with path.open("rb") as file:
            beginning = file.readline()
            first = _json(beginning)
            if first is not None and first.get("holds") == HOLDS:
                n = first.get("coils")
                if first.get("format") != FORMAT or not isinstance(n, int):
                    raise RecordBroken(
                        f"{path} has format {first.get('format')!r}, this windctl reads format {FORMAT}"
                    )
                return n, _lines(path, n)
            text = beginning + file.read()
    except OSError as error:
        raise BookError(
            f"{path} cannot be read ({error.strerror}): check its name and permissions"
        ) from error
    if "entries" not in (_json(text) or {}):
        raise RecordBroken(f"{path} holds no coils: 'windctl coils export' writes files that do")
    return 1, iter([text])


def _lines(path: Path, n: int) -> Iterator[bytes]:
    seen = 0
    try:
        with path.open("rb") as file:
            file.readline()
            for line in file:
                seen += 1
                yield line
    except OSError as error:
        raise BookError(f"{path} cannot be read further ({error.strerror})") from error
    if seen != n:
        raise RecordBroken(f"{path} is not whole: it holds {seen} coils, its first line says {n}")


def coil_of(text: bytes) -> Restored:
    """A coil, when every digest in it agrees. Raises RecordBroken."""
    found = _json(text)
    if found is None:
        raise RecordBroken("a coil's text is not whole, or was altered: it is no JSON object")
    return restored(found)


def _json(text: bytes) -> dict[str, Any] | None:
    try:
        found = json.loads(text)
    except ValueError:
        return None
    return found if isinstance(found, dict) else None


def take_in(store: Store, one: Restored, hand: Hand) -> Taken:
    """Put a checked coil into the book, unless it is there already.

    Raises BookError when the book has another coil under the same id, or other words about it.
    """
    head = one.head
    if not head.sealed:
        raise BookError(
            f"coil {head.number} is still open: end it where it is wound, or move the whole book with "
            "'windctl coils backup' and 'restore'"
        )
    with store.atomic() as connection:
        here = connection.execute(sa.select(*HEAD_COLUMNS).where(coils.c.id == head.id)).one_or_none()
        if here is None:
            return _new(connection, one, hand)
        return _again(connection, head_of(here), one, hand)


def _new(connection: sa.Connection, one: Restored, hand: Hand) -> Taken:
    recorded = one.head.number
    bench, number = free_number(connection, one.head.bench, one.head.year, one.head.serial)
    head = replace(one.head, bench=bench, number=number)
    rows = [row.entry for row in one.rows if row.entry.kind in IN_RECORD]
    words = words_of(head.recipe, number, (*written_in(rows), *said_in(facts_of(one.log))))
    connection.execute(sa.insert(coils), [{**head_columns(head), "words": words}])
    stored = [
        {
            "coil": head.id,
            "seq": row.seq,
            "kind": row.entry.kind,
            "events": row.entry.events,
            "payload": row.entry.payload,
            "link": row.link,
        }
        for row in one.rows
    ]
    connection.execute(sa.insert(entries), stored)
    if one.curve:
        connection.execute(sa.insert(curve), curve_rows(head.id, one.curve))
    if one.log is not None:
        append_stored(connection, COIL + head.id, _stored(one.log.rows))
    _note(connection, hand, head.id, number, recorded, hand.teach)
    keep_row(connection, head.id, silent=not hand.teach)
    return Taken(number, recorded, "new")


def _again(connection: sa.Connection, here: CoilHead, one: Restored, hand: Hand) -> Taken:
    """The coil is here: nothing is to be done, unless more was said of it since."""
    recorded = one.head.number
    named = recorded if here.number == recorded else f"{recorded} (here {here.number})"
    if here.record_digest != one.head.record_digest:
        raise BookError(
            f"coil {named}: the book has another record under the same id, which ends with "
            f"{here.record_digest[:16]}, the file's with {one.head.record_digest[:16]}; nothing was changed. "
            "'windctl coils verify' says whether one of them was altered"
        )
    log = read(connection, COIL + here.id)
    ours, theirs = _links(log), _links(one.log)
    common = min(len(ours), len(theirs))
    if ours[:common] != theirs[:common]:
        raise BookError(
            f"coil {named}: different things were said of it here and where the file comes from; "
            "nothing was changed. Keep one of the two, and note there what the other one says"
        )
    how = "same" if len(ours) == len(theirs) else "less" if len(ours) > len(theirs) else "more"
    if one.log is not None and how == "more":
        append_stored(connection, COIL + here.id, _stored(one.log.rows[common:]))
        if texts := said_in(facts_of(one.log)[common:]):
            longer = coils.c.words + more_words(texts)
            connection.execute(sa.update(coils).where(coils.c.id == here.id).values(words=longer))
        keep_row(connection, here.id)
    if hand.teach and here.id in imports_in(connection).silent:
        _note(connection, hand, here.id, here.number, recorded, True)
        keep_row(connection, here.id, silent=False)
        how = "taught" if how == "same" else how
    return Taken(here.number, recorded, how)


def _note(
    connection: sa.Connection, hand: Hand, coil: str, number: str, recorded: str, teaches: bool
) -> None:
    fact = CoilImported(hand.wall_time, hand.by, coil, number, recorded, teaches)
    append(connection, IMPORTS, (fact,))


def _stored(rows: Sequence[LogRow]) -> list[tuple[str, bytes]]:
    return [(row.kind, row.payload) for row in rows]


def _links(log: Log | None) -> list[bytes]:
    return [] if log is None else [row.link for row in log.rows]
