"""Traces: what a board was given and what it put out, tick by tick; play.c holds another core to them."""

from __future__ import annotations

import struct
from typing import Any

from windctl.machine.twin.board import Board
from windctl.machine.twin.rules import CHECK_EVERY, STATUS_EVERY
from windctl.machine.twin.signals import Inputs, Outputs

_START = struct.Struct("<cBHHH")
_AGE = struct.Struct("<cIH")
_STATE = struct.Struct("<cB")
_INPUTS = struct.Struct("<chHHHhBBH")
_OUTPUTS = struct.Struct("<HiBB")


class Trace:
    """Records of one or more boards, one after the other; play.c tells the format."""

    def __init__(self) -> None:
        self.data = bytearray()
        self.ticks = 0


class RecordedBoard(Board):
    """The virtual machine's board, writing down all that passes."""

    __slots__ = ("trace",)

    def __init__(self, trace: Trace, **figures: Any) -> None:
        self.trace = trace
        super().__init__(**figures)

    def _start(self, boot_number: int) -> None:
        super()._start(boot_number)
        self.trace.data += _START.pack(
            b"S", self.capabilities, boot_number, self.contact_scale, self.tension_scale
        )

    def age(self, ticks: int, epoch: int) -> None:
        """As if it had run for so long and lost so many permissions: clocks that are about to wrap."""
        self.ticks = ticks
        self._status_at = (ticks + STATUS_EVERY) & 0xFFFFFFFF
        self.check_at = (ticks + CHECK_EVERY) & 0xFFFFFFFF
        self.epoch = epoch
        self.trace.data += _AGE.pack(b"A", ticks, epoch)

    def set_state(self, state: int) -> None:
        """Break the state on purpose."""
        self.state = state
        self.trace.data += _STATE.pack(b"X", state)

    def tick(self, inputs: Inputs, outputs: Outputs) -> None:
        """One millisecond, recorded."""
        super().tick(inputs, outputs)
        data, received, sent = self.trace.data, inputs.received, outputs.sent
        data += _INPUTS.pack(
            b"T",
            inputs.count_delta,
            inputs.steps_issued,
            inputs.contact,
            inputs.tension,
            inputs.celsius_centi,
            inputs.index,
            inputs.pins,
            len(received),
        )
        data += received
        flags = outputs.rotation | outputs.drive_enable << 1 | outputs.guide_enable << 2
        data += _OUTPUTS.pack(outputs.rate, outputs.guide_steps, flags, len(sent))
        data += sent
        self.trace.ticks += 1
