"""The last bytes of a line, each way, with their time: what a fault report needs and no record keeps.

The text form has a line for every piece: seconds, `<` from the board or `>` to it, and the bytes in hex.
"""

from __future__ import annotations

from collections import deque
from collections.abc import Iterator
from typing import NamedTuple

from windctl.protocol.frames import FrameReader
from windctl.protocol.messages import BadMessageError, decode

FROM_BOARD, TO_BOARD = "<", ">"
_PIECES = 4000  # each way about a minute of winding


class Piece(NamedTuple):
    """Bytes that were read or written at one time, seconds on the port's clock."""

    at: float
    way: str
    data: bytes


class LineTrace:
    """A ring: new pieces push out the oldest."""

    def __init__(self, pieces: int = _PIECES) -> None:
        self._pieces: deque[Piece] = deque(maxlen=pieces)

    def add(self, at: float, way: str, data: bytes) -> None:
        """Keep a piece."""
        self._pieces.append(Piece(at, way, data))

    def text(self) -> str:
        """All pieces, oldest first, times from the first one on."""
        begun = self._pieces[0].at if self._pieces else 0.0
        return "".join(f"{at - begun:.4f} {way} {data.hex()}\n" for at, way, data in self._pieces)


def pieces_of(text: str) -> Iterator[Piece]:
    """The pieces of a text form. Lines that are none, such as comments, are passed over."""
    for line in text.splitlines():
        parts = line.split()
        if len(parts) == 3 and parts[1] in (FROM_BOARD, TO_BOARD):
            try:
                yield Piece(float(parts[0]), parts[1], bytes.fromhex(parts[2]))
            except ValueError:
                continue


def spelt_out(text: str) -> str:
    """The same trace as messages: a line for each frame, and for what was no good frame."""
    readers = {way: FrameReader() for way in (FROM_BOARD, TO_BOARD)}
    lines = []
    for at, way, data in pieces_of(text):
        reader = readers[way]
        bad = reader.bad
        for frame in reader.feed(data):
            try:
                said = repr(decode(frame.code, frame.body))
            except BadMessageError as error:
                said = str(error)
            lines.append(f"{at:.4f} {way} #{frame.sequence} {said}\n")
        if reader.bad != bad:
            lines.append(f"{at:.4f} {way} {reader.bad - bad} bad frames\n")
    return "".join(lines)
