"""What the board says of itself."""

from __future__ import annotations

from typing import TYPE_CHECKING

from windctl.protocol.messages import (
    SCHEMA,
    Capability,
    Identity,
    InputBit,
    Reading,
    ReadingFlag,
    Status,
)

if TYPE_CHECKING:
    from windctl.machine.twin.board import Board


def identity(board: Board, nonce: int) -> Identity:
    """The answer to a Greet."""
    line = board.line
    return Identity(
        nonce=nonce,
        schema=SCHEMA,
        boot=board.boot,
        epoch=board.epoch,
        state=board.state,
        trip=board.trip,
        trust=board.trust,
        capabilities=board.capabilities,
        queue=board.queue,
        coil_token=board.setup.coil_token if board.setup else 0,
        setup_crc=board.setup_crc,
        program=line.program,
        base=line.base,
        next=line.next,
        executing=line.executing,
        program_crc=line.crc,
        count=board.count,
        guide=board.guide,
        contact_scale=board.contact_scale,
        tension_scale=board.tension_scale,
    )


def status(board: Board, celsius: int) -> Status:
    """How the board stands in this tick."""
    line = board.line
    return Status(
        ticks=board.ticks,
        boot=board.boot,
        epoch=board.epoch,
        state=board.state,
        cause=board.cause,
        trip=board.trip,
        trust=board.trust,
        inputs=board.pins | (InputBit.STANDING if board.standing else 0),
        count=board.count,
        guide=board.guide,
        stop_point=board.stop_point,
        next=line.next,
        executing=line.executing,
        program_crc=line.crc,
        speed=board.spindle.v if board.fitted & Capability.DRIVE_STEP else board.speed,
        tension=board.turns.tension,
        celsius=celsius,
        bad_frames=board.dialogue.reader.bad & 0xFFFF,
    )


def reading(board: Board, celsius: int) -> Reading:
    """The reading that the contact's mean has just completed."""
    mean = board.mean
    flags = (ReadingFlag.TURNING if mean.turned else 0) | (ReadingFlag.OPEN if mean.open else 0)
    return Reading(
        ticks=board.ticks,
        count=mean.middle,
        value=mean.value,
        window=mean.window_ticks,
        celsius=celsius,
        flags=flags,
    )
