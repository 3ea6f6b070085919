"""Files that are nearly good: a good one with bytes, characters, values and lines spoilt; and plain noise."""

from __future__ import annotations

import re

from hypothesis import strategies as st

_NASTY = [
    b"nan", b"-inf", b"1e400", b"-0.0", b"5e-324", b"9" * 30, b"0x7fffffff", b"true", b'""', b"[]", b"{}",
    b"07:32:00", b"1979-05-27", b'"\\u0000"', b"'\x1b[2J'", b'"' + b"x" * 5000 + b'"', b"[[1], {b = []}]",
    b"1_000", b"0.1.2", b"\xef\xbb\xbf", b"\xff", b"\xed\xa0\x80", b"\x00", "\u2028".encode(), b"\r", b"\n",
    b"=", b"[", b"]]", b'"""', b"#", b",", b";", b"a.b.c = 1\n",
]  # fmt: skip


@st.composite
def spoilt(draw: st.DrawFn, good: bytes) -> bytes:
    """`good` after one to five accidents."""
    content = good
    for _ in range(draw(st.integers(1, 5))):
        content = draw(st.sampled_from([_bytes_put_in, _value_changed, _line_moved, _cut_off]))(draw, content)
    return content


def anything(good: bytes) -> st.SearchStrategy[bytes]:
    """What a file may hold: a spoilt good one, text, or any bytes."""
    return (
        spoilt(good)
        | st.binary(max_size=400)
        | st.text(max_size=400).map(lambda text: text.encode("utf-8", "replace"))
    )


def _bytes_put_in(draw: st.DrawFn, content: bytes) -> bytes:
    start = draw(st.integers(0, len(content)))
    end = draw(st.integers(start, min(start + 20, len(content))))
    put_in = draw(st.binary(max_size=6) | st.sampled_from(_NASTY))
    return content[:start] + put_in + content[end:]


def _value_changed(draw: st.DrawFn, content: bytes) -> bytes:
    places = [match.span(1) for match in re.finditer(rb"(?m)=[ \t]*([^\n#]+?)[ \t]*(?:#.*)?$", content)]
    if not places:
        return content
    start, end = draw(st.sampled_from(places))
    number = st.integers(-10, 10**7) | st.floats()
    value = draw(number.map(lambda n: repr(n).encode()) | st.sampled_from(_NASTY))
    return content[:start] + value + content[end:]


def _line_moved(draw: st.DrawFn, content: bytes) -> bytes:
    """A line taken out, doubled, or put elsewhere: keys land in other tables."""
    lines = content.split(b"\n")
    line = draw(st.sampled_from(lines))
    if draw(st.booleans()):
        lines.remove(line)
    lines.insert(draw(st.integers(0, len(lines))), line if draw(st.booleans()) else b"")
    return b"\n".join(lines)


def _cut_off(draw: st.DrawFn, content: bytes) -> bytes:
    return content[: draw(st.integers(0, len(content)))]
