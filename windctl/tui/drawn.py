"""What a screen has drawn goes with it."""

from __future__ import annotations

import sys
from typing import Any

from textual.screen import Screen
from textual.widget import Widget


def forget_drawn(screen: Screen[Any]) -> None:
    """Let go of what `screen` and screens that are gone have drawn.

    The library remembers two colours for each of the last thousand widgets (`get_inner_outer`), by the
    widget's own store of lines. So it keeps that: some 2 MB a dialog, and the collector of cycles has to
    look through them. The colours are worked out anew in no time.
    """
    for widget in screen.walk_children(Widget, with_self=True):
        widget.refresh()
    # Loaded by the library itself; a later version of it may remember them otherwise, or not at all.
    store = getattr(sys.modules.get("textual._styles_cache"), "StylesCache", None)
    clear = getattr(getattr(store, "get_inner_outer", None), "cache_clear", None)
    if clear is not None:
        clear()
