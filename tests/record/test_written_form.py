"""Facts survive being written: canonical form, chunks, chain, trace."""

from __future__ import annotations

import dataclasses
import hashlib
import json
import zlib

import pytest
from hypothesis import given
from hypothesis import strategies as st

from tests.record import samples
from windctl.errors import RecordBroken
from windctl.protocol.messages import Reading, Status
from windctl.record.canonical import decode, encode
from windctl.record.chain import genesis, link
from windctl.record.entries import CHUNK, CHUNK_TICKS, FORMS, NEWEST, Entry, Packer, unpack
from windctl.record.events import (
    BoardGreeted,
    Event,
    GoGiven,
    HoldRequested,
    NoteMade,
    ReadingTaken,
    StatusHeard,
    StopPointChosen,
)
from windctl.record.program import stored, unpacked
from windctl.record.trace import trace_digest

u8, u16, u32 = (st.integers(0, 2**bits - 1) for bits in (8, 16, 32))
i16, i32 = (st.integers(-(2 ** (bits - 1)), 2 ** (bits - 1) - 1) for bits in (16, 32))
ms = st.integers(0, 2**40)

_SIGNED = {"count": i32, "guide": i32, "celsius": i16}
statuses = st.builds(Status, **{f.name: _SIGNED.get(f.name, u32) for f in dataclasses.fields(Status)})
readings = st.builds(Reading, **{f.name: _SIGNED.get(f.name, u32) for f in dataclasses.fields(Reading)})
dense = st.one_of(st.builds(StatusHeard, ms, statuses), st.builds(ReadingTaken, ms, readings))
rare = st.one_of(
    st.builds(NoteMade, ms, st.text(), st.text()),
    st.builds(HoldRequested, ms, st.text(), st.text()),
    st.builds(GoGiven, ms, u16, u16, st.sampled_from(["operator", "pedal", "virtual", "consent"])),
    st.builds(
        StopPointChosen,
        ms,
        u32,
        st.text(),
        st.floats(allow_nan=False, allow_infinity=False),
        st.floats(allow_nan=False, allow_infinity=False),
    ),
)
streams = st.lists(st.one_of(dense, dense, dense, rare), max_size=60)


@given(rare)
def test_an_event_reads_back_as_it_was_written(event: Event) -> None:
    written = encode(event)
    assert decode(event.kind, written) == event
    assert encode(decode(event.kind, written)) == written
    assert json.loads(written)  # plain JSON, readable without this program


def test_the_first_fact_reads_back_with_all_its_parts() -> None:
    first = samples.started()
    assert decode(first.kind, encode(first)) == first
    greeted = BoardGreeted(3, samples.identity())
    assert decode(greeted.kind, encode(greeted)) == greeted


def test_numbers_that_are_none_are_never_written() -> None:
    with pytest.raises(ValueError, match="not JSON compliant"):
        encode(StopPointChosen(0, 1, "", float("nan"), 0.0))


@pytest.mark.parametrize(
    "payload", [b"", b"{", b"[]", b'{"at_ms":1}', b'{"at_ms":1,"text":"a","by":"b","x":1}']
)
def test_what_is_no_event_is_called_broken(payload: bytes) -> None:
    with pytest.raises(RecordBroken):
        decode("note_made", payload)
    with pytest.raises(RecordBroken):
        decode("no_such_kind", b"{}")


@given(streams)
def test_chunks_keep_every_event_and_their_order(events: list[Event]) -> None:
    packer = Packer()
    entries = [*packer.add(events), *packer.flush()]
    assert list(unpack(entries)) == events
    assert sum(entry.events for entry in entries) == len(events)


@given(streams, st.data())
def test_chunks_are_cut_by_facts_and_not_by_how_they_arrive(events: list[Event], data: st.DataObject) -> None:
    whole = Packer()
    at_once = [*whole.add(events), *whole.flush()]
    piecewise, packer, rest = [], Packer(), list(events)
    while rest:
        n = data.draw(st.integers(1, len(rest)))
        piecewise += packer.add(rest[:n])
        rest = rest[n:]
    assert [*piecewise, *packer.flush()] == at_once


