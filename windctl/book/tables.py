"""The book's tables, as the newest schema has them.

Types are chosen so that PostgreSQL takes the same tables: text, integers, doubles and bytes only, ids and
digests as text, booleans avoided. Empty text and NULL differ: NULL means "not known yet" (the coil is open).

Every column is answerable: it is tied to the coil's chain of digests, follows from events that are, or is
checked against them by `verify`.
"""

from __future__ import annotations

import sqlalchemy as sa

CURVE_POINTS = 500  # at most, per coil

metadata = sa.MetaData()

# Which schemas this file went through, oldest first.
ledger = sa.Table(
    "ledger",
    metadata,
    sa.Column("version", sa.Integer, primary_key=True, autoincrement=False),
    sa.Column("name", sa.Text, nullable=False),
)

# The last serial number allotted per bench and year: what a deleted coil cannot take back.
numbers = sa.Table(
    "numbers",
    metadata,
    sa.Column("bench", sa.Text, primary_key=True),
    sa.Column("year", sa.Integer, primary_key=True, autoincrement=False),
    sa.Column("last", sa.Integer, nullable=False),
)

coils = sa.Table(
    "coils",
    metadata,
    sa.Column("id", sa.Text, primary_key=True),
    sa.Column("number", sa.Text, nullable=False, unique=True),
    sa.Column("bench", sa.Text, nullable=False),
    sa.Column("year", sa.Integer, nullable=False),
    sa.Column("serial", sa.Integer, nullable=False),
    sa.Column("recipe", sa.Text, nullable=False),
    sa.Column("recipe_digest", sa.Text, nullable=False),
    sa.Column("batch", sa.Text, nullable=False),  # "" when part of none
    sa.Column("of", sa.Integer, nullable=False),  # 0 when the batch is not counted
    sa.Column("operator", sa.Text, nullable=False),
    sa.Column("started", sa.Text, nullable=False),
    sa.Column("ended", sa.Text),
    sa.Column("outcome", sa.Text, nullable=False),
    sa.Column("reason", sa.Text, nullable=False),
    sa.Column("turns", sa.Double),
    sa.Column("dcr_20c_ohm", sa.Double),
    sa.Column("dcr_u95_ohm", sa.Double),
    sa.Column("target_kind", sa.Text, nullable=False),
    sa.Column("target_value", sa.Double, nullable=False),
    sa.Column("verdict", sa.Text, nullable=False),
    sa.Column("program_digest", sa.Text, nullable=False),
    sa.Column("trace_digest", sa.Text),
    sa.Column("n_entries", sa.Integer, nullable=False),
    sa.Column("record_digest", sa.Text, nullable=False),  # the chain's last link, hex
    # Since schema 3; a default, as an older book gets them while there are coils in it.
    sa.Column("spool", sa.Text, nullable=False, server_default=sa.text("''")),  # "" when none was named
    sa.Column("words", sa.Text, nullable=False, server_default=sa.text("''")),  # what a search looks through
    sa.UniqueConstraint("bench", "year", "serial"),
    sa.Index("coils_by_batch", "batch"),
    sa.Index("coils_by_spool", "spool"),
    sa.Index("coils_by_serial", "serial"),
)

# All that a query may ask of, in one narrow index in the order of the list: no query reads the rows
# themselves but those it answers with. PostgreSQL bounds the size of an entry, and reads the rows.
coils_found = sa.Index(
    "coils_found",
    *(
        coils.c[name]
        for name in (
            "started",
            "number",
            "year",
            "serial",
            "bench",
            "recipe",
            "batch",
            "spool",
            "operator",
            "outcome",
            "verdict",
            "turns",
            "dcr_20c_ohm",
            "trace_digest",
            "words",
        )
    ),
).ddl_if(dialect="sqlite")

# `events`: how many events the row holds (a rare fact 1, a chunk many, a seal 0).
entries = sa.Table(
    "entries",
    metadata,
    sa.Column("coil", sa.Text, sa.ForeignKey("coils.id"), primary_key=True),
    sa.Column("seq", sa.Integer, primary_key=True, autoincrement=False),
    sa.Column("kind", sa.Text, nullable=False),
    sa.Column("events", sa.Integer, nullable=False),
    sa.Column("payload", sa.LargeBinary, nullable=False),
    sa.Column("link", sa.LargeBinary(32), nullable=False),
    sqlite_with_rowid=False,
)

curve = sa.Table(
    "curve",
    metadata,
    sa.Column("coil", sa.Text, sa.ForeignKey("coils.id"), primary_key=True),
    sa.Column("seq", sa.Integer, primary_key=True, autoincrement=False),
    sa.Column("turn", sa.Double, nullable=False),
    sa.Column("ohm_20c", sa.Double, nullable=False),
    sa.Column("final_ohm", sa.Double, nullable=False),
    sa.Column("final_sd", sa.Double, nullable=False),
    sqlite_with_rowid=False,
)

# What is said later about sealed coils, and about spools: chains of their own. `n` rows end in `digest`.
logs = sa.Table(
    "logs",
    metadata,
    sa.Column("name", sa.Text, primary_key=True),
    sa.Column("n", sa.Integer, nullable=False),
    sa.Column("digest", sa.Text, nullable=False),  # the chain's last link, hex
)

log_entries = sa.Table(
    "log_entries",
    metadata,
    sa.Column("log", sa.Text, sa.ForeignKey("logs.name"), primary_key=True),
    sa.Column("seq", sa.Integer, primary_key=True, autoincrement=False),
    sa.Column("kind", sa.Text, nullable=False),
    sa.Column("payload", sa.LargeBinary, nullable=False),
    sa.Column("link", sa.LargeBinary(32), nullable=False),
    sqlite_with_rowid=False,
)

# What each closed coil is to the coils to come, in the words that a plan asks by (`windctl.book.lessons`).
lessons = sa.Table(
    "lessons",
    metadata,
    sa.Column("coil", sa.Text, sa.ForeignKey("coils.id"), primary_key=True),
    sa.Column("began", sa.Double, nullable=False),
    sa.Column("teaches", sa.Integer, nullable=False),
    sa.Column("how", sa.Text, nullable=False),
    sa.Column("simulated", sa.Integer, nullable=False),
    sa.Column("bench", sa.Text, nullable=False),
    sa.Column("spool", sa.Text, nullable=False),
    sa.Column("bobbin", sa.Text, nullable=False),
    sa.Column("lay", sa.Text, nullable=False),
    sa.Column("style", sa.Text, nullable=False),
    sa.Index("lessons_by_time", "simulated", "teaches", "began"),
    sa.Index("lessons_by_spool", "spool"),
    sa.Index("lessons_by_lay", "lay", "simulated", "teaches", "began"),
    sa.Index("lessons_by_bobbin", "bobbin", "simulated", "teaches", "began"),
    sqlite_with_rowid=False,
)
