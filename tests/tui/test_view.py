"""What is shown of a snapshot."""

from __future__ import annotations

from dataclasses import replace

import pytest

from tests.tui.fakes import CARD, SNAPSHOT
from windctl.run.snapshot import Check
from windctl.tui.looks import LOOKS
from windctl.tui.view import Sound, glance, next_of, reading_steps, sound, still, target_text


def test_the_word_says_where_a_person_is_waited_for() -> None:
    setting_up = replace(SNAPSHOT, phase="setting up", turns=0.0)
    words = {asks: glance(replace(setting_up, asks=asks), CARD).look.word for asks in (None, "go", "leads")}
    assert words == {None: "setting up", "go": "ready", "leads": "waits"}


def test_turning_says_where_it_slows_and_stops_and_when() -> None:
    seen = glance(SNAPSHOT, CARD)
    assert (seen.look.word, seen.look.glyph) == ("turning", "▶")
    assert seen.digits == "4 812"
    assert seen.under_digits == "of 7 946 turns · 60 %"
    assert (seen.next.words, seen.next.figure) == ("slows at", "7 906")
    assert seen.next.when == "stops near 7 946, in 3:20"


def test_the_last_slow_turns_say_where_it_stops() -> None:
    coming = next_of(replace(SNAPSHOT, turns=7920.0, seconds_left=13.0))
    assert (coming.words, coming.figure, coming.when) == ("stops at", "7 946", "in 0:13")


def test_before_a_stop_is_chosen_the_plan_is_named_as_such() -> None:
    seen = glance(replace(SNAPSHOT, stop_turn=None, slow_turn=None), CARD)
    assert seen.under_digits.startswith("of about 8 030 turns")


def test_a_turn_counts_when_it_is_whole() -> None:
    assert glance(replace(SNAPSHOT, turns=99.99), CARD).digits == "99"
    assert glance(replace(SNAPSHOT, turns=100.0), CARD).digits == "100"


def test_figures_carry_units_and_the_digits_that_mean_something() -> None:
    rows = dict(glance(SNAPSHOT, CARD).rows)
    assert rows["now"] == "3 492.4 Ω at 24.1 °C"
    assert rows["at 20 °C"] == "3 437.1 Ω"
    assert rows["finish"] == "5.899 ± 0.031 kΩ at 20 °C"
    assert rows["target"] == "5.900 kΩ ± 2 %"
    assert rows["pace"] == "1000 rpm"
    assert rows["pull"] == "12.3 cN"
    assert rows["guide"] == "4.21 mm"
    assert rows["readings"] == "1 204 used, 17 set aside"


def test_what_is_not_known_is_not_made_up() -> None:
    bare = replace(SNAPSHOT, ohm_now=None, ohm_20c_now=None, finish_ohm=None, celsius=None)
    bare = replace(bare, tension_cn=None, guide_mm=None)
    rows = dict(glance(bare, CARD).rows)
    assert rows["now"] == "no reading yet"
    assert rows["at 20 °C"] == rows["finish"] == "–"
    assert "pull" not in rows
    assert "guide" not in rows


def test_a_trip_says_what_to_do() -> None:
    tripped = replace(
        SNAPSHOT,
        phase="tripped",
        says="the board is tripped (tension low): the wire broke, left its path or ran out",
        asks="clear",
        wire_ends_at=4790.5,
    )
    seen = glance(tripped, CARD)
    assert seen.look.glyph == "✖"
    assert seen.next.words == "tension low: the wire broke, left its path or ran out"
    assert "beyond turn 4 790.5 is without wire" in seen.alarm
    assert "C clears it" in seen.alarm
    assert "press C" in seen.next.when


def test_nothing_is_wrong_while_nothing_is() -> None:
    assert glance(SNAPSHOT, CARD).alarm == ""


def test_a_lost_link_is_unmistakable() -> None:
    seen = glance(SNAPSHOT, CARD, "nothing was heard for 3 s")
    assert seen.look.word == "no link"
    assert seen.alarm == "nothing was heard for 3 s"


@pytest.mark.parametrize(("turns", "word"), [(0.0, "starts"), (12.0, "goes on")])
def test_a_go_that_is_waited_for_names_its_key(turns: float, word: str) -> None:
    waiting = replace(SNAPSHOT, phase="ready", says="waits for go", asks="go", turns=turns)
    assert next_of(waiting).when == f"{word} when you press G"


