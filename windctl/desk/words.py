"""The words that a person types to a run at the terminal, and the requests they mean."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass

from windctl.run.requests import (
    Broke,
    Clear,
    CountIs,
    DrivesOff,
    DryPass,
    End,
    Faster,
    Go,
    Hold,
    NewWire,
    Note,
    Nudge,
    Read,
    Request,
    Seen,
    Skip,
    Slower,
    Splice,
    TakeBack,
    Together,
    Unwind,
    ZeroContact,
)

BY = "operator"
_READING = re.compile(
    r"(\d+(?:[.,]\d*)?|[.,]\d+) ?(k?)(?: ?ohm)?(?: (-?\d+(?:[.,]\d*)?)(?: ?°?c)?)?", re.IGNORECASE
)
_NUMBER = re.compile(r"\d+(?:[.,]\d*)?|[.,]\d+")
_PARTED = re.compile(r"(?<=\d) (?=\d{3}(?!\d))")  # 3 200


@dataclass(frozen=True, slots=True)
class Word:
    """One word of the vocabulary: how it is written, and what it does."""

    usage: str
    help: str

    @property
    def name(self) -> str:
        """The word itself, without what may follow it."""
        return re.split(r" (?=[A-Z\[])", self.usage)[0]


WORDS = (
    Word("go", "wind on: powers the drives and starts"),
    Word(
        "hold",
        "let the spindle come to rest; so does Enter, and any line but slower, faster, note, while it turns",
    ),
    Word("slower", "turn a tenth of the plan's pace slower, also while it turns; it stays so"),
    Word("faster", "and a tenth faster, at the most as planned"),
    Word("clear", "the cause of the trip is put right; nothing turns by that"),
    Word("off", "drives off, so that hands may go in"),
    Word("broke [TURN]", "the wire broke, at that turn"),
    Word(
        "splice [TURN]", "the wire is joined again; it ends at that turn, else where the break is known to be"
    ),
    Word("new wire [TURN] [NAME]", "another spool is joined on"),
    Word("unwind [TURNS]", "drives off; then turn the spindle back by hand, and the count follows"),
    Word("turn TURN", "so many turns lie on the bobbin: the count is wrong, or you read the counter"),
    Word(
        "read OHM [CELSIUS]", "the coil as the meter shows it, such as 5.93k 22.5, and how warm it is there"
    ),
    Word("zero", "before the first turn: read what leads and contact have by themselves, to be taken off"),
    Word("together", "the contact's leads are together, nothing between them"),
    Word("dry pass", "before the first turn: show the guide at both of its ends, nothing turning"),
    Word("seen", "the guide stands right inside the flange"),
    Word("nudge MM", "in a dry pass: move the guide to where it is right, - towards the start flange"),
    Word("undo", "take the reading typed last back, until you go on or read again"),
    Word("skip", "pass over the check, or the zeroing, that is asked for"),
    Word("note TEXT", "write something into the record"),
    Word("end", "end the coil here"),
    Word("help", "this list"),
)


def help_text() -> str:
    """All words, one a line."""
    width = max(len(word.usage) for word in WORDS)
    return "\n".join(f"  {word.usage:<{width}}  {word.help}" for word in WORDS)


def request_of(line: str) -> Request | None:
    """What a typed line asks for; None where it is no word of ours, or lacks what must follow."""
    text = " ".join(line.split())
    for word in sorted(WORDS, key=lambda word: -len(word.name)):
        if text.lower() == word.name or text.lower().startswith(f"{word.name} "):
            means = _MEANS.get(word.name)
            return None if means is None else means(text[len(word.name) :].strip())
    return None


def number(text: str) -> float | None:
    """A number with either decimal sign, or None."""
    return float(text.replace(",", ".")) if _NUMBER.fullmatch(text) else None


def _alone(request: Request) -> Callable[[str], Request | None]:
    return lambda rest: None if rest else request


def _at_a_turn(kind: Callable[[str, float | None], Request]) -> Callable[[str], Request | None]:
    def make(rest: str) -> Request | None:
        turn = number(rest)
        return None if rest and turn is None else kind(BY, turn)

    return make


def _new_wire(rest: str) -> Request:
    first, _, name = rest.partition(" ")
    turn = number(first)
    return NewWire(BY, rest if turn is None else name, turn)


def turns_of(text: str) -> float | None:
    """What a counter says: `3200`, `3 200`, `3.2k` or `3,2k`; None where it is no number."""
    plain = _PARTED.sub("", text)
    thousands = plain[-1:] in ("k", "K")
    turn = number(plain[:-1].strip() if thousands else plain)
    return None if turn is None else round(turn * 1000.0, 6) if thousands else turn


def _turn(rest: str) -> Request | None:
    turn = turns_of(rest)
    return None if turn is None else CountIs(BY, turn)


def _read(rest: str) -> Request | None:
    """Resistance, then temperature; a k may stand behind a blank."""
    match = _READING.fullmatch(rest)
    if match is None:
        return None
    ohm = float(match[1].replace(",", ".")) * (1000.0 if match[2] else 1.0)
    celsius = None if match[3] is None else float(match[3].replace(",", "."))
    return Read(BY, ohm, celsius) if ohm > 0 else None


def _nudge(rest: str) -> Request | None:
    sign, figures = (rest[:1], rest[1:].strip()) if rest[:1] in ("+", "-", "\N{MINUS SIGN}") else ("", rest)
    mm = number(figures.removesuffix("mm").strip())
    return None if mm is None else Nudge(BY, mm if sign in ("", "+") else -mm)


def _note(rest: str) -> Request | None:
    return Note(BY, rest) if rest else None


_MEANS: dict[str, Callable[[str], Request | None]] = {
    "go": _alone(Go(BY)),
    "hold": _alone(Hold(BY, "held at the keyboard")),
    "slower": _alone(Slower(BY)),
    "faster": _alone(Faster(BY)),
    "clear": _alone(Clear(BY)),
    "off": _alone(DrivesOff(BY, "asked for at the keyboard")),
    "broke": _at_a_turn(Broke),
    "splice": _at_a_turn(Splice),
    "new wire": _new_wire,
    "unwind": _at_a_turn(Unwind),
    "turn": _turn,
    "read": _read,
    "zero": _alone(ZeroContact(BY)),
    "together": _alone(Together(BY)),
    "dry pass": _alone(DryPass(BY)),
    "seen": _alone(Seen(BY)),
    "nudge": _nudge,
    "undo": _alone(TakeBack(BY)),
    "skip": _alone(Skip(BY)),
    "note": _note,
    "end": _alone(End(BY, "ended by the operator")),
}
