"""The bottom row: what the keys do here, as many as there is room for. F1 has them all."""

from __future__ import annotations

from typing import NamedTuple

from textual import events
from textual.dom import DOMNode
from textual.screen import Screen

from windctl.tui.keymap import HOLD_KEY
from windctl.tui.pictures.cells import Picture, blank, put
from windctl.tui.widgets.drawing import Drawing

_LAST = "help"  # stands at the right end, whatever else has no room
_MORE = "…"


class Shown(NamedTuple):
    """One key: how it is written, what it does, whether it can be pressed now, and the action behind it."""

    key: str
    words: str
    enabled: bool
    action: str
    whose: DOMNode


class KeyBar(Drawing):
    """Drawn in one piece, where the library's own bar makes a widget a key at every change."""

    DEFAULT_CSS = "KeyBar { height: 1; dock: bottom; background: $footer-background; }"

    def __init__(self) -> None:
        super().__init__()
        self._places: list[tuple[range, Shown]] = []

    def on_mount(self) -> None:
        """Keys come and go."""
        self.screen.bindings_updated_signal.subscribe(self, self._changed)

    def _changed(self, screen: Screen[object]) -> None:
        if self.is_attached and screen is self.screen:
            self.redraw()

    def shown(self) -> tuple[list[Shown], Shown | None]:
        """The keys in order, and the one at the right end."""
        keys: list[Shown] = []
        last = None
        for whose, binding, enabled, _ in self.screen.active_bindings.values():
            if not binding.show:
                continue
            name = self.app.get_key_display(binding)
            name = name.upper() if len(name) < 4 else name
            one = Shown(name, binding.description, enabled, binding.action, whose)
            if binding.id == _LAST:
                last = one
            elif binding.key == HOLD_KEY:
                keys.insert(0, one)
            else:
                keys.append(one)
        return keys, last

    def drawn(self, width: int, height: int) -> Picture:
        """From the left as far as they go."""
        picture = blank(width, height)
        keys, last = self.shown()
        self._places = []
        room = width
        if last is not None:
            room = width - len(last.key) - len(last.words) - 4
            self._put(picture, room + 2, last)
        column = 1
        for at, one in enumerate(keys):
            needed = len(one.key) + 1 + len(one.words)
            spare = 0 if at == len(keys) - 1 else len(_MORE) + 1
            if column + needed + spare > room:
                put(picture, 0, column, _MORE, "label")
                break
            self._put(picture, column, one)
            column += needed + 2
        return picture

    def _put(self, picture: Picture, column: int, one: Shown) -> None:
        put(picture, 0, column, one.key, "past" if one.enabled else "axis")
        after = column + len(one.key) + 1
        put(picture, 0, after, one.words, "digits" if one.enabled else "axis")
        self._places.append((range(column, after + len(one.words)), one))

    async def on_click(self, event: events.Click) -> None:
        """A click on a key presses it."""
        for place, one in self._places:
            if event.x in place and one.enabled:
                await self.app.run_action(one.action, one.whose)
                return
