"""What a screen is for, and its keys."""

from __future__ import annotations

from textual.screen import Screen

from windctl.tui.dialogs.dialog import Dialog

EVERYWHERE = """\
F8       the spindle holds; works on every screen and in every dialog
Space    the same while a coil turns and nothing is typed
F1       this help       F2  recipes      F3  coils      F4  all commands
F6       light or dark   F10 leave

F8 is no emergency stop, and this program is no safety function: use the hardware stop."""


class Help(Dialog[None]):
    """Closes with Escape or F1."""

    def __init__(self, screen: Screen[object]) -> None:
        about = getattr(screen, "ABOUT", "")
        keys = [
            f"{active.binding.key.upper() if len(active.binding.key) == 1 else active.binding.key:<9}"
            f"{active.binding.description}"
            for active in screen.active_bindings.values()
            if active.binding.id and "." in active.binding.id
        ]
        words = "\n\n".join(part for part in (about, "\n".join(keys), EVERYWHERE) if part)
        super().__init__("Help", words)

    def key_f1(self) -> None:
        """Closes as it opened."""
        self.dismiss(None)
