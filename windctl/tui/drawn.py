"""What a screen has drawn goes with it."""

from __future__ import annotations

from typing import Any

from textual import _styles_cache
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
    remembered = getattr(_styles_cache.StylesCache, "get_inner_outer", None)
    clear = getattr(remembered, "cache_clear", None)
    if clear is not None:  # else a later version of the library remembers them otherwise
        clear()
