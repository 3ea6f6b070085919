"""Queries against a book: what each finds of a lot in which every coil differs."""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from contextlib import closing
from dataclasses import replace
from pathlib import Path

import pytest

from tests.book.samples import ENDED, finished, packed, seal, started, wound
from windctl.book.book import Book
from windctl.book.heads import CoilHead
from windctl.book.open import open_book
from windctl.record.addenda import CoilMeasured, CoilNoted, CoilReadmitted, CoilWithdrawn
from windctl.record.events import NoteMade

WHO = "Demo Winder"
LOT = (
    ("Neck single (demo)", "lot A", "s1", "within", 7600.0),
    ("Bridge 100%_hot/cold", "lot A", "s1", "outside", 8100.4),
    ("GRÜN neck", "lot B", "S2", "within", 7000.0),
    ("bridge", "", "", "not judged", 6999.6),
)


@pytest.fixture(scope="module")
def _lot(tmp_path_factory: pytest.TempPathFactory) -> Path:
    path = tmp_path_factory.mktemp("lot") / "shop.book"
    with open_book(path) as book:
        for n, (recipe, batch, spool, verdict, turns) in enumerate(LOT, 1):
            first = started(n, recipe_name=recipe, batch=batch, spool=spool,
                            operator="Second Winder" if n == 3 else WHO,
                            wall_time=f"2026-0{n}-28T23:30:00+02:00")  # fmt: skip
            writer = book.begin_coil("b1" if n < 4 else "b2", 2026, first)
            written = [NoteMade(8000, "Spliced\nat 100 turns", WHO)] if n == 2 else []
            ohm = None if n == 4 else turns / 2
            end = replace(finished(1, verdict=verdict, dcr_20c_ohm=ohm), turns=turns)
            writer.commit(packed([*wound(writer.started, 1), *written, end]))
            seal(book, writer)
        book.amend("b1-2026-0001", CoilNoted(ENDED, WHO, "größer als nötig"))
        book.amend("b1-2026-0001", CoilMeasured(ENDED, WHO, grams=28.4, grams_sd=0.02))
        book.amend("b2-2026-0001", CoilWithdrawn(ENDED, WHO, "damp"), CoilReadmitted(ENDED, WHO, "dry again"))
        book.begin_coil("b1", 2026, started(9, wall_time="2026-05-28T23:30:00+02:00")).close()
        assert book.verify().broken == ()
    return path


@pytest.fixture
def lot(_lot: Path) -> Iterator[Book]:
    """Four closed coils and an open one, a month between each and the next."""
    with open_book(_lot, readonly=True) as book:
        yield book


def numbers(heads: tuple[CoilHead, ...]) -> str:
    """Bench and serial number of each."""
    return " ".join(f"{head.bench}.{head.serial}" for head in heads)


