"""Before a coil: what it repeats, its place in the batch, and the dry pass of the guide."""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest
from textual.pilot import Pilot
from textual.widgets import Static

from tests.cli.recipes import to_turns
from tests.tui.test_coil_by_keys import press
from windctl.book.heads import CoilHead
from windctl.book.open import open_book
from windctl.desk.asked import Shared
from windctl.forecast.waiting import Waiting
from windctl.record.events import GuideSeen, WentOn
from windctl.record.summary import CoilSummary
from windctl.run.outcome import Outcome
from windctl.tui.app import WindctlApp
from windctl.tui.before_words import Repeats, differences, repeats
from windctl.tui.outcome_words import outcome_words
from windctl.tui.recipes import Preview
from windctl.tui.screens.before import BeforeScreen
from windctl.tui.screens.recipes import RecipesScreen
from windctl.tui.screens.wind import WindScreen
from windctl.tui.session import Session
from windctl.tui.widgets.checklist import Checklist
from windctl.tui.widgets.figures import Figures

OLD = 'name = "a"\n[spindle]\ncruise_rpm = 1000\nramp = 1\n[lay]\nseed = 7\n'


@pytest.mark.parametrize(
    ("now", "told"),
    [
        (OLD, ""),
        ("# a remark\n" + OLD.replace("1000", "1_000"), ""),
        (OLD.replace("seed = 7", "seed = 8"), "lay.seed 7 → 8"),
        (OLD.replace("ramp = 1\n", ""), "spindle.ramp 1 → –"),
        (
            OLD.replace("1000", "900").replace("7", "8").replace('"a"', '"[b]"'),
            "lay.seed 7 → 8, name a → [b], 1 more",
        ),
        ("no = [", "the recipe's text"),
    ],
)
def test_what_differs_between_two_recipes_is_told_by_its_keys(now: str, told: str) -> None:
    assert differences(OLD, now) == told


@pytest.fixture(scope="module")
def preview(tmp_path_factory: pytest.TempPathFactory) -> Preview:
    folder = tmp_path_factory.mktemp("recipes")
    to_turns(folder, 60)
    session = Session(Shared(machine="virtual", book=folder / "none.book"), [folder])
    made = session.preview(session.recipes()[0])
    assert isinstance(made, Preview)
    return made


def last(preview: Preview, **other: object) -> CoilHead:
    head = CoilHead(
        id="x",
        number="v1-2026-0007",
        bench="v1",
        year=2026,
        serial=7,
        recipe=preview.recipe.name,
        recipe_digest=preview.recipe.digest,
        batch="lot",
        of=6,
        operator="",
        started="",
        ended="",
        outcome="finished",
        reason="",
        turns=60.0,
        dcr_20c_ohm=None,
        dcr_u95_ohm=None,
        target_kind="turns",
        target_value=60.0,
        verdict="within",
        program_digest=preview.plan.program.digest,
        trace_digest=None,
        n_entries=1,
        record_digest="",
        spool="",
    )
    return replace(head, **other)  # type: ignore[arg-type]  # the fields of a head


def test_the_next_the_same_says_what_it_repeats(preview: Preview) -> None:
    text = preview.listed.text
    rows = dict(repeats(Repeats(last(preview), text, 3), preview, text, "lot", 6))
    assert rows == {
        "batch": "lot: this is 4 of 6",
        "last": "v1-2026-0007, finished, within",
        "program": "the same to the last byte, seed 1947",
        "recipe": "the same to the letter",
    }


def test_and_what_is_different(preview: Preview) -> None:
    text = preview.listed.text
    before = text.replace("cruise_rpm = 1000", "cruise_rpm = 900")
    head = last(preview, program_digest="0" * 64, spool="S7", outcome="tripped")
    rows = dict(repeats(Repeats(head, before, 6), preview, text, "lot", 6))
    assert rows["batch"] == "lot: all 6 are begun already, this is one more"
    assert rows["last"] == "v1-2026-0007, tripped"
    assert rows["program"] == "another one, seed 1947"
    assert rows["spool"] == "none named; last time S7"
    assert rows["recipe"] == "changed: spindle.cruise_rpm 900 → 1000"


