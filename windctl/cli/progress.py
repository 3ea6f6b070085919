"""What an operator sees of a coil while it is wound: a live display on a terminal, plain lines elsewhere.

Both are fed with the run's latest snapshot and write to standard error only. What a snapshot looks like on the
screen is decided by pure functions; the two faces only place the text. A stream that no longer takes text (the
terminal was closed, the reader of the pipe has gone) is given up quietly: the run matters more than its picture.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Protocol, TextIO

from windctl.cli import present

if TYPE_CHECKING:
    from windctl.run.snapshot import Snapshot

LIVE_PERIOD_S = 0.1
PLAIN_PERIOD_S = 5.0

_BAR_WIDTH = 24
_LOOKS = {  # phase: glyph, plain glyph, SGR colour
    "turning": ("▶", ">", "32"),
    "held": ("‖", "=", "33"),
    "tripped": ("✖", "x", "31"),
    "finished": ("■", "#", "36"),
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
        """Leave the screen tidy."""
        ...


def bar(part: float, width: int, plain: bool) -> str:
    """A bar of `width` cells filled to `part` (0 to 1)."""
    full = round(max(0.0, min(1.0, part)) * width)
    done, left = ("#", "-") if plain else ("█", "░")
    return done * full + left * (width - full)


def coil_fields(snapshot: Snapshot) -> list[str]:
    """What is known of the coil's resistance, most important first."""
    fields = []
    if snapshot.finish_ohm is not None:
        fields.append(f"finish {present.ohm(snapshot.finish_ohm, snapshot.finish_u95 or 0.0)}")
    if snapshot.ohm_20c_now is not None:
        fields.append(f"now {present.ohm(snapshot.ohm_20c_now)} at 20 °C")
    if snapshot.stop_turn is not None:
        fields.append(f"stops at {present.grouped(snapshot.stop_turn)}")
    if snapshot.tension_cn is not None:
        fields.append(f"{snapshot.tension_cn:.0f} cN")
    return fields


def motion_fields(snapshot: Snapshot) -> list[str]:
    """How far the coil is, most important first."""
    fields = [f"{present.grouped(snapshot.turns)} / {present.grouped(snapshot.turns_planned)} turns"]
    if snapshot.pace_rpm is not None:
        fields.append(f"{snapshot.pace_rpm:.0f} rpm")
    if snapshot.seconds_left is not None:
        fields.append(f"{present.duration(snapshot.seconds_left)} left")
    return fields


def fitted(fields: Sequence[str], width: int) -> str:
    """As many fields, in their order, as fit into `width` cells; the first is cut if it alone is too wide."""
    text = ""
    for field in fields:
        longer = f"{text}   {field}" if text else field
        if len(longer) > width:
            break
        text = longer
    return text or (fields[0][:width] if fields else "")


def live_lines(snapshot: Snapshot, width: int, plain: bool, colour: bool) -> list[str]:
    """The two lines of the live display, none wider than `width` - 1 cells (the last cell makes some terminals wrap)."""
    room = max(width - 1, 1)
    glyph, plain_glyph, sgr = _LOOKS.get(snapshot.phase, _OTHER_LOOK)
    head = f"{plain_glyph if plain else glyph} {snapshot.phase}"
    part = snapshot.turns / snapshot.turns_planned if snapshot.turns_planned else 0.0
    fields = motion_fields(snapshot)
    # A bar only where the numbers fit beside it: they say more.
    bar_room = room - len(head) - 2 - len(fitted(fields, room)) - 2
    if bar_room >= 8:
        fields = [bar(part, min(bar_room, _BAR_WIDTH), plain), *fields]
    rest = fitted(fields, room - len(head) - 2)
    head = f"\x1b[{sgr}m{head}\x1b[0m" if colour else head[:room]
    first = f"{head}  {rest}" if rest else head
    marked = ["simulated"] if snapshot.simulated else []
    return [
        first,
        fitted(
            ["  " + field if i == 0 else field for i, field in enumerate([*coil_fields(snapshot), *marked])],
            room,
        ),
    ]


def plain_line(snapshot: Snapshot) -> str:
    """The whole snapshot on one line, for logs and pipes."""
    return f"{snapshot.phase}: " + ", ".join([*motion_fields(snapshot), *coil_fields(snapshot)])


class _Stream:
    """Standard error, or nothing once it has refused a line."""

    def __init__(self, stream: TextIO) -> None:
        self._stream: TextIO | None = stream

    def write(self, text: str) -> None:
        if self._stream is None:
            return
        try:
            self._stream.write(text)
            self._stream.flush()
        except (OSError, ValueError):  # ValueError: closed by whoever lent it
            self._stream = None


class _Events:
    """Which of a run's remarks have been shown already."""

    def __init__(self) -> None:
        self._shown = -1

    def fresh(self, snapshot: Snapshot) -> list[str]:
        news = [remark for remark in snapshot.events if remark.number > self._shown]
        if news:
            self._shown = news[-1].number
        return [remark.text for remark in news]
