"""What is typed to a run, and the requests it means."""

from __future__ import annotations

import pytest

from windctl.desk.words import BY, WORDS, help_text, number, request_of
from windctl.run.requests import (
    Broke,
    Clear,
    CountIs,
    DrivesOff,
    End,
    Go,
    Hold,
    NewWire,
    Note,
    Nudge,
    Read,
    Request,
    Skip,
    Splice,
    Together,
    Unwind,
    ZeroContact,
)


@pytest.mark.parametrize(
    ("line", "meant"),
    [
        ("go", Go(BY)),
        ("  GO ", Go(BY)),
        ("clear", Clear(BY)),
        ("hold", Hold(BY, "held at the keyboard")),
        ("off", DrivesOff(BY, "asked for at the keyboard")),
        ("end", End(BY, "ended by the operator")),
        ("broke", Broke(BY)),
        ("broke 812.5", Broke(BY, 812.5)),
        ("splice", Splice(BY)),
        ("Splice  812,5", Splice(BY, 812.5)),
        ("new wire", NewWire(BY)),
        ("new wire Spool 7", NewWire(BY, "Spool 7")),
        ("new wire 812 Spool 7", NewWire(BY, "Spool 7", 812.0)),
        ("unwind", Unwind(BY)),
        ("unwind 12", Unwind(BY, 12.0)),
        ("turn 800", CountIs(BY, 800.0)),
        ("turn 3 200", CountIs(BY, 3200.0)),
        ("Turn 3,2k", CountIs(BY, 3200.0)),
        ("turn 812,5", CountIs(BY, 812.5)),
        ("note Felt is New", Note(BY, "Felt is New")),
        ("read 5930", Read(BY, 5930.0)),
        ("read 5,93k 22,5", Read(BY, 5930.0, 22.5)),
        ("Read 5.93 k 22.5 °C", Read(BY, 5930.0, 22.5)),
        ("read 812.4 ohm -3", Read(BY, 812.4, -3.0)),
        ("skip", Skip(BY)),
        ("nudge 0.1", Nudge(BY, 0.1)),
        ("Nudge  -0,05", Nudge(BY, -0.05)),
        ("nudge +1 mm", Nudge(BY, 1.0)),
        ("nudge \N{MINUS SIGN}.5mm", Nudge(BY, -0.5)),
        ("zero", ZeroContact(BY)),
        ("Together", Together(BY)),
    ],
)
def test_a_line_means_one_request(line: str, meant: Request) -> None:
    assert request_of(line) == meant


@pytest.mark.parametrize(
    "line",
    [
        *(
            "",
            "g",
            "gone",
            "go now",
            "yes",
            "splice here",
            "turn",
            "turn back",
            "turn -3",
            "note",
            "unwind all",
        ),
        *("read", "read 0", "read -5k", "read 5.93k warm", "read nan", "read 5M", "skip it"),
        *("nudge", "nudge left", "nudge --1", "nudge 1 2", "nudge 1 m", "nudge - ", "nudge mm"),
    ],
)
def test_what_is_no_word_or_half_of_one_asks_for_nothing(line: str) -> None:
    assert request_of(line) is None


def test_either_decimal_sign_is_taken_and_nothing_else() -> None:
    assert (number("12"), number("12,5"), number("12.5"), number(".5")) == (12.0, 12.5, 12.5, 0.5)
    assert [number(text) for text in ("", "-1", "1e3", "nan", "inf", "1 000", "1k")] == [None] * 7


def test_help_has_every_word_and_every_word_but_help_means_something() -> None:
    text = help_text()
    for word in WORDS:
        assert word.usage in text
        assert word.help in text
        filled = word.usage.replace("[TURN]", "").replace("[NAME]", "").replace("[TURNS]", "")
        for what, value in (("TURN", "5"), ("TEXT", "x"), ("MM", "1"), ("[CELSIUS]", ""), ("OHM", "5k")):
            filled = filled.replace(what, value)
        assert (request_of(filled) is None) == (word.name == "help"), filled
