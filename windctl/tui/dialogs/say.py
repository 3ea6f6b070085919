"""Something to be read before anything else."""

from __future__ import annotations

from windctl.tui.dialogs.dialog import Dialog


class Say(Dialog[None]):
    """Closes with Enter or Escape."""

    def how(self) -> str:
        """How to go on."""
        return "Enter goes on"

    def key_enter(self) -> None:
        """Read."""
        self.dismiss(None)