def test_every_state_has_a_word_a_glyph_and_a_colour_of_its_own() -> None:
    assert all(look.word and look.glyph and look.role for look in LOOKS.values())
    assert len({look.word for look in LOOKS.values()}) == len(LOOKS)


def test_the_target_in_words() -> None:
    assert target_text(replace(CARD, target_kind="turns", target_value=8000.0)) == "8 000 turns"


def test_the_title_names_coil_and_place_in_its_batch() -> None:
    assert CARD.title == "Bridge single (demo) · b1-2026-0147 · order 118 3 of 6"
    assert replace(CARD, batch="", of=0, place=0).title == "Bridge single (demo) · b1-2026-0147"


def test_the_bell_rings_when_it_slows_stands_or_trips_and_only_then() -> None:
    before = replace(SNAPSHOT, turns=7905.9)
    assert sound(before, replace(SNAPSHOT, turns=7906.1)) is Sound.SLOWS
    assert sound(replace(SNAPSHOT, turns=7906.1), replace(SNAPSHOT, turns=7906.4)) is None
    assert sound(SNAPSHOT, replace(SNAPSHOT, phase="held")) is Sound.STANDS
    assert sound(replace(SNAPSHOT, phase="stopping"), replace(SNAPSHOT, phase="settling")) is Sound.STANDS
    assert sound(SNAPSHOT, replace(SNAPSHOT, phase="tripped")) is Sound.ALARM
    assert sound(SNAPSHOT, replace(SNAPSHOT, turns=4813.0)) is None
    assert sound(None, SNAPSHOT) is None
    assert sound(SNAPSHOT, replace(SNAPSHOT, phase="stopping")) is None


def test_a_spindle_that_somebody_else_drives_is_theirs_to_slow_and_stop() -> None:
    own = replace(SNAPSHOT, driven=False, seconds_left=None, turns=7000.0)
    coming = next_of(own)
    assert (coming.words, coming.figure, coming.when) == ("slow down at", "7 896", "stop at 7 946")
    assert next_of(replace(own, turns=7900.0)).words == "stop at"
    assert dict(glance(own, CARD).rows)["pace"] == "your own motor's"
    assert next_of(replace(own, phase="stopping")).words == "stop your own motor"
    assert sound(replace(own, turns=7895.9), replace(own, turns=7896.2)) is Sound.SLOWS


def test_a_pace_that_somebody_asked_for_is_named() -> None:
    assert dict(glance(replace(SNAPSHOT, pace_percent=80), CARD).rows)["pace"] == "1000 rpm, slowed to 80 %"


CHECKED = replace(
    SNAPSHOT, phase="held", asks="reading", drives_off=True, check=Check(4812.0, 490.0, 31.0, True, False)
)


def test_a_check_says_what_to_do_in_order_and_what_it_gains() -> None:
    steps = reading_steps(CHECKED).splitlines()
    assert steps[0] == "✔ drives off: hands may go in"
    assert "at the guide, never on the coil" in steps[1]
    assert "touch the contact" in steps[2]
    assert "how warm it is" in steps[3]
    assert "insulate" in steps[4]
    assert "± 490.0 Ω; with a reading here to ± 31.0 Ω" in steps[5]
    assert reading_steps(replace(CHECKED, drives_off=False)).startswith("□ wait")
    coming = next_of(CHECKED)
    assert (coming.words, coming.figure) == ("read at turn", "4 812")


def test_after_a_typed_reading_its_key_takes_it_back() -> None:
    after = replace(CHECKED, check=None, asks="go", can_take_back=True, says="insulate the bared spot again")
    coming = next_of(after)
    assert coming.words == "insulate the bared spot again"
    assert coming.when == "U takes the reading back, G goes on"
    assert sound(CHECKED, after) is Sound.READ


def test_between_the_charts_only_digits_and_the_state_change() -> None:
    before = glance(SNAPSHOT, CARD)
    seen = glance(replace(SNAPSHOT, turns=4815.0, ohm_now=3500.0, seconds_left=190.0), CARD)
    now = still(seen, before)
    assert now.digits == "4 815"
    assert (now.rows, now.next, now.under_digits) == (before.rows, before.next, before.under_digits)
    held = glance(replace(SNAPSHOT, phase="held", asks="go", says="held: hold"), CARD)
    assert still(held, before).next == held.next
