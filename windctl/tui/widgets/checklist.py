"""Things to confirm one by one."""

from __future__ import annotations

from collections.abc import Sequence
from typing import ClassVar

from textual.binding import Binding, BindingType
from textual.content import Content
from textual.message import Message
from textual.widgets import OptionList
from textual.widgets.option_list import Option


class Checklist(OptionList):
    """Enter or Space confirms the line and goes on to the next; again takes it back."""

    BINDINGS: ClassVar[list[BindingType]] = [Binding("space", "select", "Confirm", show=False)]

    class Changed(Message):
        """A line was confirmed or taken back."""

        def __init__(self, complete: bool) -> None:
            super().__init__()
            self.complete = complete

    def __init__(self, items: Sequence[str], *, id: str | None = None) -> None:
        self.items = tuple(items)
        self.done = [False] * len(items)
        super().__init__(*[Option(self._line(at)) for at in range(len(items))], id=id, markup=False)

    @property
    def complete(self) -> bool:
        """True when every line is confirmed."""
        return all(self.done)

    def on_option_list_option_selected(self, event: OptionList.OptionSelected) -> None:
        """Confirm, or take back."""
        event.stop()
        at = event.option_index
        self.done[at] = not self.done[at]
        self.replace_option_prompt_at_index(at, self._line(at))
        if self.done[at] and at + 1 < len(self.items):
            self.highlighted = at + 1
        self.post_message(self.Changed(self.complete))

    def _line(self, at: int) -> Content:
        return Content(f"{'✔' if self.done[at] else '□'} {self.items[at]}")