def test_the_first_of_a_recipe_says_so(preview: Preview) -> None:
    (row,) = repeats(Repeats(), preview, preview.listed.text, "", 0)
    assert row == ("last", "none: the first of this recipe in the book, seed 1947")


async def until(pilot: Pilot[int], what: Callable[[], bool]) -> None:
    end = time.monotonic() + 60
    while not what():
        assert time.monotonic() < end
        await pilot.pause(0.02)


async def test_a_dry_pass_is_looked_at_before_anything_turns(tmp_path: Path) -> None:
    """By keys on the simulated machine: P, S, then Y at each end."""
    to_turns(tmp_path, 60)
    shared = Shared(machine="virtual", speed=0.0, book=tmp_path / "a.book", batch="lot", of=2)
    app = WindctlApp(Session(shared, [tmp_path]))
    async with app.run_test(size=(80, 24)) as pilot:
        room = app.screen
        assert isinstance(room, RecipesScreen)
        await until(pilot, lambda: room.chosen is not None)
        await press(pilot, "enter")
        await until(pilot, lambda: isinstance(app.screen, BeforeScreen))
        before = app.screen
        assert isinstance(before, BeforeScreen)
        assert not before.first.dry_pass  # nobody needs to look at a simulated guide
        await press(pilot, "p")
        assert "dry pass of guide: yes (P)" in before.query_one(Checklist).items
        await until(pilot, lambda: bool(before.query_one("#before-repeats", Figures).rows))
        assert ("batch", "lot: this is 1 of 2") in before.query_one("#before-repeats", Figures).rows
        for _ in before.query_one(Checklist).items:
            await press(pilot, "enter")
        assert "Then there: dry pass of the guide" in str(before.query_one("#before-state", Static).content)
        await press(pilot, "s")
        await until(pilot, lambda: isinstance(app.screen, WindScreen))
        wind = app.screen
        assert isinstance(wind, WindScreen)
        look = wind.coil.winding.look
        await until(pilot, lambda: wind.latest is not None and wind.latest.asks == "look")
        assert look().turns == 0
        far = look().guide_mm
        assert far is not None and far > 10
        await press(pilot, "y")
        await until(pilot, lambda: look().asks == "look" and look().guide_mm == 0)
        await until(pilot, lambda: wind.latest is not None and wind.latest.asks == "look")
        await press(pilot, "y")
        await until(pilot, lambda: wind.outcome is not None)
    with open_book(tmp_path / "a.book", create=False, readonly=True) as book:
        kinds = [type(event) for event in book.events(book.list()[0].number)]
    assert kinds.count(GuideSeen) == 2
    assert kinds.index(WentOn) > max(at for at, kind in enumerate(kinds) if kind is GuideSeen)


def outcome(verdict: str, minutes: int | None) -> Outcome:
    waiting = None if minutes is None else Waiting(minutes, 6012.0, 22.5, 40.0, 21.0)
    summary = CoilSummary(
        "a", "", "finished", "the target is met", 7946.0, 5990.0, 40.0, "dcr_20c_ohm", 5900.0, verdict, "", ""
    )
    return Outcome("v1-2026-0001", "x", "finished", "", summary, "", "ab" * 32, None, waiting)


def test_turns_too_many_are_told_with_what_they_are_unsure_of() -> None:
    over = outcome("outside", None)
    reason = "unwind 25 ± 7 turns to meet the target"
    over = replace(over, summary=replace(over.summary, reason=reason))
    look, words = outcome_words(over)
    assert look.word == "outside"
    assert words.startswith(reason)


def test_a_warm_coil_outside_its_tolerance_is_to_be_read_again_cold() -> None:
    _, words = outcome_words(outcome("not judged", 9))
    assert "still warm: wait 9 minutes and read again, cold it should show 6.012 kΩ" in words
    for other in (outcome("within", 9), outcome("not judged", None)):
        assert "still warm" not in outcome_words(other)[1]
