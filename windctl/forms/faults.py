"""Faults found inside a form: which keys they are about, and what is wrong, without a file or a line yet."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

KeyPath = tuple[str | int, ...]


def dotted(path: KeyPath) -> str:
    """The path as a reader writes it: `lay.pitch_mm`, `coils[2].name`, quoted where TOML needs quotes."""
    text = ""
    for part in path:
        if isinstance(part, int):
            text += f"[{part + 1}]"
            continue
        plain = part != "" and all(c.isascii() and (c.isalnum() or c in "-_") for c in part)
        shown = part if plain else '"' + shorten(part) + '"'
        text += f".{shown}" if text else shown
    return text


def shorten(text: str, limit: int = 40) -> str:
    """At most `limit` characters, with control characters made visible: no file steers a terminal."""
    cut = text if len(text) <= limit else text[: limit - 1] + "…"
    return "".join(c if c.isprintable() else c.encode("unicode_escape").decode("ascii") for c in cut)


@dataclass(frozen=True, slots=True)
class Fault:
    """One thing wrong with the value at `path`. With `missing`, the key is absent: its table is the place."""

    path: KeyPath
    text: str
    missing: bool = False
    at_key: bool = False


class KeysDisagreeError(ValueError):
    """Keys that are each valid and do not go together. Raised inside a form; paths are relative to it."""

    def __init__(self, faults: Sequence[Fault]) -> None:
        self.faults = tuple(faults)
        super().__init__("; ".join(fault.text for fault in self.faults))
