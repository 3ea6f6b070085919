"""The hold key ahead of everything else.

A terminal's keys arrive in a thread of their own. The hold key is acted on there, before the interface's own
loop hears of it: a screen that is busy, or waits for a slow terminal to take its output, delays no hold.
"""

from __future__ import annotations

from typing import Protocol, cast

from textual import events
from textual.driver import Driver
from textual.message import Message

from windctl.tui.keymap import HOLD_KEY, SPACE


class Holds(Protocol):
    """Who can ask the spindle to stand, from any thread."""

    def hold_at_once(self) -> None: ...
    def space_holds(self) -> bool: ...


class Held(events.Key):
    """The hold key, acted on already."""

    def __init__(self) -> None:
        super().__init__(HOLD_KEY, None)


def with_urgent_keys(base: type[Driver]) -> type[Driver]:
    """A driver that acts on the hold key by itself and then passes it on as `Held`."""

    class UrgentKeys(base):  # type: ignore[misc,valid-type]  # the platform's driver is known only here
        @property
        def backlog(self) -> int:
            """Pieces of output that the terminal has not taken yet. The library keeps them to itself; where
            they cannot be counted, there are none."""
            queue = getattr(getattr(self, "_writer_thread", None), "_queue", None)
            return 0 if queue is None else queue.qsize()

        def process_message(self, message: Message) -> None:
            if isinstance(message, events.Key):
                app = cast(Holds, self._app)
                if message.key == HOLD_KEY or (message.key == SPACE and app.space_holds()):
                    app.hold_at_once()
                    message = Held()
            super().process_message(message)

    return UrgentKeys
