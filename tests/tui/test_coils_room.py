"""The coils room: the query in the book's own language, pages, marks, coils beside each other, files."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest
from textual.pilot import Pilot
from textual.widgets import Input, Static

from tests.cli.recipes import to_turns
from tests.tui.test_coil_by_keys import NAME, press, recipe, until
from windctl.book.heads import CoilHead
from windctl.book.query import parse
from windctl.cli.main import run
from windctl.desk.asked import Shared
from windctl.errors import QueryError
from windctl.record.addenda import CoilNoted, PairMade, PairParted
from windctl.tui import coil_view, coils_view
from windctl.tui.app import WindctlApp
from windctl.tui.dialogs.choose import Choose
from windctl.tui.page import Page
from windctl.tui.pictures.against import Other, against_picture, differences
from windctl.tui.pictures.cells import texts
from windctl.tui.pictures.curve import Point
from windctl.tui.screens.coil import CoilScreen
from windctl.tui.screens.coils import CoilsScreen
from windctl.tui.session import Session
from windctl.tui.widgets.against import Against
from windctl.tui.widgets.table import Table

HEAD = CoilHead(
    id="0", number="b1-2026-0147", bench="b1", year=2026, serial=147, recipe=NAME, recipe_digest="",
    batch="order 118", of=6, operator="demo", started="2026-03-01T12:00:00", ended=None, outcome="finished",
    reason="the target is met", turns=8024.0, dcr_20c_ohm=5899.0, dcr_u95_ohm=52.0, target_kind="turns",
    target_value=8024.0, verdict="within", program_digest="", trace_digest="", n_entries=1,
    record_digest="", spool="s1",
)  # fmt: skip


def curve(per_turn: float, end: float = 8000.0) -> tuple[Point, ...]:
    return tuple(Point(turn, per_turn * turn) for turn in range(100, int(end) + 1, 100))


def test_a_coil_with_a_part_in_a_hundred_more_wire_lies_one_per_cent_above() -> None:
    found = differences(curve(0.7), curve(0.707))
    assert [value for _, value in found] == pytest.approx([1.0] * len(found))
    assert found[0][0] >= 400  # the first turns are left out
    assert differences(curve(0.7), curve(0.7, 200)) == []
    # between two points of the first it is taken along the straight line
    assert differences(curve(0.7), [Point(4050.0, 0.7 * 4050)])[0][1] == pytest.approx(0.0, abs=1e-9)


def test_every_curve_has_a_letter_besides_its_colour() -> None:
    others = [Other("2", curve(0.707)), Other("3", curve(0.69)), Other("4", curve(0.7, 6000))]
    rows = texts(against_picture(60, 14, curve(0.7), others))
    assert "more than A at the same turn" in rows[0]
    above = next(at for at, row in enumerate(rows) if row.rstrip().endswith("B"))
    below = next(at for at, row in enumerate(rows) if row.rstrip().endswith("C"))
    middle = next(at for at, row in enumerate(rows) if "A┤" in row)
    assert above < middle < below
    assert "D" in rows[middle]
    assert "no turn" in "".join(texts(against_picture(60, 14, curve(0.7), [Other("5", ())])))


def test_a_row_says_how_a_coil_ended_by_word_and_glyph() -> None:
    assert coils_view.row(HEAD, True, 80)[-1] == coils_view.VERDICTS["within"]
    assert coils_view.row(HEAD, True, 80)[0] == coils_view.MARK
    ended = coils_view.row(replace(HEAD, outcome="tripped", verdict="not judged"), False, 120)
    assert ended[-1] == coils_view.OUTCOMES["tripped"]
    for width in (80, 120):
        assert len(coils_view.columns(width)) == len(coils_view.row(HEAD, False, width))
    assert "turns ▼" in coils_view.columns(80, "-turns")


def test_filters_and_orders_are_of_the_books_language() -> None:
    for only in coils_view.FILTERS:
        parse(coils_view.asked("recipe:neck not note:splice", only))
    for sort in coils_view.SORTS:
        parse(f"sort:{sort}" if sort else "")
    with pytest.raises(QueryError) as caught:
        parse(coils_view.asked("recipe:neck nots:x", "verdict:within"))
    first, second = coils_view.misunderstood(caught.value).splitlines()
    assert first[second.index("▲")] == "n"


def test_the_coils_beside_are_named_with_what_they_differ_by() -> None:
    other = replace(
        HEAD, number="b1-2026-0148", dcr_20c_ohm=5899.0 * 1.004, turns=8030.0, program_digest="other"
    )
    same = replace(HEAD, number="b1-2026-0149", dcr_20c_ohm=5898.99)
    words = coil_view.against(HEAD, [other, same])
    assert words.splitlines() == [
        "A b1-2026-0147",
        "B b1-2026-0148 +0.40 %, +6 turns",
        "C b1-2026-0149 +0.00 %, same program",
    ]


def test_a_coil_says_what_it_goes_with_how_it_is_joined_and_what_it_was_parted_from() -> None:
    joined = "join the finish of b1-2026-0147 to the start of b1-2026-0148"
    made = PairMade("2026-03-02T09:00:00", "demo", "1", "b1-2026-0148", joined, -51.2, -80.0, -45.4)
    parted = PairParted("2026-03-05T10:00:00", "demo", "1", "b1-2026-0148", "sold alone")
    noted = CoilNoted("2026-03-06T10:00:00", "demo", "wax again")
    assert coil_view.pairing([noted]) == ""
    words = f"goes with b1-2026-0148: {joined}; hum left -51 dB (-80 to -45)"
    assert coil_view.pairing([made, noted]) == words
    apart = "goes with no other: parted from b1-2026-0148 on 2026-03-05, sold alone"
    assert coil_view.pairing([made, parted, noted]) == apart
    assert coil_view.pairing([made, parted, made]) == words


def test_a_page_as_lines_is_a_table_of_plain_values() -> None:
    header, line = coils_view.as_lines([replace(HEAD, recipe="a\tb")]).splitlines()
    assert header.split("\t")[7] == "ohm_20c"
    assert line.split("\t") == [
        "b1-2026-0147", "a b", "order 118", "s1", "2026-03-01T12:00:00", "finished", "8024",
        "5899.0", "within",
    ]  # fmt: skip
    assert "page 2 of 3" in coils_view.foot(Page((HEAD,), 250, 1), "", [])


@pytest.fixture(scope="module")
def shop(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Three short coils, two of the recipe whose name looks like markup."""
    folder = tmp_path_factory.mktemp("shop")
    book = ("--machine", "virtual", "--book", str(folder / "a.book"), "-q")
    other = str(to_turns(folder, 70))
    assert run(["wind", other, *book]) == 0
    named = str(recipe(folder, 60))
    for seed in ("1", "2"):
        assert run(["wind", named, "--plant-seed", seed, "--batch", "[b]lot[/]", *book]) == 0
    assert run(["coils", "note", "1", "spliced [b]twice[/]", "--book", str(folder / "a.book")]) == 0
    return folder


