"""Drawings as cells: what is drawn is what the numbers say."""

from __future__ import annotations

from dataclasses import replace

import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.tui.fakes import CARD, mound, past
from windctl.recipe.orientation import orientation
from windctl.tui.looks import LOOKS
from windctl.tui.pictures.axes import round_steps
from windctl.tui.pictures.bobbin import bobbin_picture
from windctl.tui.pictures.braille import Dots
from windctl.tui.pictures.cells import texts
from windctl.tui.pictures.curve import Band, curve_picture, finish_picture
from windctl.tui.pictures.digits import big_digits
from windctl.tui.pictures.letters import lettered
from windctl.tui.pictures.section import Filled, Section


@pytest.mark.parametrize("height", [5, 7])
def test_every_digit_is_as_high_as_asked_and_like_no_other(height: int) -> None:
    drawn = {digit: tuple(big_digits(digit, height)) for digit in "0123456789"}
    assert all(len(rows) == height for rows in drawn.values())
    assert len(set(drawn.values())) == 10
    assert len({len(rows[0]) for rows in drawn.values()}) == 1  # a count does not jump about


@pytest.mark.parametrize("text", ["0", "946", "7 946", "12 345", "999 999"])
def test_a_count_fits_a_narrow_screen(text: str) -> None:
    assert max(len(row) for row in big_digits(text, 5, 43)) <= 43


@pytest.mark.parametrize("word", [look.word for look in LOOKS.values()] + ["finished", "stopped", "tripped"])
def test_every_state_has_large_letters(word: str) -> None:
    rows = lettered(word)
    assert len(rows) == 3
    assert len({len(row) for row in rows}) == 1
    letters = [char for char in word if char != " "]
    assert len(rows[0]) >= sum(1 for _ in letters) * 2 - 1


def test_dots_of_braille() -> None:
    """Unicode 15, block 2800-28FF: dot 7 is lower left (0x40), dot 4 upper right (0x08)."""
    dots = Dots(1, 1)
    dots.dot(0, 0, "a")
    dots.dot(1, 3, "a")
    assert texts(dots.picture(["a"])) == [chr(0x2800 + 0x40 + 0x08)]


def test_the_upper_layer_gives_the_ink_and_both_give_dots() -> None:
    dots = Dots(1, 1)
    dots.dot(0, 0, "below")
    dots.dot(1, 0, "above")
    cell = dots.picture(["above", "below"])[0][0]
    assert cell.ink == "above"
    assert cell.char == chr(0x2800 + 0x40 + 0x80)


@given(low=st.floats(-1e6, 1e6), span=st.floats(1e-3, 1e6), most=st.integers(2, 20))
def test_steps_along_an_axis_are_round_and_few(low: float, span: float, most: int) -> None:
    steps = round_steps(low, low + span, most)
    assert len(steps) <= most
    assert all(low - 1e-6 * span <= step <= low + span * (1 + 1e-6) for step in steps)


def section(turns: float, guide_mm: float | None = None) -> Section:
    return Section(mound(), 42, 12)


def wire_cells(turns: float) -> int:
    """Cells that hold any wire."""
    picture = section(turns).picture(Filled(turns))
    return sum(1 for row in picture for cell in row if isinstance(cell.ink, float))


def test_the_section_fills_as_the_coil_grows() -> None:
    counts = [wire_cells(turns) for turns in (0, 2000, 4000, 6000, 8030)]
    assert counts[0] == 0
    assert counts == sorted(counts)
    assert len(set(counts)) == 5


def test_later_turns_are_lighter_and_lie_higher() -> None:
    picture = section(8030).picture(Filled(8030))
    shades = [row[20].ink for row in picture if isinstance(row[20].ink, float)]
    assert shades == sorted(shades, reverse=True)
    assert shades[0] > 0.85
    assert shades[-1] < 0.2


def test_the_walls_are_as_high_as_the_flanges_are_deep() -> None:
    """5.2 of 8.5 mm in a window ten cells high: the surface is in the seventh cell from the core."""
    picture = section(8030).picture(Filled(8030))
    filled = [row for row, cells in enumerate(picture) if isinstance(cells[20].ink, float)]
    assert filled[0] == 12 - 1 - 7
    assert picture[1][0].ink == picture[10][-1].ink == "flange"


def test_the_guide_stands_where_it_is() -> None:
    """Margin 0.3 mm and 5.2 mm on, of 11 mm: the middle of 40 columns."""
    picture = section(0).picture(Filled(4000, 5.2))
    assert texts(picture)[0].index("▼") == 1 + 20


def test_what_is_foreseen_lies_pale_behind_and_never_where_wire_is() -> None:
    picture = section(4000).picture(Filled(4000))
    column = [cells[20] for cells in picture[1:-1]]
    ghosts = [place for place, cell in enumerate(column) if "ghost" in (cell.ink, cell.paper)]
    wires = [place for place, cell in enumerate(column) if isinstance(cell.ink, float)]
    assert ghosts and wires
    assert max(ghosts) <= min(wires)


def test_wire_beyond_the_flange_shows() -> None:
    grown = Section(mound(high_mm=9.5), 42, 12).picture(Filled(8030))
    assert any(cell.ink == "over" for cell in grown[1])
    assert not any(cell.ink == "over" for cell in section(8030).picture(Filled(8030))[1])


def test_axes_never_move_while_a_coil_grows() -> None:
    fan = [Band(4812, 3430, 3440), Band(8030, 5850, 5950)]
    axes = []
    for many in (2, 20, 80):
        picture = curve_picture(60, 14, CARD.scale, past()[:many], fan)
        axes.append([(row[5].char, "".join(cell.char for cell in row[:5])) for row in picture])
    assert axes[0] == axes[1] == axes[2]


def test_the_curve_rises_and_ends_where_it_was_measured() -> None:
    picture = curve_picture(66, 22, replace(CARD.scale, turns=8000, ohm=8000), past(), [])
    cells = [
        (row, column)
        for row, line in enumerate(picture)
        for column, cell in enumerate(line)
        if cell.ink == "past"
    ]
    highest, furthest = min(cells), max(cells, key=lambda cell: cell[1])
    assert furthest[1] == pytest.approx(6 + 60 * past()[-1].turn / 8000, abs=1)
    assert highest[0] == pytest.approx(20 * (1 - (past()[-1].ohm or 0) / 8000), abs=1)


def test_the_closer_look_closes_in() -> None:
    picture = finish_picture(66, 22, CARD.scale, past(), 7946)

    def spread(column: int) -> int:
        return sum(1 for row in picture if row[column].ink in ("fan", "past"))

    assert spread(8) > spread(20) > 0
    assert spread(20) >= spread(36) > 0


@pytest.mark.parametrize("direction", ["cw", "ccw"])
@pytest.mark.parametrize("mounted", ["face out", "face in"])
@pytest.mark.parametrize("start", ["face", "base"])
def test_the_mounted_bobbin_is_drawn_as_it_is(direction: str, mounted: str, start: str) -> None:
    where = orientation(direction, mounted, start)  # type: ignore[arg-type]  # the parameters are the literals
    rows = texts(bobbin_picture(where, mounted == "face out"))
    text = "\n".join(rows)
    assert ("counter-clockwise" in text) == (where.spindle == "ccw")
    assert f"start: {start} flange" in text
    assert f"towards the {where.start_side}" in text
    # over the flange where the wire starts, which of the two names at the foot stands below the mark
    mark, names = rows[1].index("▼"), rows[6]
    near = min(("base", "face"), key=lambda name: abs(names.index(name) + 2 - mark))
    assert near == start
