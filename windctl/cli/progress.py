"""What an operator sees of a coil while it is wound: a live display on a terminal, plain lines elsewhere.

Both are fed with the run's latest snapshot and write to standard error only. What a snapshot looks like
is decided by pure functions; the two faces only place the text. A stream that no longer takes text (the
terminal was closed, the reader of the pipe has gone) is given up quietly: the run matters more than its
picture.
"""

from __future__ import annotations

import os
import shutil
import time
from collections.abc import Callable, Mapping, Sequence
from typing import TYPE_CHECKING, Protocol, TextIO

from windctl.cli import present
from windctl.run.zero_seen import now_words

if TYPE_CHECKING:
    from windctl.run.snapshot import Snapshot

LIVE_PERIOD_S = 0.1
PLAIN_PERIOD_S = 5.0

_BAR_WIDTH = 24
_LEAST_BAR = 8
_LOOKS = {  # phase: glyph, plain glyph, SGR colour; never colour alone
    "turning": ("▶", ">", "32"),
    "stopping": ("▷", ">", "33"),
    "held": ("‖", "=", "33"),
    "settling": ("‖", "=", "36"),
    "waiting": ("○", "o", "32"),  # for somebody who winds and reads the counter
    "reading": ("◇", "=", "36"),
    "tripped": ("✖", "x", "31"),
    "ended": ("■", "#", "36"),
}
_OTHER_LOOK = ("·", "-", "0")


class Face(Protocol):
    """Something that shows a run."""

    def show(self, snapshot: Snapshot) -> None:
        """Show the run as it is now."""
        ...

    def say(self, text: str) -> None:
        """Keep a line of text on the screen."""
        ...

    def close(self) -> None:
        """Leave the screen tidy. Safe to call twice."""
        ...


# ---------------------------------------------------------------- what a snapshot looks like


def bar(part: float, width: int, plain: bool) -> str:
    """A bar of `width` cells filled to `part` (0 to 1)."""
    full = round(max(0.0, min(1.0, part)) * width)
    done, left = ("#", "-") if plain else ("█", "░")
    return done * full + left * (width - full)


def motion_fields(snapshot: Snapshot) -> list[str]:
    """How far the coil is, most important first."""
    goal = snapshot.turns_planned if snapshot.stop_turn is None else snapshot.stop_turn
    fields = [f"{present.grouped(snapshot.turns)} / {present.grouped(goal)} turns"]
    if not snapshot.by_eye:
        fields.append(f"{snapshot.pace_rpm:.0f} rpm")
    if snapshot.seconds_left is not None:
        fields.append(f"{present.duration(snapshot.seconds_left)} left")
    return fields


def coil_fields(snapshot: Snapshot) -> list[str]:
    """What is known of the coil, and what happens next, most important first."""
    fields = []
    if snapshot.finish_ohm is not None:
        fields.append(f"finish {present.ohm(snapshot.finish_ohm, snapshot.finish_u95 or 0.0)}")
    if snapshot.ohm_20c_now is not None:
        fields.append(f"now {present.ohm(snapshot.ohm_20c_now)}")
    if snapshot.zero is not None and snapshot.zero.wanted and not snapshot.zero.together:
        fields.append(f"contact: {now_words(snapshot.zero.now)}")
    fields.append(snapshot.says)
    if snapshot.tension_cn is not None:
        fields.append(f"{snapshot.tension_cn:.0f} cN")
    if snapshot.virtual:
        fields.append("simulated")
    return fields


def fitted(fields: Sequence[str], width: int) -> str:
    """As many fields, in their order, as fit into `width` cells; the first is cut if it alone is too wide."""
    text = ""
    for field in fields:
        longer = f"{text}   {field}" if text else field
        if len(longer) > width:
            break
        text = longer
    return text or (fields[0][: max(width, 0)] if fields else "")