async def room_of(app: WindctlApp, pilot: Pilot[int], number: int) -> CoilsScreen:
    await press(pilot, "f3")
    await until(pilot, lambda: isinstance(app.screen, CoilsScreen))
    room = app.screen
    assert isinstance(room, CoilsScreen)
    await until(pilot, lambda: room.page.total == number)
    return room


def names_of(room: CoilsScreen) -> list[str]:
    """What stands above the columns."""
    return [str(one.label) for one in room.query_one(Table).ordered_columns]


async def test_coils_are_found_marked_compared_and_written_by_keys(
    shop: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    app = WindctlApp(Session(Shared(machine="virtual", book=shop / "a.book"), [shop]))
    async with app.run_test(size=(120, 40)) as pilot:
        room = await room_of(app, pilot, 3)
        await until(pilot, lambda: NAME in app.export_screenshot())
        assert "[b]lot[/]" in app.export_screenshot()
        assert names_of(room) == list(coils_view.columns(120))
        await pilot.resize_terminal(80, 24)
        await until(pilot, lambda: names_of(room) == list(coils_view.columns(80)))
        await pilot.resize_terminal(120, 40)
        await until(pilot, lambda: names_of(room) == list(coils_view.columns(120)))
        await press(pilot, "slash")
        line = room.query_one("#coils-find", Input)
        assert app.focused is line
        line.value = "note:twice"
        await until(pilot, lambda: room.page.total == 1)
        line.value = "nots:twice"
        wrong = room.query_one("#coils-wrong", Static)
        await until(pilot, lambda: "did you mean note?" in str(wrong.content))
        assert room.page.total == 1  # the list stays
        line.value = "recipe:red"
        await until(pilot, lambda: room.page.total == 2)
        await press(pilot, "enter")
        await until(pilot, lambda: isinstance(app.focused, Table))
        await press(pilot, "m", "m")
        assert len(room.marked) == 2
        await press(pilot, "y")
        await until(pilot, lambda: (tmp_path / "coils.tsv").exists())
        await press(pilot, "c")
        await until(pilot, lambda: isinstance(app.screen, CoilScreen))
        coil = app.screen
        assert isinstance(coil, CoilScreen)
        await until(pilot, lambda: len(coil.others) == 1)
        assert coil.number == room.marked[0]
        assert coil.query_one(Against).display
        assert f"B {room.marked[1]}" in str(coil.query_one("#coil-beside", Static).content)
        assert [one.name for one in coil.differing] == ["machine"]  # another plant seed, nothing else
        drawn = tmp_path / f"{coil.number}-compared.svg"
        await press(pilot, "d")
        await until(pilot, lambda: str(drawn) in str(coil.query_one("#coil-answer", Static).content))
        assert drawn.read_text(encoding="utf-8").endswith("</svg>\n")
        await press(pilot, "b")
        assert not coil.query_one(Against).display
        await press(pilot, "c")
        await until(pilot, lambda: isinstance(app.screen, Choose))
        await press(pilot, "enter")
        await until(pilot, lambda: len(coil.others) == 1)
        answer = coil.query_one("#coil-answer", Static)
        for key, ending in (("r", "html"), ("x", "json"), ("y", "txt")):
            file = tmp_path / f"{coil.number}.{ending}"
            await press(pilot, key)
            await until(pilot, lambda file=file: str(file) in str(answer.content))  # type: ignore[misc]
        assert NAME in (tmp_path / f"{coil.number}.txt").read_text(encoding="utf-8")
        await press(pilot, "f3")
        await until(pilot, lambda: app.screen is room)  # as it was left
        await press(pilot, "escape")
        await until(pilot, lambda: room.page.total == 3)
        await press(pilot, "f")
        await until(pilot, lambda: "verdict:within" in str(room.query_one("#coils-foot", Static).content))
        await press(pilot, "s")
        await until(pilot, lambda: "coil ▲" in app.export_screenshot().replace("&#160;", " "))
