"""The generated codec against the golden frames and against itself."""

from __future__ import annotations

import dataclasses
import json
import struct
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from windctl.protocol import messages
from windctl.protocol.frames import FrameReader, encode
from windctl.protocol.messages import MESSAGES, BadMessageError, Lay, Message, decode

VECTORS = json.loads(
    (Path(__file__).parents[2] / "firmware_protocol" / "vectors.json").read_text(encoding="utf-8")
)
GOLDEN = [pytest.param(v, id=f"{v['message']}-{v['sequence']}") for v in VECTORS["frames"]]


def golden_message(vector: dict[str, Any]) -> Message:
    values = {k: bytes.fromhex(v) if isinstance(v, str) else v for k, v in vector["fields"].items()}
    return MESSAGES[vector["code"]](**values)


@pytest.mark.parametrize("vector", GOLDEN)
def test_every_golden_frame_is_written_and_read(vector: dict[str, Any]) -> None:
    message = golden_message(vector)
    wire = bytes.fromhex(vector["frame"])
    assert encode(message.CODE, vector["sequence"], message.encode_body()) == wire
    [frame] = FrameReader().feed(wire)
    assert frame.sequence == vector["sequence"]
    assert decode(frame.code, frame.body) == message


def test_every_message_has_golden_frames_and_both_sides_know_one_schema() -> None:
    assert {v["message"] for v in VECTORS["frames"]} == {kind.NAME for kind in MESSAGES.values()}
    assert VECTORS["schema"] == messages.SCHEMA


@given(st.data())
def test_any_body_of_the_right_length_survives_the_round_trip(data: st.DataObject) -> None:
    kind = data.draw(st.sampled_from(sorted(MESSAGES.values(), key=lambda k: k.CODE)))
    body = data.draw(st.binary(min_size=kind.SIZE, max_size=kind.SIZE))
    message = decode(kind.CODE, body)
    assert isinstance(message, kind)
    assert message.encode_body() == body


@pytest.mark.parametrize("code", sorted(MESSAGES))
def test_a_body_of_another_length_is_refused_by_name(code: int) -> None:
    kind = MESSAGES[code]
    with pytest.raises(BadMessageError, match=f"{kind.NAME} has {kind.SIZE + 1} bytes, wants {kind.SIZE}"):
        decode(code, bytes(kind.SIZE + 1))


def test_an_unknown_code_is_refused() -> None:
    with pytest.raises(BadMessageError, match="0x7f"):
        decode(0x7F, b"")


def test_a_value_outside_its_type_cannot_be_encoded() -> None:
    with pytest.raises(struct.error):
        messages.Pace(boot=0, epoch=0, pace=65536).encode_body()


def test_messages_are_frozen_and_segments_are_packed_bytes() -> None:
    packed = struct.pack("<HhHh", 100, -3, 200, 7) + bytes(40)
    lay = decode(Lay.CODE, Lay(program=1, first=2, n=2, segments=packed).encode_body())
    assert isinstance(lay, Lay)
    assert lay.segments == packed
    with pytest.raises(dataclasses.FrozenInstanceError):
        lay.n = 3  # type: ignore[misc]  # the point of the test


def test_whatever_moves_names_the_boot_and_epoch_it_was_meant_for() -> None:
    moving = {kind.NAME for kind in MESSAGES.values() if getattr(kind, "MOVES", False)}
    assert moving == {"Arm", "Pace", "StopAt", "Go", "GuideTo", "SetDatum", "ClearTrip"}
    for kind in MESSAGES.values():
        if kind.NAME in moving:
            assert [field.name for field in dataclasses.fields(kind)][:2] == ["boot", "epoch"]
