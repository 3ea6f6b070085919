"""What a screen is for, and its keys."""

from __future__ import annotations

from itertools import zip_longest

from textual.screen import Screen

from windctl.tui.dialogs.dialog import Dialog

EVERYWHERE = """\
F8     the spindle holds, on every screen and in every dialog
Space  the same while a coil turns and nothing is typed
F1 help     F2 recipes  F3 coils    F7 spools   F9 machine
F4 all commands         F6 light or dark        F10 leave
F8 is no emergency stop, this program no safety function: use the hardware stop."""

_SIGNS = {
    "left": "←",
    "right": "→",
    "shift+left": "Shift←",
    "shift+right": "Shift→",
    "comma": ",",
    "full_stop": ".",
    "slash": "/",
    "escape": "Esc",
}


class Help(Dialog[None]):
    """Closes with Escape or F1."""

    def __init__(self, screen: Screen[object]) -> None:
        about = getattr(screen, "ABOUT", "")
        keys = [
            f"{_written(active.binding.key):<7}{active.binding.description}"
            for active in screen.active_bindings.values()
            if active.binding.id and "." in active.binding.id
        ]
        half = (len(keys) + 1) // 2
        pairs = zip_longest(keys[:half], keys[half:], fillvalue="")
        columns = "\n".join(f"{left:<34}{right}".rstrip() for left, right in pairs)
        words = "\n\n".join(part for part in (about, columns, EVERYWHERE) if part)
        super().__init__("Help", words)

    def key_f1(self) -> None:
        """Closes as it opened."""
        self.dismiss(None)


def _written(keys: str) -> str:
    """As it stands on the keyboard, in six letters."""
    if keys in _SIGNS:
        return _SIGNS[keys]
    return keys.upper() if len(keys) == 1 else keys.capitalize()
