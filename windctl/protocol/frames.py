"""Frames: how messages stand on the line. Bytes in, frames out; no clock, no I/O.

Inside a frame: code u8, sequence u8, body (at most 60 bytes), CRC-16/IBM-3740 big endian over all that.
On the line: the same, COBS-encoded (Cheshire and Baker 1999), and a closing 0x00. A zero byte occurs
nowhere else, so a reader finds the next frame after any damage. A damaged COBS code byte moves many bits at
once, beyond what a CRC promises to find, so the length of a known code is checked too.
"""

from __future__ import annotations

from binascii import crc_hqx
from typing import Final, NamedTuple

from cobs.cobs import DecodeError
from cobs.cobs import decode as cobs_decode
from cobs.cobs import encode as cobs_encode

from windctl.protocol.messages import BODY_LIMIT, MESSAGES

DELIMITER: Final = b"\0"
CRC_START: Final = 0xFFFF
OVERHEAD: Final = 4  # code, sequence, CRC
ENCODED_LIMIT: Final = BODY_LIMIT + OVERHEAD + 1  # longest frame on the line, without its delimiter

_SIZES: Final = {code: kind.SIZE + OVERHEAD for code, kind in MESSAGES.items()}


class Frame(NamedTuple):
    """One good frame. The body has the right length if the code is known."""

    code: int
    sequence: int
    body: bytes


def encode(code: int, sequence: int, body: bytes) -> bytes:
    """The frame as bytes for the line, delimiter included. Code, sequence: u8; body: at most 60 bytes."""
    if len(body) > BODY_LIMIT:
        raise ValueError(f"frame body of {len(body)} bytes, limit {BODY_LIMIT}")
    inside = bytes((code, sequence)) + body
    encoded: bytes = cobs_encode(inside + crc_hqx(inside, CRC_START).to_bytes(2, "big"))
    return encoded + DELIMITER


class FrameReader:
    """Cuts a stream of bytes into frames; whatever is not a good frame is counted in `bad` and dropped.

    Every stretch between two delimiters counts once, however long; an empty one is nothing.
    """

    __slots__ = ("_overlong", "_pending", "bad")

    def __init__(self) -> None:
        self._pending = bytearray()  # the stretch since the last delimiter, at most ENCODED_LIMIT bytes
        self._overlong = False
        self.bad = 0

    def feed(self, data: bytes) -> list[Frame]:
        """The frames that these bytes complete, in order."""
        frames: list[Frame] = []
        *closed, rest = data.split(DELIMITER)
        for stretch in closed:
            self._keep(stretch)
            if self._overlong:
                self.bad += 1
            elif self._pending:
                frame = _open(bytes(self._pending))
                if frame is None:
                    self.bad += 1
                else:
                    frames.append(frame)
            self._pending.clear()
            self._overlong = False
        self._keep(rest)
        return frames

    def _keep(self, stretch: bytes) -> None:
        if len(self._pending) + len(stretch) > ENCODED_LIMIT:
            self._overlong = True
            self._pending.clear()
        elif not self._overlong:
            self._pending += stretch


def _open(encoded: bytes) -> Frame | None:
    try:
        inside: bytes = cobs_decode(encoded)
    except DecodeError:
        return None
    if len(inside) < OVERHEAD or crc_hqx(inside, CRC_START) != 0:
        return None
    if _SIZES.get(inside[0], len(inside)) != len(inside):
        return None
    return Frame(inside[0], inside[1], inside[2:-2])
