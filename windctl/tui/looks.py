"""Every state as a word, a glyph and a role that a theme gives a colour: never colour alone."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Look:
    """How one state shows. `role` names its colour in the theme."""

    word: str
    glyph: str
    role: str


LOOKS = {
    "connecting": Look("connecting", "◌", "waiting"),
    "setting up": Look("setting up", "◌", "waiting"),
    "ready": Look("ready", "○", "ready"),
    "asking": Look("waits", "○", "ready"),
    "turning": Look("turning", "▶", "turning"),
    "stopping": Look("stopping", "▷", "stopping"),
    "held": Look("held", "‖", "held"),
    "waiting": Look("wind", "○", "ready"),
    "reading": Look("read", "◇", "settling"),
    "settling": Look("settling", "◇", "settling"),
    "tripped": Look("tripped", "✖", "alarm"),
    "ended": Look("ended", "■", "ended"),
    "drives off": Look("off", "○", "waiting"),
    "not open": Look("not open", "○", "waiting"),
    "no link": Look("no link", "✖", "alarm"),
    "failed": Look("failed", "✖", "alarm"),
}

VERDICTS = {
    "within": Look("within", "✔", "good"),
    "outside": Look("outside", "✖", "bad"),
    "not judged": Look("not judged", "○", "unsure"),
}

OUTCOMES = {
    "finished": Look("finished", "■", "good"),
    "stopped": Look("stopped", "‖", "unsure"),
    "tripped": Look("tripped", "✖", "bad"),
    "open": Look("open", "◌", "unsure"),
}

STEPS = {
    "good": Look("good", "✔", "good"),
    "fault": Look("fault", "✖", "bad"),
    "left out": Look("left out", "–", "unsure"),
    "not fitted": Look("not fitted", "·", "label"),
    "now": Look("now", "▶", "past"),
    "to come": Look("to come", "□", "label"),
}

INPUTS = {  # of an input: whether it is as it should be for winding
    "well": Look("closed", "✔", "good"),
    "open": Look("OPEN", "✖", "bad"),
    "free": Look("free", "✔", "good"),
    "pressed": Look("PRESSED", "✖", "bad"),
    "down": Look("down", "▼", "past"),
    "up": Look("up", "△", "label"),
    "standing": Look("stands", "■", "good"),
    "moving": Look("moves", "▶", "past"),
    "none": Look("not fitted", "·", "label"),
    "known": Look("known", "✔", "good"),
    "unknown": Look("not placed", "○", "unsure"),
    "reads": Look("reads", "✔", "good"),
    "waits": Look("no reading", "○", "unsure"),
    "free leads": Look("open", "○", "unsure"),
    "fitted": Look("fitted", "✔", "good"),
    "tripped": Look("TRIPPED", "✖", "bad"),
}

FITS = {
    "yes": Look("it fits", "✔", "good"),
    "tight": Look("a tight fit", "○", "unsure"),
    "no": Look("it will not fit", "✖", "bad"),
}


def look_of(phase: str) -> Look:
    """The look of a phase; one that has none shows its own word."""
    return LOOKS.get(phase, Look(phase, "·", "waiting"))
