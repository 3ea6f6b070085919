"""An export holds everything, and what was altered in it is found without the book."""

from __future__ import annotations

import base64
import hashlib
import json
from pathlib import Path
from typing import Any

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from tests.book.samples import coil_id, finished, packed, seal, started, stocked, wind, wound
from windctl.book.book import Book
from windctl.book.export import restored
from windctl.book.open import open_book
from windctl.book.queries import stored_rows
from windctl.book.store import Store
from windctl.errors import RecordBroken
from windctl.record.events import NoteMade

texts = st.text(st.characters(exclude_categories=["Cs"]), max_size=30)


def exported(book: Book, coil: str) -> dict[str, Any]:
    """A coil's export after its way through a file."""
    data: dict[str, Any] = json.loads(json.dumps(book.export(coil)))
    return data


@settings(max_examples=15, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(
    notes=st.lists(st.builds(NoteMade, st.integers(-(2**40), 2**40), texts, texts), max_size=5),
    recipe=texts,
    batch=texts,
    ohm=st.floats(0.0, 1e6),
    turns=st.integers(1, 3),
)
def test_an_exported_coil_comes_back_whole(
    book: Book, path: Path, notes: list[NoteMade], recipe: str, batch: str, ohm: float, turns: int
) -> None:
    n = book.count()
    writer = book.begin_coil("b1", 2026, started(n, recipe_name=recipe, batch=batch))
    writer.commit(packed([*wound(writer.started, turns), *notes, finished(turns, dcr_20c_ohm=ohm)]))
    seal(book, writer)
    back = restored(exported(book, writer.id))
    assert back.head == book.find(writer.id)
    assert back.curve == book.curve(writer.id)
    store = Store(path, "ro")
    assert list(back.rows) == list(stored_rows(store, writer.id, back.head.n_entries))
    store.close()
    assert book.verify(writer.number).broken == ()


def test_an_open_coil_can_be_exported(copied: Path) -> None:
    with open_book(copied, readonly=True) as book:
        back = restored(exported(book, "b1-2026-0002"))
        assert not back.head.sealed
        assert back.head == book.find("b1-2026-0002")


def test_the_digests_can_be_computed_with_nothing_but_sha_256(book: Book) -> None:
    """The rule as it is documented, written down a second time."""
    data = exported(book, wind(book, 1, turns=2).number)
    last = hashlib.sha256(b"windctl coil 1\0" + coil_id(1).encode()).digest()
    assert last.hex() == data["genesis"]
    for row in data["entries"]:
        kind = row["kind"].encode()
        tied = last + len(kind).to_bytes(2, "big") + kind + base64.b64decode(row["payload"])
        last = hashlib.sha256(tied).digest()
        assert last.hex() == row["link"]
    assert last.hex() == data["record_digest"]
    assert len(data["entries"]) == data["n_entries"]


def leaves(data: Any, *way: Any) -> list[tuple[Any, ...]]:
    """The way to every value in an export that `restored` uses."""
    if isinstance(data, dict):
        return [leaf for key in data for leaf in leaves(data[key], *way, key)]
    if isinstance(data, list):
        return [leaf for n, item in enumerate(data) for leaf in leaves(item, *way, n)]
    return [way]


def test_whatever_is_altered_in_an_export_is_found(book: Book) -> None:
    """But for what repeats the rows in another form: `events`, `genesis`, `sealed`, `addenda`."""
    wind(book, 1, turns=1)
    stocked(book)
    data = exported(book, "1")
    ways = [way for way in leaves(data) if way[0] not in ("events", "genesis", "sealed", "addenda")]
    assert len(ways) > 60
    for way in ways:
        spoilt = json.loads(json.dumps(data))
        place = spoilt
        for step in way[:-1]:
            place = place[step]
        old = place[way[-1]]
        if isinstance(old, str):
            place[way[-1]] = ("2" if old[:1] == "1" else "1") + old[1:]
        else:
            place[way[-1]] = old + 1
        with pytest.raises(RecordBroken):
            restored(spoilt)


def test_an_export_that_went_through_a_program_without_two_kinds_of_number(book: Book) -> None:
    """JSON has one kind of number: 30.0 may come back as 30."""
    data = exported(book, wind(book, 1, turns=1).number)
    assert data["turns"] == 1.0
    data["turns"] = 1
    data["target"]["value"] = 30
    assert restored(data).head == book.find("1")


def test_an_export_that_is_not_whole_says_so(book: Book) -> None:
    data = exported(book, wind(book, 1, turns=1).number)
    for key in set(data) - {"events", "genesis", "sealed", "addenda", "spool"}:
        with pytest.raises(RecordBroken, match="not whole"):
            restored({name: value for name, value in data.items() if name != key})
    with pytest.raises(RecordBroken, match="format 2; this windctl reads format 1"):
        restored({**data, "format": 2})
