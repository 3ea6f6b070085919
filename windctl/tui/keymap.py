"""Every key of the interface, in one table. Letters, space and function keys; chords for nothing urgent.

Terminals in terminals keep Ctrl+S, Ctrl+Q, Ctrl+J, Ctrl+B and Ctrl+A for themselves, so nothing is on them.
`keys` in the settings file maps an id to other keys. F8 is the hold key and stays it.
"""

from __future__ import annotations

from collections.abc import Mapping

from textual.binding import Binding

HOLD_KEY = "f8"
SPACE = "space"
KEPT = (HOLD_KEY, SPACE)  # no other command may take these
FINE_MM, COARSE_MM = 0.05, 0.5  # that a key moves the guide, where it is shown before the first turn

_KEYS: dict[str, tuple[str, str, str]] = {  # id: key, action, what it does
    "help": ("f1", "help", "Help"),
    "recipes": ("f2", "app.room('recipes')", "Recipes"),
    "coils": ("f3", "app.room('coils')", "Coils"),
    "commands": ("f4", "command_palette", "All commands"),
    "light": ("f6", "switch_light", "Light or dark"),
    "spools": ("f7", "app.room('spools')", "Spools"),
    "machine": ("f9", "app.room('machine')", "Machine"),
    "quit": ("f10", "leave", "Leave"),
    "leave": ("ctrl+c", "leave", "Leave"),
    "wind.go": ("g", "go", "Go"),
    "wind.clear": ("c", "clear", "Clear a trip"),
    "wind.end": ("e", "end", "End"),
    "wind.tell": ("t", "tell", "Tell"),
    "wind.slower": ("s", "slower", "Slower"),
    "wind.faster": ("f", "faster", "Faster"),
    "wind.read": ("r", "read", "Read by hand"),
    "wind.count": ("k", "count", "Counter"),
    "wind.undo": ("u", "undo", "Take a reading back"),
    "wind.zero": ("z", "zero", "Zero the contact"),
    "wind.together": ("y", "together", "Leads are together"),
    "wind.seen": ("y", "seen", "It is right"),
    "wind.left": ("left", f"nudge({-FINE_MM})", f"{FINE_MM:g} mm"),
    "wind.right": ("right", f"nudge({FINE_MM})", f"{FINE_MM:g} mm"),
    "wind.further_left": ("comma", f"nudge({-COARSE_MM})", f"{COARSE_MM:g} mm"),
    "wind.further_right": ("full_stop", f"nudge({COARSE_MM})", f"{COARSE_MM:g} mm"),
    "wind.shift_left": ("shift+left", f"nudge({-COARSE_MM})", f"{COARSE_MM:g} mm"),
    "wind.shift_right": ("shift+right", f"nudge({COARSE_MM})", f"{COARSE_MM:g} mm"),
    "wind.note": ("n", "note", "Note"),
    "wind.leave": ("l", "leave_open", "Leave open"),
    "wind.closer": ("v", "closer", "Closer look"),
    "wind.done": ("enter", "done", "Record"),
    "recipes.wind": ("w", "wind", "Wind it"),
    "recipes.resume": ("r", "resume", "Go on with the open coil"),
    "recipes.again": ("n", "again", "The next, the same"),
    "recipes.reload": ("f5", "reload", "Look again"),
    "before.start": ("s", "start", "Start"),
    "before.zero": ("z", "zero", "Zero the contact"),
    "before.pass": ("p", "dry_pass", "Dry pass"),
    "coils.newer": ("p", "newer", "Newer page"),
    "coils.older": ("o", "older", "Older page"),
    "coils.filter": ("f", "filter", "Filter"),
    "coils.find": ("slash", "find", "Find"),
    "coils.sort": ("s", "sort", "Sort"),
    "coils.mark": ("m", "mark", "Mark"),
    "coils.compare": ("c", "compare", "Compare"),
    "coils.copy": ("y", "copy", "Copy"),
    "coil.verify": ("v", "verify", "Verify"),
    "coil.compare": ("c", "compare", "Compare"),
    "coil.alone": ("b", "alone", "Alone"),
    "coil.draw": ("d", "draw", "Draw"),
    "coil.export": ("x", "export", "Export"),
    "coil.report": ("r", "report", "Report"),
    "coil.copy": ("y", "copy", "Copy"),
    "machine.open": ("o", "open", "Open"),
    "machine.check": ("c", "check", "Check"),
    "machine.still": ("u", "still", "Unpowered"),
    "machine.one": ("enter", "one", "Check this"),
    "machine.skip": ("s", "skip", "Leave out"),
    "machine.keep": ("k", "keep", "Keep"),
    "machine.other": ("m", "other", "Other"),
    "spools.take": ("enter", "take", "For the next coils"),
    "spools.add": ("a", "add", "Add"),
    "spools.weigh": ("g", "weigh", "Weigh"),
    "spools.measure": ("m", "measure", "Measure"),
    "back": ("escape", "back", "Back"),
}


def key(name: str, *, show: bool = True, priority: bool = False) -> Binding:
    """The binding with this id."""
    keys, action, words = _KEYS[name]
    return Binding(keys, action, words, show=show, priority=priority, id=name)


def ids() -> tuple[str, ...]:
    """The ids of all keys that can be given other keys."""
    return tuple(_KEYS)


def checked(wanted: Mapping[str, object]) -> tuple[dict[str, str], list[str]]:
    """(what can be mapped, what is wrong with the rest)."""
    good: dict[str, str] = {}
    wrong: list[str] = []
    for name, keys in wanted.items():
        if name not in _KEYS:
            wrong.append(f"keys.{name}: there is no such command; known: {', '.join(_KEYS)}")
        elif not isinstance(keys, str) or not keys:
            wrong.append(f"keys.{name} is {keys!r}, not a key or several with commas between")
        elif {part.strip() for part in keys.split(",")} & set(KEPT):
            wrong.append(f"keys.{name} is {keys!r}: {' and '.join(KEPT)} hold the spindle, nothing else")
        else:
            good[name] = keys
    return good, wrong
