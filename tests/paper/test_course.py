"""Speed, tension and growth as a page shows them, from facts made by hand."""

from __future__ import annotations

import dataclasses

import pytest

from tests.book.samples import made, started
from windctl.book.book import Book
from windctl.desk.papers import coil_facts
from windctl.paper.course import course_of
from windctl.paper.history import history_of
from windctl.paper.layers import growth_of
from windctl.paper.recorded import Bobbin, bobbin_of, recipe_of, settings
from windctl.paper.told import plainly, said_since, story, told
from windctl.protocol.messages import Capability, Identity, Refused, Setup, State, Status
from windctl.record.addenda import CoilWithdrawn, MagnetTold, PairMade, PairParted
from windctl.record.events import (
    KINDS,
    BoardGreeted,
    Event,
    ReadingTakenBack,
    ReadingTyped,
    StatusHeard,
    StopPointChosen,
)


def turning(ticks: int, turn: float, speed: int, tension: int = 0) -> StatusHeard:
    status = made(
        Status, ticks=ticks, count=round(turn * 400), speed=speed, tension=tension, state=int(State.TURNING)
    )
    return StatusHeard(ticks, status)


def test_speed_and_tension_are_in_the_units_of_the_board() -> None:
    """Speed is in motor steps a second, tension in units of which the greeting tells the size in 0.0001 cN:
    the protocol's specification."""
    begun = dataclasses.replace(
        started(), setup=made(Setup, counts_per_turn=400, steps_per_turn=200, fitted=255)
    )
    greeted = BoardGreeted(0, made(Identity, tension_scale=50, capabilities=int(Capability.VIRTUAL)))
    events: list[Event] = [begun, greeted]
    events += [turning(50 * n, n / 10, 2000, 2400 if n % 2 else 2600) for n in range(1, 101)]
    course = course_of(begun, events, 10.0)
    assert {span.mean for span in course.speed_rpm} == {600.0}
    assert min(span.low for span in course.tension_cn) == 12.0
    assert max(span.high for span in course.tension_cn) == 13.0
    assert course.seconds == pytest.approx(99 * 0.05)
    assert course.simulated and len(course.rare) == 2
    assert all(0 < span.turn <= 10.1 for span in course.speed_rpm)


def test_a_long_coil_is_thinned_and_loses_no_peak() -> None:
    begun = dataclasses.replace(started(), setup=made(Setup, counts_per_turn=400, steps_per_turn=400))
    events: list[Event] = [begun, BoardGreeted(0, made(Identity, tension_scale=10_000))]
    events += [turning(50 * n, n / 2, 400, 12 if n != 7777 else 19) for n in range(1, 16_001)]
    course = course_of(begun, events, 8000.0)
    assert len(course.speed_rpm) <= 301
    assert max(span.high for span in course.tension_cn) == 19.0


def bobbin(book: Book) -> Bobbin:
    found = bobbin_of(recipe_of(coil_facts(book, book.find("1")).started))
    assert found is not None
    return found


def test_a_coil_grows_outward_layer_by_layer_to_its_build(book: Book) -> None:
    facts = coil_facts(book, book.find("1"))
    growth = growth_of(facts.started, bobbin(book), 120.0)
    assert growth is not None and not growth.by_hand
    assert [layer.turn for layer in growth.layers] == pytest.approx([20, 40, 60, 80, 100, 120])
    for inner, outer in zip(growth.layers, growth.layers[1:], strict=False):
        assert all(low <= high for low, high in zip(inner.heights_mm, outer.heights_mm, strict=True))
    # As much wire lies along the gap as the mean build says, bulged by 15 % on sides this long.
    last = growth.layers[-1].heights_mm
    assert sum(last) / len(last) == pytest.approx(1.15 * growth.build_mm, rel=0.02)


def test_a_hand_that_nobody_recorded_is_drawn_even_and_said_to_be(book: Book) -> None:
    facts = coil_facts(book, book.find("1"))
    setup = dataclasses.replace(facts.started.setup, fitted=0)
    growth = growth_of(dataclasses.replace(facts.started, setup=setup), bobbin(book), 120.0)
    assert growth is not None and growth.by_hand
    assert len(set(growth.layers[-1].heights_mm)) == 1


NESTED = {"board_greeted": {"identity": made(Identity)}, "command_refused": {"refused": made(Refused)}}


@pytest.mark.parametrize("name", sorted(set(KINDS) - {"status_heard", "reading_taken"}))
def test_every_kind_of_fact_has_words_of_its_own(name: str) -> None:
    """A fact that the program has no words for is told by its name, a colon and its fields."""
    texts = {field.name: "so" for field in dataclasses.fields(KINDS[name]) if field.type == "str"}
    event = dataclasses.replace(made(KINDS[name]), **texts, **NESTED.get(name, {}))
    text = told(event, 400)
    assert text is None or not text.startswith(f"{plainly(name)}:")
    assert text is None or text.rstrip(".") != plainly(name)


def test_what_is_said_since_has_words_of_its_own() -> None:
    """A pair, a magnet, a withdrawal: who, when, and what in words."""
    pair = PairMade(
        "2026-05-04T10:00:00+02:00", "Ann", "id", "b1-2026-0002", "finish to finish", -41.2, -48, -37
    )
    assert said_since(pair) == (
        "2026-05-04 10:00",
        "Ann",
        "Paired with b1-2026-0002: finish to finish; hum left in a uniform field -41 dB (-48 to -37)",
    )
    for fact in (
        MagnetTold("2026-05-04T10:00", "Ann", "south"),
        PairParted("2026-05-04T10:00", "Ann", "id", "b1-2026-0002", "sold apart"),
        CoilWithdrawn("2026-05-04T10:00", "Ann", "wrong wire"),
    ):
        said = said_since(fact)
        assert said is not None and said[:2] == ("2026-05-04 10:00", "Ann")
        assert not said[2].startswith(f"{plainly(fact.kind.removeprefix('coil_'))}:")


def test_a_long_row_of_stop_points_is_told_by_its_ends() -> None:
    chosen = [StopPointChosen(1000 * n, 400 * n, "near", 100.0 + n, 1.0) for n in range(1, 8)]
    lines = story(chosen, 400)
    assert len(lines) == 3
    assert "turn 1 " in lines[0].what and "turn 7 " in lines[2].what and "5 times" in lines[1].what
    assert len(story(chosen[:2], 400)) == 2


def test_a_key_that_no_version_knows_is_shown_all_the_same() -> None:
    (table,) = settings({"bobbin": {"later_thing_mm": 1.5, "flag": True}, "name": "x"})
    assert table == ("bobbin", [("later thing", "1.5 mm"), ("flag", "yes")])


def test_a_reading_that_was_taken_back_is_nowhere(book: Book) -> None:
    """As if it had not been typed: two courses and two histories, with and without the slip."""
    begun = coil_facts(book, book.find("2")).started
    good = ReadingTyped(2000, 60.0, 40.0, 21.0, "Ann")
    slip = [ReadingTyped(1000, 60.0, 44.0, 21.0, "Ann"), ReadingTakenBack(1500, "Ann")]
    with_it: list[Event] = [begun, *slip, good]
    without: list[Event] = [begun, good]
    assert course_of(begun, with_it, 60.0).hand_read == course_of(begun, without, 60.0).hand_read
    one, other = history_of(with_it, 120.0).points, history_of(without, 120.0).points
    assert one == other and len(one) == 2
