"""The guide between the flanges as it is to be seen there before the first turn, to be read while bending
over the machine: from the side, the motor on the left; which flange is which, where the arrows lead, and in
large figures how far nudging has come."""

from __future__ import annotations

from dataclasses import dataclass

from windctl.tui.pictures.cells import Picture, blank, put
from windctl.tui.pictures.digits import big_digits
from windctl.tui.pictures.letters import lettered

_WALL = "██"
_LEAST_WIDTH, _LEAST_HEIGHT = 40, 8


@dataclass(frozen=True, slots=True)
class Flanges:
    """`place`: of the guide, 0 at the start to 1 at the far turn-round; None: not known. `end`: where it is
    to be seen, "" while nothing is asked. Millimetres are positive towards the far flange."""

    start_left: bool
    place: float | None
    end: str
    shift_mm: float
    fine_mm: float
    coarse_mm: float


def flanges_picture(width: int, height: int, seen: Flanges) -> Picture:
    """`height` rows of `width` cells; nothing where they are too few."""
    picture = blank(width, height)
    if width < _LEAST_WIDTH or height < _LEAST_HEIGHT:
        return picture
    tall = 9 if height >= 26 else 7 if height >= 20 else 5 if height >= 14 else 3
    rows = max(2, min(height - tall - 5, 16))
    _bobbin(picture, width, rows, seen)
    _arrows(picture, width, rows + 2, seen)
    _shift(picture, width, rows + 4, tall, seen)
    return picture


def _bobbin(picture: Picture, width: int, rows: int, seen: Flanges) -> None:
    left, right = 2, width - 2 - len(_WALL)
    put(picture, 0, left, "motor", "label")
    put(picture, 0, right + len(_WALL) - 8, "operator", "label")
    asked_left = seen.end == ("start" if seen.start_left else "far")
    for row in range(1, rows + 1):
        put(picture, row, left, _WALL, "past" if seen.end and asked_left else "flange")
        put(picture, row, right, _WALL, "past" if seen.end and not asked_left else "flange")
    inner = right - left - len(_WALL)
    put(picture, rows, left + len(_WALL), "▒" * inner, "core")
    names = ("START FLANGE", "FAR FLANGE")
    first, last = names if seen.start_left else names[::-1]
    put(picture, rows + 1, left, first, "digits")
    put(picture, rows + 1, right + len(_WALL) - len(last), last, "digits")
    if seen.place is not None:
        across = seen.place if seen.start_left else 1.0 - seen.place
        at = left + len(_WALL) + 1 + round(min(max(across, 0.0), 1.0) * (inner - 3))
        put(picture, 1, at + 2 if at < width // 2 else at - 6, "guide", "guide")
        for row in range(1, rows):
            put(picture, row, at, "│" if row < rows - 1 else "▼", "guide")


def _arrows(picture: Picture, width: int, row: int, seen: Flanges) -> None:
    """Which arrow leads where, beneath the flange that it leads to."""
    to_left, to_right = ("start", "far") if seen.start_left else ("far", "start")
    put(picture, row, 2, f"◀ ← towards the {to_left} flange", "guide")
    words = f"towards the {to_right} flange → ▶"
    put(picture, row, width - 2 - len(words), words, "guide")
    steps = f"{seen.fine_mm:g} mm a key, {seen.coarse_mm:g} mm with Shift or , and ."
    put(picture, row + 1, max(2, (width - len(steps)) // 2), steps, "label")


def _shift(picture: Picture, width: int, top: int, tall: int, seen: Flanges) -> None:
    mm = round(seen.shift_mm, 2)
    figures = f"{abs(mm):.2f}"
    drawn = big_digits(figures, tall) if tall > 3 else lettered(figures)
    unit = lettered("MM")
    left_wards = (mm < 0) == seen.start_left
    arrow = "" if not mm else "◀" if left_wards else "▶"
    whither = "" if not mm else f"nudged towards the {'far' if mm > 0 else 'start'} flange"
    words = whither or "not nudged"
    room = len(drawn[0]) + 2 + len(unit[0])
    at = max(2, (width - room - 3 - len(words)) // 2)
    for row, line in enumerate(drawn):
        put(picture, top + row, at, line, "digits")
    base = top + tall - 3
    for row, line in enumerate(unit):
        put(picture, base + row, at + len(drawn[0]) + 2, line, "label")
    put(picture, base + 1, at + room + 2, f"{arrow} {words}".strip(), "digits" if mm else "label")
