"""One line that is typed in a form. Pure."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Field:
    """Its key in the answer, its name on the screen, and what to type there."""

    key: str
    name: str
    hint: str = ""
