"""The way from schema 2 to 3: a coil's row tells its spool and the words to find it by.

Both are taken from the record and the log; where these cannot be read they stay empty, and `verify` tells of
it. The names of tables and columns stand here as they were then: a later version's tables may differ.
"""

from __future__ import annotations

import json

import sqlalchemy as sa

from windctl.book.words import IN_LOG, IN_RECORD, more_words, said_in, words_of, written_in
from windctl.errors import RecordBroken
from windctl.record.addenda import Addendum, decode
from windctl.record.entries import Entry

_INDEXES = (
    "CREATE INDEX coils_by_spool ON coils (spool)",
    "CREATE INDEX coils_by_serial ON coils (serial)",
    "CREATE INDEX coils_found ON coils (started, number, year, serial, bench, recipe, batch, spool, "
    "operator, outcome, verdict, turns, dcr_20c_ohm, trace_digest, words)",
)


def add_spool_and_words(connection: sa.Connection) -> None:
    """Add the columns, fill them, and index them."""
    for column in ("spool", "words"):
        connection.exec_driver_sql(f"ALTER TABLE coils ADD COLUMN {column} TEXT DEFAULT '' NOT NULL")
    change = sa.text("UPDATE coils SET spool = :spool, words = :words WHERE id = :coil")
    known = connection.exec_driver_sql("SELECT id, recipe, number FROM coils").fetchall()
    for coil, recipe, number in known:
        first = sa.text("SELECT payload FROM entries WHERE coil = :coil AND seq = 0")
        payload = connection.execute(first, {"coil": coil}).scalar()
        words = words_of(str(recipe), str(number), _written(connection, coil))
        connection.execute(change, {"coil": coil, "spool": _spool(payload), "words": words})
    _add_said(connection)
    for index in ("coils_by_start", "coils_by_recipe"):
        connection.exec_driver_sql(f"DROP INDEX {index}")
    for statement in _INDEXES:
        connection.exec_driver_sql(statement)


def _spool(payload: object) -> str:
    try:
        spool = json.loads(payload)["spool"] if isinstance(payload, bytes) else ""
    except (ValueError, KeyError, TypeError):
        return ""
    return spool if isinstance(spool, str) else ""


def _written(connection: sa.Connection, coil: str) -> tuple[str, ...]:
    query = sa.text("SELECT kind, payload FROM entries WHERE coil = :coil AND kind = :kind ORDER BY seq")
    rows = connection.execute(query, {"coil": coil, "kind": IN_RECORD[0]})
    return written_in(Entry(kind, payload, 1) for kind, payload in rows if isinstance(payload, bytes))


def _add_said(connection: sa.Connection) -> None:
    """What was said since: few coils have any of it, so their logs are gone through once."""
    kinds = ", ".join(f"'{kind}'" for kind in IN_LOG)
    query = f"SELECT log, kind, payload FROM log_entries WHERE kind IN ({kinds}) ORDER BY log, seq"
    change = sa.text("UPDATE coils SET words = words || :more WHERE id = :coil")
    for log, kind, payload in connection.exec_driver_sql(query).fetchall():
        try:
            fact: Addendum = decode(kind, payload)
        except (RecordBroken, TypeError):
            continue
        coil = str(log).removeprefix("coil ")
        connection.execute(change, {"coil": coil, "more": more_words(said_in((fact,)))})
