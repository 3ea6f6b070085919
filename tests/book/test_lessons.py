"""Which lessons a plan hears: those of its spool, the last ones, and the last ones about what it asks for."""

from __future__ import annotations

import itertools
import random
import shutil
import sqlite3
from collections.abc import Collection, Iterator
from contextlib import closing
from dataclasses import replace
from pathlib import Path

import pytest

from tests.book.many import fill
from tests.book.samples import ENDED, wind
from tests.forecast.truth import DEFAULT
from tests.plan.experience.lots import TURNS, Lots, basis, lesson, lot, settled
from windctl.book import lessons as kept
from windctl.book.book import Book
from windctl.book.exchange import Hand, coil_of
from windctl.book.lessons import CoilLesson
from windctl.book.open import open_book
from windctl.plan.beliefs import Believed
from windctl.plan.experience.fold import learn
from windctl.plan.experience.gaussian import Name
from windctl.plan.experience.lesson import Lesson, Resistance
from windctl.plan.experience.outlook import outlook
from windctl.record.addenda import CoilNoted, CoilReadmitted, CoilTaught, CoilWithdrawn

WHO = "Demo Winder"
ABOUT: tuple[Name, ...] = (("lay", "even"), ("core", "wide"), ("meter", "b2"), ("style", "even"))


def wound_lots(book: Book, coils: int) -> None:
    """Coils of two spools or none, two lays, two bobbins and two benches, begun minutes apart or at once."""
    draw = random.Random("lots")
    for n in range(coils):
        bench = draw.choice(["b1", "b2"])
        lay = draw.choice(["even", "scatter"])
        based = replace(basis(), lay=lay, style=lay, bobbin=draw.choice(["wide", "narrow"]))
        begun = f"2026-05-04T08:{n // 2:02d}:00+02:00"
        spool = draw.choice(["s1", "s2", ""])
        head = wind(book, n, turns=1, bench=bench, wall_time=begun, spool=spool, basis=based)
        measured = (Resistance(25.0 + n / 10, 0.002),)
        one = Lesson(head.number, bench, spool, based, 30.0, 0.004, measured, n % 4 == 3)
        if n % 5:  # of some it was not written down; these are real
            book.amend(head.number, CoilTaught("1", one))


def by_hand(book: Book, about: Collection[Name], unreal: bool) -> list[CoilLesson]:
    """The same choice from all lessons, in the plainest way. Of those begun at once any may come first."""
    every = [one for one in book.lessons() if one.lesson.simulated == unreal]
    teach = sorted(
        (one for one in every if one.withdrawn is None),
        key=lambda one: (kept.moment_of(one.began), book.find(one.lesson.coil).id),
    )
    chosen = teach[-kept.RECENT :]
    for what, thing in about:
        has = {
            "lay": lambda one: one.lesson.basis.lay,
            "core": lambda one: one.lesson.basis.bobbin,
            "style": lambda one: one.lesson.basis.style,
            "meter": lambda one: one.lesson.bench,
        }.get(what)
        if what == "level":
            chosen += [one for one in every if one.lesson.spool == thing]
        elif has is not None:
            chosen += [one for one in teach if has(one) == thing][-kept.ABOUT :]
    return [one for one in every if one in chosen]


@pytest.fixture(scope="module")
def _wound(tmp_path_factory: pytest.TempPathFactory) -> Path:
    path = tmp_path_factory.mktemp("lots") / "shop.book"
    with open_book(path) as book:
        wound_lots(book, 20)
    return path


@pytest.fixture
def lots(_wound: Path, path: Path, monkeypatch: pytest.MonkeyPatch) -> Iterator[Book]:
    shutil.copyfile(_wound, path)
    monkeypatch.setattr(kept, "RECENT", 4)
    monkeypatch.setattr(kept, "ABOUT", 2)
    with open_book(path) as book:
        yield book


def test_a_plan_hears_its_spool_and_the_last_coils_about_what_it_asks(lots: Book) -> None:
    for unreal, spool in itertools.product((False, True), ("s1", "s2", "")):
        about = (*ABOUT, ("level", spool), ("slope", spool), ("jaws", "even"))
        heard = list(lots.heard(about, simulated=unreal))
        assert heard == by_hand(lots, about if spool else ABOUT, unreal)
        assert 3 < len(heard) < 15
    assert lots.kinds_of("s1") == {one.lesson.simulated for one in lots.lessons() if one.lesson.spool == "s1"}
    assert lots.verify().good


