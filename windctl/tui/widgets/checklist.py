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
    """Enter or Space confirms the line and goes on to the next; Backspace takes it back."""

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("space", "select", "Confirm", show=False),
        Binding("backspace", "take_back", "Take back", show=False),
    ]

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

    def reword(self, items: Sequence[str]) -> None:
        """As many lines as before, some in other words."""
        before, self.items = self.items, tuple(items)
        for at, (was, is_) in enumerate(zip(before, self.items, strict=True)):
            if was != is_:
                self.replace_option_prompt_at_index(at, self._line(at))

    def action_select(self) -> None:
        """Confirm, and go on: at once, so that a quick second key means the second line."""
        at = self.highlighted
        if at is None:
            return
        self._set(at, True)
        if at + 1 < len(self.items):
            self.highlighted = at + 1

    def on_option_list_option_selected(self, event: OptionList.OptionSelected) -> None:
        """A click on a line."""
        event.stop()
        self.action_select()

    def action_take_back(self) -> None:
        """The line is not confirmed after all."""
        if self.highlighted is not None:
            self._set(self.highlighted, False)

    def _set(self, at: int, done: bool) -> None:
        self.done[at] = done
        self.replace_option_prompt_at_index(at, self._line(at))
        self.post_message(self.Changed(self.complete))

    def _line(self, at: int) -> Content:
        return Content(f"{'✔' if self.done[at] else '□'} {self.items[at]}")
