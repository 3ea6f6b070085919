"""Frames, against published COBS and CRC figures and every way bytes can arrive."""

from __future__ import annotations

from binascii import crc_hqx
from itertools import pairwise

import pytest
from cobs.cobs import encode as cobs_encode
from hypothesis import given
from hypothesis import strategies as st

from windctl.protocol.frames import CRC_START, ENCODED_LIMIT, Frame, FrameReader, encode
from windctl.protocol.messages import BODY_LIMIT, MESSAGES, Beat, Greet, Status

UNKNOWN_CODES = [code for code in range(256) if code not in MESSAGES]


@st.composite
def frames(draw: st.DrawFn) -> Frame:
    code = draw(st.sampled_from(sorted(MESSAGES) + UNKNOWN_CODES[:20]))
    size = MESSAGES[code].SIZE if code in MESSAGES else draw(st.integers(0, BODY_LIMIT))
    return Frame(code, draw(st.integers(0, 255)), draw(st.binary(min_size=size, max_size=size)))


def on_the_line(sent: list[Frame]) -> bytes:
    return b"".join(encode(*frame) for frame in sent)


@pytest.mark.parametrize(
    ("data", "encoded"),
    [  # Cheshire and Baker 1999, Consistent Overhead Byte Stuffing: the paper's packet and its small cases
        ("", "01"),
        ("00", "0101"),
        ("11220033", "0311220233"),
        ("4500002C4C79000040064F37", "024501042C4C79010540064F37"),
    ],
)
def test_the_cobs_library_encodes_the_published_examples(data: str, encoded: str) -> None:
    assert cobs_encode(bytes.fromhex(data)).hex() == encoded.lower()


def test_the_crc_has_the_published_check_value_and_leaves_no_residual() -> None:
    # CRC-16/IBM-3740 in the catalogue of parametrised CRC algorithms: check 0x29B1
    assert crc_hqx(b"123456789", CRC_START) == 0x29B1
    assert crc_hqx(b"123456789\x29\xb1", CRC_START) == 0


def test_a_frame_holds_no_zero_but_its_delimiter() -> None:
    wire = encode(Greet.CODE, 0, Greet(nonce=0, schema=0).encode_body())
    assert wire.index(0) == len(wire) - 1


@given(st.lists(frames(), max_size=6))
def test_frames_come_back_whole_and_byte_by_byte(sent: list[Frame]) -> None:
    wire = on_the_line(sent)
    whole, single = FrameReader(), FrameReader()
    assert whole.feed(wire) == sent
    assert [f for byte in wire for f in single.feed(bytes([byte]))] == sent
    assert whole.bad == single.bad == 0


@given(st.binary(max_size=200), st.lists(frames(), min_size=1, max_size=4))
def test_after_a_delimiter_whatever_came_before_is_forgotten(junk: bytes, sent: list[Frame]) -> None:
    got = FrameReader().feed(junk + b"\0" + on_the_line(sent))
    assert got[-len(sent) :] == sent


@given(st.binary(max_size=400), st.lists(st.integers(0, 400), max_size=8))
def test_how_bytes_are_portioned_changes_nothing(data: bytes, cuts: list[int]) -> None:
    whole, portioned = FrameReader(), FrameReader()
    edges = [0, *sorted(cuts), len(data)]
    got = [f for a, b in pairwise(edges) for f in portioned.feed(data[a:b])]
    assert got == whole.feed(data)
    assert portioned.bad == whole.bad


@given(frames(), st.data())
def test_a_frame_with_up_to_three_flipped_bits_is_never_taken_for_another(
    frame: Frame, data: st.DataObject
) -> None:
    # Polynomial 0x1021 keeps Hamming distance 4 at this length. Only bits that leave the COBS structure alone
    # stay that few after decoding, so the flips are made inside the frame and COBS is applied afterwards.
    inside = bytes((frame.code, frame.sequence)) + frame.body
    inside += crc_hqx(inside, CRC_START).to_bytes(2, "big")
    flips = data.draw(st.sets(st.integers(0, 8 * len(inside) - 1), min_size=1, max_size=3))
    damaged = bytearray(inside)
    for bit in flips:
        damaged[bit // 8] ^= 1 << bit % 8
    reader = FrameReader()
    assert reader.feed(cobs_encode(bytes(damaged)) + b"\0") == []
    assert reader.bad == 1


def test_an_overlong_stretch_counts_once_and_the_next_frame_is_read() -> None:
    beat = encode(Beat.CODE, 5, b"")
    for length in (ENCODED_LIMIT + 1, 3 * ENCODED_LIMIT, 5000):
        reader = FrameReader()
        for _ in range(length):
            assert reader.feed(b"\x01") == []
        assert reader.feed(b"\0" + beat) == [Frame(Beat.CODE, 5, b"")]
        assert reader.bad == 1


def test_the_longest_body_fits_and_one_more_byte_is_refused() -> None:
    code = UNKNOWN_CODES[0]
    assert FrameReader().feed(encode(code, 1, b"\xff" * BODY_LIMIT)) == [Frame(code, 1, b"\xff" * BODY_LIMIT)]
    with pytest.raises(ValueError, match="limit 60"):
        encode(code, 1, b"\xff" * (BODY_LIMIT + 1))


def test_empty_stretches_are_nothing() -> None:
    reader = FrameReader()
    assert reader.feed(b"\0\0\0") == []
    assert reader.bad == 0


@pytest.mark.parametrize("size", [0, Status.SIZE - 1, Status.SIZE + 1])
def test_a_known_code_with_another_length_is_bad_although_its_crc_is_good(size: int) -> None:
    reader = FrameReader()
    assert reader.feed(encode(Status.CODE, 0, bytes(size))) == []
    assert reader.bad == 1


@pytest.mark.parametrize("inside", [b"", b"\x01", b"\x01\x02\x03"])
def test_a_frame_too_short_for_its_crc_is_bad(inside: bytes) -> None:
    reader = FrameReader()
    assert reader.feed(cobs_encode(inside) + b"\0") == []
    assert reader.bad == 1
