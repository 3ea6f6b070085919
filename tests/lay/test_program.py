"""A program as inert data: its wire form, digest, and where a count lies in it."""

from __future__ import annotations

import hashlib
import struct

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from windctl.lay.program import Program

segments = st.lists(
    st.integers(1, 65_535).flatmap(
        lambda counts: st.tuples(st.just(counts), st.integers(-min(counts, 32_767), min(counts, 32_767)))
    ),
    min_size=1,
    max_size=30,
)


def made(pairs: list[tuple[int, int]]) -> Program:
    counts, guide = zip(*pairs, strict=True)
    return Program(np.array(counts, dtype=np.uint16), np.array(guide, dtype=np.int16), 400, 200.0)


@given(segments)
def test_the_wire_form_is_plain_and_complete(pairs: list[tuple[int, int]]) -> None:
    program = made(pairs)
    packed = program.packed()
    assert packed == b"".join(struct.pack("<Hh", *pair) for pair in pairs)
    again = Program.from_packed(packed, counts_per_turn=400, steps_per_mm=200.0)
    assert again.digest == program.digest
    assert again.total_counts == sum(counts for counts, _ in pairs)


def test_the_digest_covers_header_and_segments() -> None:
    lines = (
        "windctl program 1",
        "counts_per_turn 400",
        "steps_per_mm 200.0",
        "start_guide 0",
        "backlash_steps 0",
        "segments 2",
    )
    header = "".join(f"{line}\n" for line in lines).encode()
    program = made([(400, 16), (300, -12)])
    assert program.digest == hashlib.sha256(header + bytes.fromhex("90011000 2c01f4ff")).hexdigest()
    assert program.id32 == int.from_bytes(bytes.fromhex(program.digest)[:4], "big")
    others = [
        Program(program.counts, program.guide, 200, 200.0),
        Program(program.counts, program.guide, 400, 100),
        Program(program.counts, program.guide, 400, 200.0, backlash_steps=1),
    ]
    assert len({program.digest, *(other.digest for other in others)}) == 4


@given(segments, st.integers(-10, 2**21))
def test_a_count_lies_where_the_board_s_line_puts_it(pairs: list[tuple[int, int]], count: int) -> None:
    program = made(pairs)
    place = program.place_of(count)
    left, guide = max(count, 0), 0
    for index, (counts, steps) in enumerate(pairs):
        if left < counts:
            way = (left * abs(steps) + counts // 2) // counts
            assert place == type(place)(index, left, guide + (way if steps >= 0 else -way))
            break
        left -= counts
        guide += steps
    else:
        assert place == type(place)(len(pairs), 0, guide)


@pytest.mark.parametrize(
    ("pairs", "why"),
    [([(0, 0)], "at least one count"), ([(5, 6)], "guide steps"), ([(5, -6)], "guide steps")],
)
def test_what_no_board_takes_is_no_program(pairs: list[tuple[int, int]], why: str) -> None:
    with pytest.raises(ValueError, match=why):
        made(pairs)


def test_half_a_segment_is_no_program() -> None:
    with pytest.raises(ValueError, match="whole segments"):
        Program.from_packed(b"\x01\x00\x00", counts_per_turn=1, steps_per_mm=200.0)


def test_a_program_cannot_be_changed() -> None:
    program = made([(400, 16)])
    with pytest.raises(ValueError, match="read-only"):
        program.counts[0] = 1
