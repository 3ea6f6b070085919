"""Yes or no."""

from __future__ import annotations

from typing import ClassVar

from textual.binding import Binding, BindingType

from windctl.tui.dialogs.dialog import Dialog


class Confirm(Dialog[bool]):
    """Y is yes; N and Escape are no."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("y", "yes", "Yes"),
        Binding("n", "no", "No"),
    ]

    def how(self) -> str:
        """How to answer."""
        return "Y yes   N no"

    def action_yes(self) -> None:
        """Yes."""
        self.dismiss(True)

    def action_no(self) -> None:
        """No."""
        self.dismiss(False)
