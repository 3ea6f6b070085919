"""The rooms between coils, by name; each is loaded when somebody goes there."""

from __future__ import annotations

from typing import Final

from windctl.tui.screens.between import Between as Between

ABOUT: Final = {
    "coils": "what was wound",
    "spools": "wire, and what is left of it",
    "machine": "inputs as they are now, and the check of board and machine",
}


def room_of(name: str) -> type[Between]:
    """The class of a room in `ABOUT`."""
    match name:
        case "coils":
            from windctl.tui.screens.coils import CoilsScreen

            return CoilsScreen
        case "spools":
            from windctl.tui.screens.spools import SpoolsScreen

            return SpoolsScreen
        case "machine":
            from windctl.tui.screens.machine import MachineScreen

            return MachineScreen
        case _:
            raise ValueError(f"there is no room {name!r}")
