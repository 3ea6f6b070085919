"""Section 3: frames."""

from __future__ import annotations

from binascii import crc_hqx

from cobs.cobs import encode as cobs_encode

from tests.firmware.conformance.clause import clause, must
from tests.firmware.conformance.rig import Rig
from windctl.protocol import messages as m
from windctl.protocol.frames import ENCODED_LIMIT, encode


def _counted(rig: Rig, sent: bytes, bad: int, what: str) -> None:
    """These bytes raise the board's count of bad frames by `bad`, and get no answer."""
    before = rig.fresh_status().bad_frames
    begun = rig.mark()
    rig.raw(sent)
    rig.listen(0.12)
    counted = (rig.fresh_status().bad_frames - before) & 0xFFFF
    must(counted == bad, f"{what}: {counted} bad frames counted; expected: {bad}")
    answers = rig.since(begun, m.Accepted) + rig.since(begun, m.Refused)
    must(not answers, f"{what}: answered with {answers}")


def _harmless(rig: Rig, sequence: int) -> bytes:
    return encode(m.Setup.CODE, sequence, rig.same.encode_body())


@clause(3, "", "an empty stretch is nothing")
def empty(rig: Rig) -> None:
    rig.fresh()
    _counted(rig, bytes(20), 0, "twenty delimiters")


@clause(3, "", "a frame with a wrong CRC is counted once and dropped without an answer")
def wrong_crc(rig: Rig) -> None:
    rig.fresh()
    inside = bytes((m.Disarm.CODE, (rig.sequence + 1) & 0xFF))
    for crc in (crc_hqx(inside, 0xFFFF) ^ 1, crc_hqx(inside, 0)):
        _counted(rig, cobs_encode(inside + crc.to_bytes(2, "big")) + b"\0", 1, f"CRC {crc:#06x}")
    little = crc_hqx(inside, 0xFFFF).to_bytes(2, "little")
    _counted(rig, cobs_encode(inside + little) + b"\0", 1, "a CRC with its low byte first")


@clause(3, "", "what is no COBS, or shorter than 4 bytes, is bad")
def no_cobs(rig: Rig) -> None:
    rig.fresh()
    _counted(rig, b"\x09\x01\x02\0", 1, "a block that runs off the end")
    due = (rig.sequence + 1) & 0xFF
    encoded, last = bytearray(_harmless(rig, due)[:-1]), 0
    while last + encoded[last] < len(encoded):
        last += encoded[last]
    encoded[last] += 1  # one byte more than there is; what is there would make a good frame
    _counted(rig, bytes(encoded) + b"\0", 1, "a last block that wants one byte more")
    _counted(rig, cobs_encode(b"") + b"\0", 1, "an empty frame")
    short = bytes((m.Disarm.CODE,))
    _counted(rig, cobs_encode(short + crc_hqx(short, 0xFFFF).to_bytes(2, "big")) + b"\0", 1, "three bytes")


@clause(3, "", "a stretch of more than 65 bytes is bad, and is counted once however long it is")
def overlong(rig: Rig) -> None:
    rig.fresh()
    _counted(rig, b"\x01" * (ENCODED_LIMIT + 1) + b"\0", 1, "66 bytes")
    inside = bytes((0x20, (rig.sequence + 1) & 0xFF)) + b"\x55" * 61
    whole = cobs_encode(inside + crc_hqx(inside, 0xFFFF).to_bytes(2, "big"))
    must(len(whole) == ENCODED_LIMIT + 1, "the kit's frame is not 66 bytes long")
    _counted(rig, whole + b"\0", 1, "a frame of 66 bytes, good but for its length")
    _counted(rig, b"\x01" * 300 + b"\0", 1, "300 bytes")
    beat = encode(m.Beat.CODE, 0, b"")
    _counted(rig, b"\x01" * 61 + beat, 1, "a Beat at the end of a stretch that is too long")


@clause(3, "", "a known code with another length than that of its message is bad")
def wrong_length(rig: Rig) -> None:
    rig.fresh()
    due = (rig.sequence + 1) & 0xFF
    _counted(rig, encode(m.Measure.CODE, due, bytes(5)), 1, "Measure with 5 bytes")
    _counted(rig, encode(m.Hold.CODE, due, b"\x01"), 1, "Hold with a byte")
    epoch = rig.fresh_status().epoch
    rig.raw(encode(m.Hold.CODE, due, b"\x01"))
    rig.listen(0.1)
    must(rig.fresh_status().epoch == epoch, "a Hold of a wrong length was executed")


@clause(3, "", "a good frame is heard behind junk, byte by byte, and with others in one piece")
def good_frames(rig: Rig) -> None:
    rig.fresh()
    due = (rig.sequence + 1) & 0xFF
    must(rig.again(b"\xaa\x55\x99\0" + _harmless(rig, due), due) is not None, "no answer behind junk")
    due = (due + 1) & 0xFF
    for byte in _harmless(rig, due)[:-1]:
        rig.raw(bytes((byte,)))
        rig.listen(0.004)
    must(rig.again(b"\0", due) is not None, "no answer to a frame that came byte by byte")
    after = (due + 1) & 0xFF
    begun = rig.mark()
    hold = encode(m.Hold.CODE, 0, b"")
    must(rig.again(_harmless(rig, after) + hold + hold, after) is not None, "no answer to three in one piece")
    rig.listen(0.1)
    must(not list(rig.since(begun, m.Refused)), "one of three in one piece was refused")
    rig.sequence = after


@clause(3, "", "every frame from the board is good, of the length of its message")
def from_the_board(rig: Rig) -> str:
    rig.fresh()
    bad = rig.reader.bad
    begun = rig.mark()
    for _ in range(20):
        rig.accept(rig.same)
    rig.listen(1.0)
    must(rig.reader.bad == bad, f"{rig.reader.bad - bad} stretches from the board were no good frames")
    return f"{rig.mark() - begun} frames"
