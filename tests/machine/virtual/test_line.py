"""The simulated serial line takes the time a real one takes."""

from __future__ import annotations

from hypothesis import given
from hypothesis import strategies as st

from windctl.machine.virtual.line import SerialLine, Way


def arrivals(way: Way, ticks: int) -> list[tuple[int, bytes]]:
    return [(tick, data) for tick in range(1, ticks + 1) if (data := way.pull(tick))]


def test_a_thousand_bytes_take_as_long_as_their_bits() -> None:
    """115200 bit/s, ten bits a byte: 11.52 bytes a millisecond, so 1000 bytes take 86.8 ms."""
    way = Way(115_200, 0, whole=False)
    way.put(bytes(1000))
    came = arrivals(way, 200)
    assert came[-1][0] == 87
    assert max(len(data) for _, data in came) <= 12


def test_a_slower_line_takes_longer() -> None:
    way = Way(9600, 0, whole=False)
    way.put(bytes(96))
    assert arrivals(way, 200)[-1][0] == 100


def test_an_idle_line_saves_no_time_up() -> None:
    way = Way(115_200, 0, whole=False)
    way.put(b"x")
    arrivals(way, 1000)
    way.put(bytes(115))
    assert arrivals(way, 200)[-1][0] == 10


def test_latency_delays_and_neither_loses_nor_reorders() -> None:
    way = Way(115_200, 16, whole=False)
    way.put(b"first, ")
    way.put(b"second")
    came = arrivals(way, 100)
    assert came[0][0] == 17
    assert b"".join(data for _, data in came) == b"first, second"
    assert not way.busy


def test_an_adapter_hands_a_short_frame_over_whole() -> None:
    way = Way(115_200, 0, whole=True)
    way.put(bytes(50))
    assert arrivals(way, 100) == [(5, bytes(50))]


def test_an_adapter_does_not_wait_for_a_pause_that_never_comes() -> None:
    way = Way(115_200, 0, whole=True)
    way.put(bytes(500))
    came = arrivals(way, 100)
    assert came[0][0] <= 6
    assert came[-1][0] == 44
    assert sum(len(data) for _, data in came) == 500


@given(st.lists(st.binary(min_size=1, max_size=80), max_size=12), st.integers(0, 20), st.booleans())
def test_every_byte_arrives_once_and_in_order(bursts: list[bytes], latency: int, whole: bool) -> None:
    way = Way(115_200, latency, whole=whole)
    came, tick = b"", 0
    for burst in bursts:
        way.put(burst)
        for _ in range(3):
            tick += 1
            came += way.pull(tick)
    while way.busy:
        tick += 1
        came += way.pull(tick)
    assert came == b"".join(bursts)


def test_a_cut_line_loses_what_is_on_it() -> None:
    line = SerialLine(latency_ticks=5)
    line.to_board.put(b"abc")
    line.to_host.put(b"def")
    line.to_board.pull(1)
    line.clear()
    assert arrivals(line.to_board, 50) == arrivals(line.to_host, 50) == []