def live_lines(snapshot: Snapshot, width: int, plain: bool, colour: bool) -> list[str]:
    """The two lines of the live display, at most `width` - 1 cells each: the last cell makes some wrap."""
    room = max(width - 1, 1)
    glyph, plain_glyph, sgr = _LOOKS.get(snapshot.phase, _OTHER_LOOK)
    head = f"{plain_glyph if plain else glyph} {snapshot.phase}"[:room]
    fields = motion_fields(snapshot)
    # A bar only where all the numbers fit beside it: they say more.
    bar_room = room - len(head) - 2 - len("   ".join(fields)) - 3
    if bar_room >= _LEAST_BAR:
        goal = snapshot.turns_planned if snapshot.stop_turn is None else snapshot.stop_turn
        part = snapshot.turns / goal if goal > 0 else 0.0
        fields = [bar(part, min(bar_room, _BAR_WIDTH), plain), *fields]
    rest = fitted(fields, room - len(head) - 2)
    if colour:
        head = f"\x1b[{sgr}m{head}\x1b[0m"
    return [f"{head}  {rest}" if rest else head, f"  {fitted(coil_fields(snapshot), room - 2)}"[:room]]


def plain_line(snapshot: Snapshot) -> str:
    """The whole snapshot on one line, for logs and pipes."""
    return f"{snapshot.phase}: " + ", ".join([*motion_fields(snapshot), *coil_fields(snapshot)])


# ---------------------------------------------------------------- the faces


class _Stream:
    """A stream for text, or nothing once it has refused some."""

    def __init__(self, stream: TextIO) -> None:
        self._stream: TextIO | None = stream

    def write(self, text: str) -> None:
        if self._stream is None:
            return
        try:
            self._stream.write(present.writable(text, self._stream))
            self._stream.flush()
        except (OSError, ValueError):  # ValueError: closed by whoever lent it
            present.forget(self._stream)
            self._stream = None


class Live:
    """Two lines redrawn in place."""

    def __init__(self, stream: TextIO, *, colour: bool) -> None:
        self._lender = stream
        self._out = _Stream(stream)
        self._plain = not present.takes_unicode(stream)
        self._colour = colour
        self._drawn: list[str] = []

    def show(self, snapshot: Snapshot) -> None:
        """Redraw, if anything changed."""
        lines = live_lines(snapshot, _width(self._lender), self._plain, self._colour)
        if lines != self._drawn:
            self._out.write(self._wiped() + "\n".join(lines))
            self._drawn = lines

    def say(self, text: str) -> None:
        """A line above the display, which stays."""
        drawn = "\n".join(self._drawn)
        self._out.write(f"{self._wiped()}{present.folded(text, _width(self._lender))}\n{drawn}")

    def close(self) -> None:
        """Leave the last picture standing, the cursor below it."""
        if self._drawn:
            self._out.write("\n")
            self._drawn = []

    def _wiped(self) -> str:
        """Back to the first cell of the display, everything from there on erased."""
        if not self._drawn:
            return ""
        up = len(self._drawn) - 1
        return "\r" + (f"\x1b[{up}A" if up else "") + "\x1b[J"


class PlainLines:
    """A line every few seconds, and at once when the phase changes."""

    def __init__(self, stream: TextIO, clock: Callable[[], float] = time.monotonic) -> None:
        self._out = _Stream(stream)
        self._clock = clock
        self._phase = ""
        self._due = float("-inf")

    def show(self, snapshot: Snapshot) -> None:
        """Write a line if one is due."""
        now = self._clock()
        if snapshot.phase != self._phase or now >= self._due:
            self._phase, self._due = snapshot.phase, now + PLAIN_PERIOD_S
            self._out.write(plain_line(snapshot) + "\n")

    def say(self, text: str) -> None:
        """Write the line."""
        self._out.write(text + "\n")

    def close(self) -> None:
        """Nothing to tidy."""


class Quiet:
    """Shows nothing, says what must be said."""

    def __init__(self, stream: TextIO) -> None:
        self._out = _Stream(stream)

    def show(self, snapshot: Snapshot) -> None:
        """Nothing."""

    def say(self, text: str) -> None:
        """Write the line."""
        self._out.write(text + "\n")

    def close(self) -> None:
        """Nothing to tidy."""


def face_for(stream: TextIO, *, quiet: bool, environ: Mapping[str, str] = os.environ) -> Face:
    """The face that suits `stream`: live on a terminal that can move its cursor, else plain lines."""
    if quiet:
        return Quiet(stream)
    if stream.isatty() and environ.get("TERM", "") != "dumb":
        return Live(stream, colour=not environ.get("NO_COLOR"))
    return PlainLines(stream)


def _width(stream: TextIO) -> int:
    """Cells in a line of the terminal behind `stream`."""
    try:
        return os.get_terminal_size(stream.fileno()).columns or 80
    except (OSError, ValueError):
        return shutil.get_terminal_size().columns
