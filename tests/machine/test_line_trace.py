"""The last bytes of a line, kept, written and spelt out."""

from __future__ import annotations

import os
import tty
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from windctl.machine.line_trace import FROM_BOARD, TO_BOARD, LineTrace, pieces_of, spelt_out
from windctl.machine.serial_port import SerialPort
from windctl.protocol import messages as m
from windctl.protocol.frames import encode

pieces = st.lists(
    st.tuples(
        st.floats(0, 1e6).map(lambda s: round(s, 4)),
        st.sampled_from([FROM_BOARD, TO_BOARD]),
        st.binary(min_size=1, max_size=40),
    ),
    max_size=20,
)


@given(pieces)
def test_what_is_written_reads_back(kept: list[tuple[float, str, bytes]]) -> None:
    trace = LineTrace()
    for at, way, data in kept:
        trace.add(at, way, data)
    begun = kept[0][0] if kept else 0.0
    back = list(pieces_of("# a comment\n\n" + trace.text()))
    assert [(way, data) for _, way, data in back] == [(way, data) for _, way, data in kept]
    assert [at for at, _, _ in back] == pytest.approx([at - begun for at, _, _ in kept], abs=1e-4)


@given(st.text(max_size=200))
def test_any_text_is_read_without_complaint(text: str) -> None:
    spelt_out(text)


def test_the_oldest_is_forgotten() -> None:
    trace = LineTrace(pieces=3)
    for second in range(5):
        trace.add(float(second), TO_BOARD, bytes([second]))
    assert trace.text() == "0.0000 > 02\n1.0000 > 03\n2.0000 > 04\n"


def test_frames_are_spelt_out_also_when_they_come_in_pieces_and_what_is_none_is_counted() -> None:
    hold, greet = m.Hold(), m.Greet(nonce=7, schema=m.SCHEMA)
    frame = encode(greet.CODE, 5, greet.encode_body())
    trace = LineTrace()
    trace.add(1.0, TO_BOARD, frame[:4])
    trace.add(1.5, FROM_BOARD, b"\x05junk\0")
    trace.add(2.0, TO_BOARD, frame[4:] + encode(hold.CODE, 0, hold.encode_body()))
    trace.add(2.5, TO_BOARD, encode(0x55, 1, b"?"))
    lines = spelt_out(trace.text()).splitlines()
    assert lines == [
        "0.5000 < 1 bad frames",
        f"1.0000 > #5 {greet!r}",
        f"1.0000 > #0 {hold!r}",
        "1.5000 > #1 message code 0x55 is not known to protocol 1",
    ]


def test_a_serial_port_keeps_what_went_over_it(tmp_path: Path) -> None:
    pty = pytest.importorskip("pty", reason="platform: pseudo-terminals are of POSIX")
    far, near = pty.openpty()
    tty.setraw(near)
    trace = LineTrace()
    port = SerialPort(os.ttyname(near), lock_folder=tmp_path, trace=trace)
    try:
        port.write(b"\x01ask")
        os.write(far, b"answer")
        got = b""
        while len(got) < 6:
            got += port.read(0.5)
    finally:
        port.close()
        os.close(far)
        os.close(near)
    kept = list(pieces_of(trace.text()))
    assert kept[0].way == TO_BOARD
    assert kept[0].data == b"\x01ask"
    assert b"".join(piece.data for piece in kept if piece.way == FROM_BOARD) == b"answer"
