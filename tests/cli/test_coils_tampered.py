"""One altered byte anywhere in the book: `windctl coils verify` ends with 7 and names coil and event.

Every column of every table, at places drawn at random within the stored values. The list of columns comes
from the tables themselves, so that a new one cannot be forgotten.
"""

from __future__ import annotations

import json
import random
import shutil
import sqlite3
import struct
from contextlib import closing
from pathlib import Path

import pytest
from sqlalchemy import Table

from tests.book.samples import ENDED, packed, started, stocked, wind, wound
from tests.book.test_tampering import COLUMNS, names
from tests.book.test_tampering import write as write_past_the_book
from windctl.book.exchange import Hand, coil_of
from windctl.book.open import open_book
from windctl.book.verify import BrokenCoil
from windctl.cli.main import run
from windctl.record.addenda import CoilWithdrawn


@pytest.fixture(scope="module")
def _shop(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Closed coils and an open one, a spool, things said since, an imported coil and numbers passed over."""
    folder = tmp_path_factory.mktemp("shop")
    with open_book(folder / "other.book") as other:
        wind(other, 4, turns=1, bench="b3")
        other.begin_coil("b4", 2026, started(6)).close()
        imported = [wind(other, n, turns=1, bench=bench) for n, bench in ((5, "b3"), (7, "b4"))]
        lines = list(other.export_lines(imported))[1:]
    path = folder / "shop.book"
    with open_book(path) as book:
        wind(book, 1, turns=2, spool="s1")
        wind(book, 2, turns=1, bench="b2")
        with book.begin_coil("b1", 2026, started(3)) as writer:
            writer.commit(packed(wound(writer.started, 1)))
        stocked(book)
        book.amend("b1-2026-0001", CoilWithdrawn(ENDED, "Demo Winder", "damp"))
        for line in lines:
            book.take_in(coil_of(line), Hand(ENDED, "Demo Winder", True))
        wind(book, 8, turns=1, bench="b4")
        assert book.verify().broken == ()
    return path


def altered(value: object, draw: random.Random) -> object:
    """The stored value with one bit of one byte changed; of a number, of its eight bytes."""
    match value:
        case None:
            return "\x01"
        case int():
            return value ^ 1 << draw.randrange(20)
        case float():
            bits = bytearray(struct.pack("<d", value))
            bits[draw.randrange(6)] ^= 1 << draw.randrange(8)  # no infinity and no NaN
            return struct.unpack("<d", bits)[0]
        case bytes():
            at = draw.randrange(len(value))
            return value[:at] + bytes([value[at] ^ 1 << draw.randrange(8)]) + value[at + 1 :]
        case str() if value:
            at = draw.randrange(len(value))
            return value[:at] + chr(ord(value[at]) ^ 1 << draw.randrange(4)) + value[at + 1 :]
        case str():
            return "\x01"
    raise AssertionError(value)


def found(path: Path, capsys: pytest.CaptureFixture[str]) -> list[BrokenCoil]:
    """What the command finds."""
    assert run(["coils", "verify", "--book", str(path), "--json"]) == 7
    said = capsys.readouterr()
    if not said.out:  # a book that cannot be opened at all
        return [BrokenCoil("book", None, said.err)]
    return [BrokenCoil(**one) for one in json.loads(said.out)["broken"]]


def tamper(
    shop: Path, path: Path, table: Table, column: str, n: int, capsys: pytest.CaptureFixture[str]
) -> None:
    """`n` alterations, one at a time."""
    draw = random.Random(f"{table.name}.{column}")
    with closing(sqlite3.connect(shop)) as connection:
        connection.row_factory = sqlite3.Row
        rows = [dict(row) for row in connection.execute(f'SELECT * FROM "{table.name}"')]
    tried = 0
    while tried < n:
        row = draw.choice(rows)
        shutil.copyfile(shop, path)
        value = altered(row[column], draw)
        try:
            write_past_the_book(path, table, row, column, value)
        except sqlite3.IntegrityError:
            continue  # another row has that key: SQLite itself refuses it
        tried += 1
        said = found(path, capsys)
        assert any(places(one, table, column, row, shop) for one in said), (row, value, said)


def places(one: BrokenCoil, table: Table, column: str, row: dict[str, object], shop: Path) -> bool:
    """Whether a finding tells where to look: the coil, and of its record the row."""
    if table.name not in ("entries", "curve", "lessons"):
        return names(one, table, column, row)
    with closing(sqlite3.connect(shop)) as connection:
        (number,) = connection.execute("SELECT number FROM coils WHERE id = ?", [row["coil"]]).fetchone()
    if table.name in ("curve", "lessons"):
        return one.coil == number and table.name in one.what
    return (one.coil, one.event_seq) == (number, row["seq"])


@pytest.mark.parametrize(("table", "column"), COLUMNS, ids=lambda part: getattr(part, "name", part))
def test_an_altered_byte_ends_verify_with_its_own_code(
    _shop: Path, tmp_path: Path, table: Table, column: str, capsys: pytest.CaptureFixture[str]
) -> None:
    tamper(_shop, tmp_path / "spoilt.book", table, column, 1, capsys)


@pytest.mark.long
@pytest.mark.parametrize(("table", "column"), COLUMNS, ids=lambda part: getattr(part, "name", part))
def test_many_altered_bytes_end_verify_with_its_own_code(
    _shop: Path, tmp_path: Path, table: Table, column: str, capsys: pytest.CaptureFixture[str]
) -> None:
    tamper(_shop, tmp_path / "spoilt.book", table, column, 60, capsys)