def test_a_withdrawn_coil_is_as_one_never_wound(lots: Book, tmp_path: Path) -> None:
    """What is heard then is what would be heard in a book without it."""
    out = lots.heard(ABOUT, simulated=False)[-1].lesson.coil
    with open_book(tmp_path / "without.book") as without:
        for head in reversed(lots.list()):
            if head.number != out:
                without.take_in(
                    coil_of(b"".join(lots.export_lines([head])).splitlines()[1]), Hand("", "", True)
                )
        lots.amend(out, CoilWithdrawn(ENDED, WHO, "a warped core"))
        heard = lots.heard(ABOUT, simulated=False)
        assert [one.lesson for one in heard] == [one.lesson for one in without.heard(ABOUT, simulated=False)]
        assert without.verify().good
    lots.amend(out, CoilReadmitted(ENDED, WHO, "it was another one"))
    assert out in [one.lesson.coil for one in lots.heard(ABOUT, simulated=False)]
    assert lots.verify().good


def test_a_coil_that_was_imported_to_be_looked_at_is_not_heard(lots: Book, tmp_path: Path) -> None:
    head = lots.find(lots.lessons()[0].lesson.coil)
    text = b"".join(lots.export_lines([head])).splitlines()[1]
    with open_book(tmp_path / "other.book") as other:
        other.take_in(coil_of(text), Hand("", "", False))
        other.amend(head.number, CoilNoted(ENDED, WHO, "only looked at"))
        assert other.heard((), simulated=False) == other.lessons() == ()
        assert other.heard((("level", head.spool),), simulated=False, also=[head.id]) == ()
        assert other.verify().good
        other.take_in(coil_of(text), Hand("", "", True))
        assert [one.lesson.coil for one in other.heard((), simulated=False)] == [head.number]
        assert other.verify().good


def test_a_row_among_the_lessons_that_is_gone_or_too_many_is_found(lots: Book, path: Path) -> None:
    first = lots.find(lots.lessons()[0].lesson.coil)
    lots.close()
    with closing(sqlite3.connect(path)) as connection, connection:
        connection.execute("DELETE FROM lessons WHERE coil = ?", [first.id])
        row = (0.0, 1, "told", 0, "b1", "", "", "", "")
        connection.execute("INSERT INTO lessons VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?)", ("no coil", *row))
    found = {fault.coil: fault.what for fault in lots.verify().broken}
    assert found == {
        first.number: "its row among the lessons: there is none",
        "no coil": "1 rows among the lessons belong to no coil in the book",
    }


def test_the_coils_begun_last_know_what_older_ones_taught() -> None:
    """Twenty spools of 24 coils that grow by their own laws, all of one lay. What is foreseen of coils from
    the last spools by those that are heard, beside by all: within a fifth of what is not known anyway, and as
    sure."""
    based, laws = basis(), Lots(packing=(0.58, 0.58), crown=(1.09, 1.09))
    told = [
        replace(lesson(24 * n + at, (settled(one),), DEFAULT, based), spool=f"s{n}")
        for n in range(20)
        for at, one in enumerate(lot(n, 24, laws))
    ]
    for at in (*range(19 * 24, 20 * 24, 5), 18 * 24):
        spool = told[at].spool
        about = {(what, spool) for what in ("level", "slope", "area", "metal")}
        about |= {("lay", based.lay), ("style", based.style), ("core", based.bobbin), ("meter", "d1")}
        every = told[:at]
        last = [one for n, one in enumerate(every) if n >= at - kept.RECENT or one.spool == spool]
        assert len(last) < len(every) - 200
        known = [
            Believed(based, outlook(learn(some, (), about), replace(told[at], measured=())))
            for some in (every, last)
        ]
        whole, heard = [one.ohm_per_m * one.coil.wire_length_m(TURNS) for one in known]
        sd, sd_heard = [one.resistance_sd_ohm(TURNS) for one in known]
        assert abs(heard - whole) < 0.2 * sd
        assert sd_heard == pytest.approx(sd, rel=0.02)


def test_a_shop_made_quickly_is_one_made_for_real(path: Path) -> None:
    """The book that benchmarks ask: whole, and each of its coils teaches."""
    fill(path, 60, 0, taught=True)
    with open_book(path) as book:
        assert book.verify().good
        assert len(book.lessons()) == len(book.heard((), simulated=False)) == 60
        assert [one.lesson.coil for one in book.lessons()] == [head.number for head in book.list()][::-1]
