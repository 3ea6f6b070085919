"""A program as the record keeps it: its segments in wire form, as text."""

from __future__ import annotations

import base64
import zlib
from functools import lru_cache

from windctl.errors import RecordBroken
from windctl.lay.program import Place, Program


def stored(packed: bytes) -> str:
    """The text for segments in wire form (u16 counts, i16 guide steps, little endian, 4 bytes each)."""
    return base64.b64encode(zlib.compress(packed, 9)).decode()


@lru_cache(maxsize=4)
def unpacked(text: str) -> bytes:
    """The segments in wire form.

    Raises RecordBroken when the text is not a stored program.
    """
    try:
        return zlib.decompress(base64.b64decode(text, validate=True))
    except (ValueError, zlib.error) as error:
        raise RecordBroken(f"the stored program cannot be read: {error}") from error


def place_at(text: str, counts_per_turn: int, count: int) -> Place:
    """Where a count lies in a stored program, and where its guide is there.

    Raises RecordBroken when the text is not a stored program.
    """
    return _program(text, counts_per_turn).place_of(count)


@lru_cache(maxsize=4)
def _program(text: str, counts_per_turn: int) -> Program:
    return Program.from_packed(unpacked(text), counts_per_turn=counts_per_turn, steps_per_mm=1.0)
