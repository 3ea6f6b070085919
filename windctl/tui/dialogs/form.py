"""Several lines that are typed together, each with its name; they are taken when all of them will do."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from typing import ClassVar

from textual import on
from textual.binding import Binding, BindingType
from textual.containers import Horizontal
from textual.widget import Widget
from textual.widgets import Input, Static

from windctl.tui.dialogs.dialog import Dialog
from windctl.tui.field import Field


class Form(Dialog[dict[str, str]]):
    """Up and Down go from line to line, Enter on to the next; on the last one it takes them all.

    `wrong` says what is wrong with the lines, or nothing; until then the form stays as it was typed.
    """

    BINDINGS: ClassVar[list[BindingType]] = [
        Binding("down", "app.focus_next", "Next line", show=False),
        Binding("up", "app.focus_previous", "Line before", show=False),
    ]

    def __init__(
        self,
        heading: str,
        words: str,
        fields: Sequence[Field],
        wrong: Callable[[Mapping[str, str]], str],
        typed: Mapping[str, str] | None = None,
        problem: str = "",
    ) -> None:
        super().__init__(heading, words)
        self._fields = tuple(fields)
        self._wrong = wrong
        self._typed = dict(typed or {})
        self._problem = problem

    def body(self) -> list[Widget]:
        """A row for each line, and room for what is wrong."""
        rows: list[Widget] = [
            Horizontal(
                Static(field.name, classes="field-name", markup=False),
                Input(
                    self._typed.get(field.key, ""),
                    placeholder=field.hint,
                    id=f"field-{field.key}",
                    compact=True,
                    select_on_focus=False,
                ),
                classes="field",
            )
            for field in self._fields
        ]
        return [*rows, Static(self._problem, id="form-problem", markup=False)]

    def on_mount(self) -> None:
        """Type at once."""
        self.query(Input).first().focus()
        self._say(self._problem)

    def how(self) -> str:
        """How to answer."""
        return "Enter: next line, after the last one it is kept   Esc leaves it"

    @property
    def values(self) -> dict[str, str]:
        """The lines as they are, without blanks around them."""
        return {
            field.key: self.query_one(f"#field-{field.key}", Input).value.strip() for field in self._fields
        }

    @on(Input.Submitted)
    def taken(self, event: Input.Submitted) -> None:
        """On to the next line; after the last, the answer, if it will do."""
        event.stop()
        lines = list(self.query(Input))
        at = lines.index(event.input)
        if at + 1 < len(lines):
            lines[at + 1].focus()
            return
        problem = self._wrong(self.values)
        if problem:
            self._say(problem)
        else:
            self.dismiss(self.values)

    def _say(self, problem: str) -> None:
        line = self.query_one("#form-problem", Static)
        line.update(f"✖ {problem}" if problem else "")
        line.set_class(bool(problem), "-there")
