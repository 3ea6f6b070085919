"""What a screen has drawn goes with it."""

from __future__ import annotations

from textual import _styles_cache


def forget_drawn() -> None:
    """Let go of what screens that are gone have drawn.

    The library remembers two colours for each of the last thousand widgets (`get_inner_outer`), by the
    widget's own store of lines. So it keeps that: some 2 MB a dialog, and the collector of cycles has to
    look through them. The colours are worked out anew in no time.
    """
    remembered = getattr(_styles_cache.StylesCache, "get_inner_outer", None)
    clear = getattr(remembered, "cache_clear", None)
    if clear is not None:  # else a later version of the library remembers them otherwise
        clear()