@pytest.mark.parametrize(
    ("query", "found"),
    [
        ("", "b1.4 b2.1 b1.3 b1.2 b1.1"),
        ("neck", "b1.3 b1.1"),
        ("NECK", "b1.3 b1.1"),
        ("recipe:neck,hot", "b1.3 b1.2 b1.1"),
        ("recipe:grün", "b1.3"),
        ("GrÜn", "b1.3"),
        ("100%_", "b1.2"),
        ("100_%", ""),
        ("recipe:100%_HOT/", "b1.2"),
        ("recipe:spliced", ""),
        ("recipe:b1-2026", ""),
        ("note:neck", ""),
        ("note:2026", ""),
        ('"spliced at"', "b1.2"),
        ("note:100", "b1.2"),
        ("note:GRÖSSER", "b1.1"),
        ("note:damp note:dry", "b2.1"),
        ("28.4", ""),
        ("b1-2026-000", "b1.4 b1.3 b1.2 b1.1"),
        ("coil:b1-2026-0003", "b1.3"),
        ("coil:*-0001", "b2.1 b1.1"),
        ("coil:B2*", "b2.1"),
        ("coil:b1-2026", ""),
        ('batch:"lot a"', "b1.2 b1.1"),
        ("batch:lot*", "b1.3 b1.2 b1.1"),
        ("batch:lot_a", ""),
        ('batch:"" outcome:finished', "b2.1"),
        ("spool:s2", "b1.3"),
        ("spool:s1,S2", "b1.3 b1.2 b1.1"),
        ('not spool:""', "b1.3 b1.2 b1.1"),
        ("by:second", "b1.3"),
        ("bench:b2", "b2.1"),
        ("verdict:not-judged", "b1.4 b2.1"),
        ("not verdict:within outcome:finished", "b2.1 b1.2"),
        ("outcome:open", "b1.4"),
        ("turns:7000..7600", "b1.3 b1.1"),
        ("turns:7000", "b2.1 b1.3"),
        ("turns:8.1k", "b1.2"),
        ("not turns:7000..", "b1.4 b2.1"),
        ("ohm:..4k", "b1.3 b1.1"),
        ("not ohm:3.5k", "b1.4 b2.1 b1.2 b1.1"),
        ("started:2026-02", "b1.2"),
        ("since:2026-03-28", "b1.4 b2.1 b1.3"),
        ("until:2026-01-28", "b1.1"),
        ("until:2026-01-28T23:29", ""),
        ("started:2026-01-28T23:30", "b1.1"),
        ("since:2027", ""),
        ("sort:ohm", "b1.3 b1.1 b1.2 b1.4 b2.1"),
        ("sort:-ohm", "b1.2 b1.1 b1.3 b1.4 b2.1"),
        ("sort:coil", "b1.1 b1.2 b1.3 b1.4 b2.1"),
        ("sort:recipe,started not outcome:open", "b2.1 b1.2 b1.3 b1.1"),
        ("sort:spool,-turns", "b2.1 b1.4 b1.2 b1.1 b1.3"),
    ],
)
def test_what_a_query_finds(lot: Book, query: str, found: str) -> None:
    assert numbers(lot.list(query)) == found
    assert lot.count(query) == len(found.split())
    assert numbers(lot.list(query, limit=2)) == " ".join(found.split()[:2])
    assert numbers(lot.list(query, limit=2, offset=1)) == " ".join(found.split()[1:3])


def test_an_id_is_found_by_its_beginning(lot: Book) -> None:
    head = lot.find("b1-2026-0003")
    assert lot.list(f"id:{head.id[:6].upper()}") == (head,)
    assert lot.list(f"id:{head.id[1:7]}") == ()


def test_an_order_beside_the_query_comes_before_its_own(lot: Book) -> None:
    assert numbers(lot.list("sort:ohm", sort="bench")) == "b1.3 b1.1 b1.2 b1.4 b2.1"
    assert numbers(lot.list("sort:ohm", sort="-bench", limit=2)) == "b2.1 b1.3"
    assert numbers(lot.list("neck", recipe="GRÜN neck")) == "b1.3"


def test_looking_things_up_in_a_large_book_does_not_read_it_whole(lot: Book) -> None:
    """SQLite's own account of its plans: pages and counts come from one index, or a narrower one."""
    with closing(sqlite3.connect(lot.path)) as connection:
        for where, index in (
            ("recipe LIKE '%x%'", "coils_found"),
            ("words LIKE '%x%'", "coils_found"),
            ("verdict = 'within' AND started >= '2026'", "coils_found"),
            ("spool = 's1'", "coils_by_spool"),
            ("batch = 'x'", "coils_by_batch"),
        ):
            page = f"SELECT number FROM coils WHERE {where} ORDER BY started DESC, number DESC LIMIT 9"
            for statement in (page, f"SELECT count(*) FROM coils WHERE {where}"):
                plan = connection.execute(f"EXPLAIN QUERY PLAN {statement}").fetchall()
                assert f"USING INDEX {index}" in plan[0][3] or f"COVERING INDEX {index}" in plan[0][3]
