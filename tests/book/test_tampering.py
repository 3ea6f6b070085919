"""Whatever is altered behind the book's back is found, and the place is named.

Every value of every table is altered in turn, in the smallest way its kind allows, past our code. The list of
columns comes from the tables themselves, so that a new one cannot be forgotten.
"""

from __future__ import annotations

import math
import random
import sqlite3
from collections.abc import Iterator
from contextlib import closing
from pathlib import Path

import pytest
from sqlalchemy import Table

from tests.book.samples import coil_id
from windctl.book.open import open_book
from windctl.book.tables import metadata
from windctl.book.verify import BrokenCoil
from windctl.errors import BookError

COLUMNS = [(table, column.name) for table in metadata.sorted_tables for column in table.columns]


def spoilt(value: object) -> list[object]:
    """The value with the least change, once at its beginning and once at its end where it has both."""
    match value:
        case None:
            return ["x"]
        case int():
            return [value + 1007]
        case float():
            return [math.nextafter(value, math.inf), -value] if value else [5e-324]
        case bytes():
            return [value[:-1] + bytes([value[-1] ^ 1]), bytes([value[0] ^ 0x80]) + value[1:]]
        case str() if value:
            return [value[:-1] + chr(ord(value[-1]) ^ 1), chr(ord(value[0]) ^ 1) + value[1:]]
        case str():
            return [" "]
    raise AssertionError(value)


def alterations(path: Path, table: Table, column: str) -> Iterator[tuple[dict[str, object], object]]:
    """Each row of `table` as it is, and each other value to write into its `column`."""
    with closing(sqlite3.connect(path)) as connection:
        connection.row_factory = sqlite3.Row
        rows = [dict(row) for row in connection.execute(f'SELECT * FROM "{table.name}"')]
    if "coil" in table.columns:  # of a closed coil and an open one, not of every coil
        rows = [row for row in rows if row["coil"] != coil_id(2)]
    assert rows
    for row in rows:
        for value in spoilt(row[column]):
            yield row, value


def write(path: Path, table: Table, row: dict[str, object], column: str, value: object) -> None:
    """Put `value` into `column` of `row`, past all of our code."""
    keys = [key.name for key in table.primary_key.columns]
    where = " AND ".join(f'"{key}" = ?' for key in keys)
    with closing(sqlite3.connect(path, isolation_level=None)) as connection:
        done = connection.execute(
            f'UPDATE "{table.name}" SET "{column}" = ? WHERE {where}', [value, *(row[key] for key in keys)]
        )
        assert done.rowcount == 1


def verified(path: Path) -> tuple[BrokenCoil, ...]:
    """What is found wrong with the book at `path`."""
    with open_book(path, readonly=True) as book:
        return book.verify().broken


def names(finding: BrokenCoil, table: Table, column: str, row: dict[str, object]) -> bool:
    """Whether a finding tells where to look."""
    numbers = {coil_id(1): "b1-2026-0001", coil_id(2): "b2-2026-0001", coil_id(3): "b1-2026-0002"}
    numbers[coil_id(5)] = "b3-2026-0001"
    match table.name:
        case "ledger":
            return finding.coil == "book" and "ledger of schemas" in finding.what
        case "numbers":
            return "numbers" in finding.what or finding.coil.startswith(str(row["bench"]))
        case "coils":
            if column in ("n_entries", "record_digest"):
                return finding.coil == row["number"] and "the coil's row says" in finding.what
            if column in ("id", "number"):
                return column in finding.what or "belong to no coil" in finding.what
            if column in ("bench", "year", "serial"):
                return finding.coil == row["number"] and "does not go with" in finding.what
            return finding.coil == row["number"] and finding.what.startswith(f"{column} is ")
        case "entries":
            place = (finding.coil, finding.event_seq)
            return place == (numbers[str(row["coil"])], row["seq"])
        case "logs" | "log_entries":
            about = str(row.get("name", row.get("log")))
            if about == f"coil {coil_id(1)}":
                return finding.coil == "b1-2026-0001" or about in finding.what
            return finding.coil == "book" and about in finding.what
        case "curve":
            return finding.coil == numbers[str(row["coil"])] and "curve" in finding.what
        case "lessons":
            said = "lessons: there is none" if column == "coil" else f"lessons: {column} is "
            return finding.coil == numbers[str(row["coil"])] and said in finding.what
    raise AssertionError(table.name)


