"""The generator against its published known answers."""

from __future__ import annotations

import numpy as np
import pytest

from windctl.lay.philox import philox4x32, words


# Known-answer vectors published with Salmon, Moraes, Dror, Shaw, "Parallel random numbers: as easy as 1,
# 2, 3" (2011): counters and keys of zeros, of ones, and of the digits of pi.
@pytest.mark.parametrize(
    ("counter", "key", "answer"),
    [
        ("00000000 00000000 00000000 00000000", "00000000 00000000", "6627e8d5 e169c58d bc57ac4c 9b00dbd8"),
        ("ffffffff ffffffff ffffffff ffffffff", "ffffffff ffffffff", "408f276d 41c83b0e a20bc7c6 6d5451fd"),
        ("243f6a88 85a308d3 13198a2e 03707344", "a4093822 299f31d0", "d16cfe09 94fdcceb 5001e420 24126ea1"),
    ],
)
def test_published_known_answers(counter: str, key: str, answer: str) -> None:
    c = [np.array([int(word, 16)], dtype=np.uint64) for word in counter.split()]
    k0, k1 = (int(word, 16) for word in key.split())
    drawn = philox4x32((c[0], c[1], c[2], c[3]), (k0, k1))
    assert [f"{int(word[0]):08x}" for word in drawn] == answer.split()


def test_the_number_alone_decides_not_how_many_are_drawn() -> None:
    many = words(99, 1, 0, 40_000)
    assert (words(99, 1, 0, 5) == many[:, :5]).all()
    assert (words(99, 1, 39_990, 10) == many[:, 39_990:]).all()


def test_numbers_past_32_bits_use_the_counter_s_second_word() -> None:
    (first,) = (words(0, 7, 2**32 + 5, 1),)
    counter = [np.array([value], dtype=np.uint64) for value in (5, 1, 7, 0)]
    assert first[:, 0].tolist() == [
        int(word[0]) for word in philox4x32((counter[0], counter[1], counter[2], counter[3]), (0, 0))
    ]


def test_seed_and_stream_matter() -> None:
    drawn = {words(seed, stream, 0, 1)[0, 0] for seed in (0, 1, 2**32, 2**63 - 1) for stream in (0, 1, 2)}
    assert len(drawn) == 12
