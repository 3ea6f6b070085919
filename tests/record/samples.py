"""A small coil's facts, made by hand, for tests of the record."""

from __future__ import annotations

import struct
from dataclasses import replace

from windctl.plan.pace import PaceSpec
from windctl.plan.prior import Prior
from windctl.protocol.messages import (
    Capability,
    Cause,
    Identity,
    InputBit,
    Reading,
    ReadingFlag,
    Setup,
    Status,
    Trust,
)
from windctl.protocol.messages import State as BoardState
from windctl.record.events import CoilStarted, Target
from windctl.record.fold import setup_crc
from windctl.record.program import stored

CPT = 400
NONE = 0xFFFF_FFFF
PACKED = struct.pack("<Hh", 400, 40) * 2000
PROGRAM_ID = 0xC0FFEE01

PRIOR = Prior(
    ohm_per_turn=0.65,
    growth=2.0e-5,
    var_ohm_per_turn=(0.65 * 0.04) ** 2,
    var_growth=(2.0e-5 * 0.12) ** 2,
    cov=0.65 * 2.0e-5 * 0.04**2,
    growth_walk_rel=0.05,
    turns=1500.0,
    offset_ohm=0.5,
    offset_sd=0.3,
    gain_sd=0.003,
    celsius_sd=0.5,
    coil_over_air_k=0.7,
    coil_over_air_sd=0.7,
    noise_rel=0.001,
    floor_ohm=0.2,
    contact_length_ohm=0.8,
)

SETUP = Setup(
    coil_token=77,
    counts_per_turn=CPT,
    steps_per_turn=CPT,
    max_count=2000 * CPT,
    max_pace=7000,
    accel=2000,
    decel=3333,
    guide_min=-100,
    guide_max=3000,
    slip_counts=20,
    reverse_counts=20,
    tension_low=0,
    tension_high=65535,
    fitted=int(Capability.DRIVE_STEP | Capability.GUIDE_STEP | Capability.CONTACT),
    rotation=0,
)


def started(kind: str = "dcr_20c_ohm", value: float = 1000.0, readings_mode: str = "live") -> CoilStarted:
    """The first fact of a coil of at most 2000 turns."""
    return CoilStarted(
        coil_id="0b5b2a52-0000-4000-8000-000000000001",
        number="b1-2026-0001",
        wall_time="2026-03-02T10:00:00+01:00",
        operator="bench one",
        version="0.1.0",
        recipe_name="demo coil",
        recipe_text='format = 1\nname = "demo coil"\n',
        recipe_digest="ab" * 32,
        profile_json="{}",
        machine="virtual, plant seed 7",
        readings_mode=readings_mode,
        program_digest="c0ffee01" + "00" * 28,
        program_id=PROGRAM_ID,
        program_packed=stored(PACKED),
        total_counts=2000 * CPT,
        setup=SETUP,
        pace=PaceSpec(
            start_pace=400, start_counts=4000, cruise_pace=6667, finish_pace=667, finish_counts=12000
        ),
        prior=PRIOR,
        target=Target(kind, value, 2.0, 1, 2000),
        planned_turns=1480.0,
        spool="",
        batch="",
        of=0,
    )


def identity(**changes: int) -> Identity:
    """A board that has this coil in hand, drives powered, standing at the start."""
    whole = Identity(
        nonce=1,
        schema=0,
        boot=5,
        epoch=10,
        state=BoardState.HELD,
        trip=0,
        trust=int(Trust.COUNT | Trust.GUIDE),
        capabilities=0xFF,
        queue=128,
        coil_token=SETUP.coil_token,
        setup_crc=setup_crc(started()),
        program=PROGRAM_ID,
        base=0,
        next=64,
        executing=0,
        program_crc=0,
        count=0,
        guide=0,
        contact_scale=305,
        tension_scale=100,
    )
    return replace(whole, **changes)


def status(ticks: int, **changes: int) -> Status:
    """A board standing with drives off."""
    whole = Status(
        ticks=ticks,
        boot=5,
        epoch=10,
        state=BoardState.DRIVES_OFF,
        cause=Cause.BOOT,
        trip=0,
        trust=3,
        inputs=int(InputBit.STOP_OK | InputBit.GUARD_OK | InputBit.STANDING),
        count=0,
        guide=0,
        stop_point=NONE,
        next=0,
        executing=0,
        program_crc=0,
        speed=0,
        tension=0,
        celsius=2150,
        bad_frames=0,
    )
    return replace(whole, **changes)


def reading(ticks: int, turn: float, ohm: float, *, resting: bool = False, celsius: float = 20.0) -> Reading:
    """What the board measures of `ohm` at `turn`."""
    return Reading(
        ticks=ticks,
        count=round(turn * CPT),
        value=round(ohm * 16_000 / 305),
        window=200,
        celsius=round(celsius * 100),
        flags=0 if resting else int(ReadingFlag.TURNING),
    )