@pytest.mark.parametrize(("table", "column"), COLUMNS, ids=lambda part: getattr(part, "name", part))
def test_an_altered_value_is_found_and_named(copied: Path, table: Table, column: str) -> None:
    pristine = copied.read_bytes()
    tried = 0
    with open_book(copied, readonly=True) as book:
        assert book.verify().broken == ()
        for row, value in alterations(copied, table, column):
            book.close()  # the file is changed under it
            copied.write_bytes(pristine)
            write(copied, table, row, column, value)
            within = table.name in ("entries", "curve") and column != "coil"
            found = book.verify(str(row["coil"]) if within else None).broken
            assert any(names(finding, table, column, row) for finding in found), (row, value, found)
            tried += 1
    assert tried > 0


@pytest.mark.parametrize("column", [column.name for column in metadata.tables["coils"].columns])
def test_a_value_of_another_kind_is_found(copied: Path, column: str) -> None:
    """SQLite keeps a blob in any column, and a text that is no number in a number's."""
    with closing(sqlite3.connect(copied, isolation_level=None)) as connection:
        connection.execute(f"UPDATE coils SET \"{column}\" = x'FF00' WHERE number = 'b1-2026-0001'")
    assert verified(copied)


@pytest.mark.parametrize("column", ["kind", "events", "payload", "link"])
def test_a_value_of_another_kind_in_a_record_is_found_in_its_row(copied: Path, column: str) -> None:
    other = {"kind": "x'FF'", "events": "'many'", "payload": "'text'", "link": "'text'"}[column]
    with closing(sqlite3.connect(copied, isolation_level=None)) as connection:
        connection.execute(
            f'UPDATE entries SET "{column}" = {other} WHERE coil = ? AND seq = 3', [coil_id(1)]
        )
    places = {(finding.coil, finding.event_seq) for finding in verified(copied)}
    assert ("b1-2026-0001", 3) in places


def test_a_text_that_is_no_text_is_found(copied: Path) -> None:
    with closing(sqlite3.connect(copied, isolation_level=None)) as connection:
        connection.execute("UPDATE coils SET recipe = CAST(x'64FF' AS TEXT) WHERE bench = 'b1'")
        connection.execute("UPDATE coils SET number = CAST(x'FE' || serial AS TEXT) WHERE bench = 'b1'")
    found = verified(copied)
    assert any("recipe is 'd\\udcff'" in finding.what for finding in found)
    for finding in found:
        str(finding).encode()  # can be printed


def test_a_single_alteration_of_a_record_is_a_single_finding(copied: Path) -> None:
    """Neither the rows that follow nor what rests on the record are blamed for it."""
    pristine = copied.read_bytes()
    for column in ("payload", "link"):
        for seq in (0, 2, 4):
            copied.write_bytes(pristine)
            with closing(sqlite3.connect(copied, isolation_level=None)) as connection:
                cell = f"SELECT {column} FROM entries WHERE coil = ? AND seq = ?"
                (value,) = connection.execute(cell, [coil_id(1), seq]).fetchone()
                altered = bytes([value[0] ^ 1]) + value[1:]
                change = f"UPDATE entries SET {column} = ? WHERE coil = ? AND seq = ?"
                connection.execute(change, [altered, coil_id(1), seq])
            found = [finding for finding in verified(copied) if finding.event_seq is not None]
            assert [(finding.coil, finding.event_seq) for finding in found] == [("b1-2026-0001", seq)]


@pytest.mark.parametrize("kept", [1, 3, -2, -1])
def test_a_record_cut_short_is_found(copied: Path, kept: int) -> None:
    with closing(sqlite3.connect(copied, isolation_level=None)) as connection:
        (n,) = connection.execute("SELECT count(*) FROM entries WHERE coil = ?", [coil_id(1)]).fetchone()
        stop = kept if kept > 0 else n + kept
        connection.execute("DELETE FROM entries WHERE coil = ? AND seq >= ?", [coil_id(1), stop])
    found = [finding.what for finding in verified(copied) if finding.coil == "b1-2026-0001"]
    assert f"the record has {stop} rows, the coil's row says {n}" in found
    assert "the coil is closed, but the seal of its record is missing" in found