def test_a_chunk_is_complete_after_half_a_second_of_the_boards_clock() -> None:
    packer = Packer()
    events: list[Event] = [StatusHeard(t, samples.status(t)) for t in range(0, 2000, 50)]
    entries = packer.add(events)
    assert [entry.events for entry in entries] == [CHUNK_TICKS // 50] * 3
    assert all(entry.kind == CHUNK for entry in entries)


def test_the_newest_form_of_a_chunk_holds_every_field_of_the_messages() -> None:
    assert FORMS[NEWEST].status == tuple(f.name for f in dataclasses.fields(Status))
    assert FORMS[NEWEST].reading == tuple(f.name for f in dataclasses.fields(Reading))


def test_a_chunk_of_form_1_reads_for_ever() -> None:
    # Written once by hand: one status (all ones), one reading (all twos), at 5 and 6 ms.
    packed = zlib.compress(b"1 sr\n" + bytes([10] + [2] * 18 + [12] + [4] * 6))
    assert list(unpack([Entry(CHUNK, packed, 2)])) == [
        StatusHeard(5, Status(*[1] * 18)),
        ReadingTaken(6, Reading(*[2] * 6)),
    ]


def test_a_chunk_is_far_smaller_than_its_events() -> None:
    events: list[Event] = [StatusHeard(t, samples.status(t, count=t * 6)) for t in range(0, 500, 50)]
    packed = Packer()
    packed.add(events)
    (entry,) = packed.flush()
    assert len(entry.payload) < len(b"".join(encode(event) for event in events)) / 4


@given(st.binary(max_size=200))
def test_damaged_chunks_are_called_broken(payload: bytes) -> None:
    with pytest.raises(RecordBroken):
        list(unpack([Entry(CHUNK, payload, 1)]))


@given(st.data())
def test_a_changed_byte_in_a_chunk_never_passes_for_the_same_events(data: st.DataObject) -> None:
    events: list[Event] = [StatusHeard(t, samples.status(t, count=t * 6)) for t in range(0, 500, 50)]
    packer = Packer()
    packer.add(events)
    (entry,) = packer.flush()
    at = data.draw(st.integers(0, len(entry.payload) - 1))
    flipped = bytearray(entry.payload)
    flipped[at] ^= data.draw(st.integers(1, 255))
    before = link(genesis("x"), CHUNK, entry.payload)
    assert link(genesis("x"), CHUNK, bytes(flipped)) != before


def test_the_chain_is_sha256_over_what_it_says() -> None:
    # FIPS 180-4 through the standard library, spelled out here a second time
    first = hashlib.sha256(b"windctl coil 1\0some-id").digest()
    assert genesis("some-id") == first
    assert link(first, "ab", b"payload") == hashlib.sha256(first + b"\x00\x02ab" + b"payload").digest()
    assert link(first, "a", b"bpayload") != link(first, "ab", b"payload")


@given(st.binary(max_size=400))
def test_a_program_is_stored_as_it_is(packed: bytes) -> None:
    assert unpacked(stored(packed)) == packed


def test_a_text_that_is_no_program_is_called_broken() -> None:
    with pytest.raises(RecordBroken):
        unpacked("not a program")


def traced(*events: Event) -> str:
    packer = Packer()
    return trace_digest([*packer.add(events), *packer.flush()])


def test_the_trace_leaves_out_who_and_when_and_nothing_else() -> None:
    first = samples.started()
    other = dataclasses.replace(
        first, coil_id="other", number="b1-2027-0002", wall_time="later", operator="somebody", batch="b", of=3
    )
    assert traced(other) == traced(first)
    assert traced(dataclasses.replace(first, planned_turns=1481.0)) != traced(first)
    status = StatusHeard(50, samples.status(50))
    assert traced(first, status) != traced(first, StatusHeard(51, samples.status(50)))
    assert traced(first, NoteMade(1, "a", "b")) == traced(first, NoteMade(1, "a", "b"))
    assert traced(first, NoteMade(1, "a", "b")) != traced(first, NoteMade(1, "a", "c"))


def test_the_trace_is_of_what_is_stored_and_not_of_how_it_is_packed_or_read() -> None:
    packer = Packer()
    packer.add([StatusHeard(t, samples.status(t)) for t in range(0, 500, 50)])
    (chunk,) = packer.flush()
    loosely = Entry(CHUNK, zlib.compress(zlib.decompress(chunk.payload), 1), chunk.events)
    assert loosely.payload != chunk.payload
    assert trace_digest([loosely]) == trace_digest([chunk])
    # As a later version may write it: a field that this version does not know is part of it as well.
    assert trace_digest([Entry("note_made", b'{"later":1}', 1)]) != trace_digest(
        [Entry("note_made", b"{}", 1)]
    )


def test_the_trace_of_what_is_no_fact_is_refused() -> None:
    for payload in (b"", b"[1]", b"\xff"):
        with pytest.raises(RecordBroken):
            trace_digest([Entry("note_made", payload, 1)])
    with pytest.raises(RecordBroken):
        trace_digest([Entry(CHUNK, b"no chunk", 1)])
