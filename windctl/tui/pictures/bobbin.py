"""How the bobbin sits on the spindle and which way it turns, as the operator sees it."""

from __future__ import annotations

from windctl.recipe.orientation import Orientation
from windctl.tui.pictures.cells import Picture, blank, put

WIDTH, HEIGHT = 42, 9


def bobbin_picture(where: Orientation, face_out: bool) -> Picture:
    """Left: looking along the spindle towards the motor. Right: from the side, motor on the left."""
    picture = blank(WIDTH, HEIGHT)
    turns = ("╭─▶", "◀─╯") if where.spindle == "cw" else ("◀─╮", "╰─▶")
    seen = "face" if face_out else "base"
    put(picture, 0, 1, "as you face it", "label")
    for row, line in enumerate(("╭─────────────╮", "│             │", "│             │", "╰─────────────╯")):
        put(picture, row + 2, 1, line, "flange")
    put(picture, 3, 7, "(●)", "core")
    put(picture, 4, 8 - len(seen) // 2, seen, "label")
    put(picture, 1, 7, turns[0], "guide")
    put(picture, 6, 7, turns[1], "guide")
    spins = "clockwise" if where.spindle == "cw" else "counter-clockwise"
    put(picture, 7, 0, spins, "guide")

    put(picture, 0, 21, "from the side", "label")
    near, far = ("face", "base") if face_out else ("base", "face")
    put(picture, 2, 21, "▐██▌", "core")
    put(picture, 3, 21, "▐██▌════", "core")
    put(picture, 4, 21, "▐██▌", "core")
    for row in (1, 2, 3, 4, 5):
        put(picture, row, 28, "█", "flange")
        put(picture, row, 37, "█", "flange")
    for row in (2, 3, 4):
        put(picture, row, 29, "▒▒▒▒▒▒▒▒", "core")
    put(picture, 6, 20, "motor", "label")
    put(picture, 6, 27, far, "label")
    put(picture, 6, 36, near, "label")
    at = 36 if where.start_side == "operator" else 29
    put(picture, 1, at, "▼", "guide")
    start = near if where.start_side == "operator" else far
    put(picture, 7, 21, f"start: {start} flange,", "guide")
    put(picture, 8, 21, f"towards the {where.start_side}", "guide")
    return picture