def test_an_open_record_cut_short_is_found(copied: Path) -> None:
    with closing(sqlite3.connect(copied, isolation_level=None)) as connection:
        connection.execute(
            "DELETE FROM entries WHERE coil = ? AND seq = (SELECT max(seq) FROM entries WHERE coil = ?)",
            [coil_id(3), coil_id(3)],
        )
    assert {finding.coil for finding in verified(copied)} == {"b1-2026-0002"}


def test_rows_taken_out_put_in_or_swapped_are_found(copied: Path) -> None:
    pristine = copied.read_bytes()
    coil = coil_id(1)
    changes = {
        "rows 2 to 3 are missing": [f"DELETE FROM entries WHERE coil = '{coil}' AND seq IN (2, 3)"],
        "row 2 is missing": [f"DELETE FROM entries WHERE coil = '{coil}' AND seq = 2"],
        "comes after the seal": [
            f"INSERT INTO entries SELECT coil, seq + 1, kind, events, payload, link FROM entries "
            f"WHERE coil = '{coil}' ORDER BY seq DESC LIMIT 1",
            f"UPDATE coils SET n_entries = n_entries + 1 WHERE id = '{coil}'",
        ],
        "was altered": [
            f"UPDATE entries SET seq = -seq WHERE coil = '{coil}' AND seq IN (2, 3)",
            f"UPDATE entries SET seq = 5 + seq WHERE coil = '{coil}' AND seq < 0",
        ],
    }
    for what, statements in changes.items():
        copied.write_bytes(pristine)
        with closing(sqlite3.connect(copied, isolation_level=None)) as connection:
            for statement in statements:
                connection.execute(statement)
        found = verified(copied)
        assert any(what in finding.what for finding in found), (what, found)
        assert {finding.coil for finding in found} == {"b1-2026-0001"}


def test_a_deleted_coil_leaves_a_gap(copied: Path) -> None:
    pristine = copied.read_bytes()
    for n, number in ((1, "b1-2026-0001"), (3, "b1-2026-0002"), (2, "b2-2026-0001")):
        copied.write_bytes(pristine)
        with closing(sqlite3.connect(copied, isolation_level=None)) as connection:
            for table in ("entries", "curve", "lessons"):
                connection.execute(f"DELETE FROM {table} WHERE coil = ?", [coil_id(n)])
            connection.execute("DELETE FROM coils WHERE id = ?", [coil_id(n)])
        with open_book(copied, readonly=True) as book:
            report = book.verify()
        assert report.checked == 2
        missing, *rest = [str(finding) for finding in report.broken]
        assert missing == f"{number}: missing: the number was allotted, but its coil is not in the book"
        assert rest == ([f"book: the log 'coil {coil_id(1)}': its coil is not in the book"] if n == 1 else [])


def test_many_deleted_coils_are_one_finding(copied: Path) -> None:
    with closing(sqlite3.connect(copied, isolation_level=None)) as connection:
        connection.execute("UPDATE numbers SET last = 1000000000 WHERE bench = 'b1'")
    (finding,) = verified(copied)
    assert finding.coil == "b1-2026-0003"
    assert "all up to b1-2026-1000000000 were allotted" in finding.what


def test_any_altered_byte_of_the_file_is_found_or_harmless(copied: Path) -> None:
    """Harmless: a place that SQLite does not use, so that all that is stored reads as before."""

    def content(path: Path) -> list[list[tuple[object, ...]]]:
        with closing(sqlite3.connect(path)) as connection:
            return [
                connection.execute(f'SELECT * FROM "{table.name}" ORDER BY 1, 2').fetchall()
                for table in metadata.sorted_tables
            ]

    pristine = copied.read_bytes()
    before = content(copied)
    draw = random.Random(20260504)
    written = [place for place, byte in enumerate(pristine) if byte]
    found = 0
    for n in range(60):
        place, bit = draw.choice(written) if n % 2 else draw.randrange(len(pristine)), 1 << draw.randrange(8)
        copied.write_bytes(pristine[:place] + bytes([pristine[place] ^ bit]) + pristine[place + 1 :])
        try:
            with open_book(copied, readonly=True) as book:
                broken = bool(book.verify().broken)
        except BookError:
            broken = True
        assert broken or content(copied) == before, (place, bit)
        found += broken
    assert found > 10
