"""The firmware's core, built for this computer, with the face of the virtual machine's Python board."""

from __future__ import annotations

import ctypes
from functools import cache
from typing import Any

from tests.firmware.build import shared_library
from windctl.machine.twin.board import EVERYTHING
from windctl.machine.twin.signals import Inputs, Outputs

NO_SUCH_FIELD = -(1 << 63)


class _Inputs(ctypes.Structure):
    """struct windctl_inputs."""

    _fields_ = (
        ("received", ctypes.c_char_p),
        ("received_size", ctypes.c_uint16),
        ("count_delta", ctypes.c_int16),
        ("steps_issued", ctypes.c_uint16),
        ("contact", ctypes.c_uint16),
        ("tension", ctypes.c_uint16),
        ("celsius_centi", ctypes.c_int16),
        ("index", ctypes.c_uint8),
        ("pins", ctypes.c_uint8),
    )


class _Outputs(ctypes.Structure):
    """struct windctl_outputs."""

    _fields_ = (
        ("sent", ctypes.c_void_p),
        ("sent_begin", ctypes.c_uint8),
        ("sent_end", ctypes.c_uint8),
        ("rate", ctypes.c_uint16),
        ("guide_steps", ctypes.c_int32),
        ("rotation", ctypes.c_uint8),
        ("drive_enable", ctypes.c_uint8),
        ("guide_enable", ctypes.c_uint8),
    )


@cache
def load(queue: int = 128) -> ctypes.CDLL:
    """The library for a queue of this length, its functions typed."""
    library = ctypes.CDLL(str(shared_library(queue)))
    board = ctypes.c_void_p
    u8, u16, u32 = ctypes.c_uint8, ctypes.c_uint16, ctypes.c_uint32
    for name, result, arguments in (
        ("size", ctypes.c_size_t, []),
        ("queue", u16, []),
        ("start", None, [board, u8, u16, u16, u16]),
        ("age", None, [board, u32, u16]),
        ("tick", None, [board, ctypes.POINTER(_Inputs)]),
        ("outputs", ctypes.POINTER(_Outputs), [board]),
        ("sent", ctypes.c_void_p, [board]),
        ("sent_size", u16, [board]),
        ("get", ctypes.c_int64, [board, ctypes.c_char_p]),
        ("set_state", None, [board, u8]),
        ("frame", u8, [u8, u8, ctypes.c_char_p, u8, ctypes.c_char_p]),
    ):
        function = getattr(library, f"windctl_host_{name}")
        function.restype = result
        function.argtypes = arguments
    library.windctl_play.restype = ctypes.c_int64
    library.windctl_play.argtypes = [ctypes.c_char_p, ctypes.c_size_t, ctypes.POINTER(u32)]
    return library


class HostBoard:
    """One board run by the C core. Figures of the core are attributes: `count`, `state`, `line.next` ..."""

    def __init__(
        self,
        capabilities: int = EVERYTHING,
        queue: int = 128,
        boot_number: int = 1,
        contact_scale: int = 250,
        tension_scale: int = 10,
    ) -> None:
        self._library = load(queue)
        self._memory = ctypes.create_string_buffer(self._library.windctl_host_size())
        self._at = ctypes.addressof(self._memory)
        self._inputs = _Inputs()
        self._inputs_at = ctypes.byref(self._inputs)
        self._figures = (capabilities, contact_scale, tension_scale)
        self.queue = queue
        self.capabilities = capabilities
        self._start(boot_number)

    def _start(self, boot_number: int) -> None:
        capabilities, contact_scale, tension_scale = self._figures
        self._library.windctl_host_start(self._at, capabilities, boot_number, contact_scale, tension_scale)
        self._outputs = self._library.windctl_host_outputs(self._at).contents
        self._tick = self._library.windctl_host_tick
        self._sent_at = self._library.windctl_host_sent(self._at)

    def reboot(self) -> None:
        """A power cycle: everything is forgotten but the boot number, which is one more."""
        self._start((self.boot + 1) & 0xFFFF)

    def age(self, ticks: int, epoch: int) -> None:
        """As if it had run for so long and lost so many permissions."""
        self._library.windctl_host_age(self._at, ticks, epoch)

    def set_state(self, state: int) -> None:
        """Break the state on purpose."""
        self._library.windctl_host_set_state(self._at, state)

    def tick(self, inputs: Inputs, outputs: Outputs) -> None:
        """One millisecond."""
        mine = self._inputs
        mine.received = inputs.received
        mine.received_size = len(inputs.received)
        mine.count_delta = inputs.count_delta
        mine.steps_issued = inputs.steps_issued
        mine.contact = inputs.contact
        mine.tension = inputs.tension
        mine.celsius_centi = inputs.celsius_centi
        mine.index = inputs.index
        mine.pins = inputs.pins
        self._tick(self._at, self._inputs_at)
        came = self._outputs
        size = self._library.windctl_host_sent_size(self._at)
        outputs.sent = ctypes.string_at(self._sent_at, size) if size else b""
        outputs.rate = came.rate
        outputs.guide_steps = came.guide_steps
        outputs.rotation = came.rotation
        outputs.drive_enable = came.drive_enable
        outputs.guide_enable = came.guide_enable

    def target(self) -> int:
        """The nearest of stop point, queue end and hard limit."""
        return self.figure("target")

    def figure(self, name: str) -> int:
        """A figure of the core by its field's name."""
        value: int = self._library.windctl_host_get(self._at, name.encode())
        if value == NO_SUCH_FIELD:
            raise AttributeError(f"the core has no figure {name!r}")
        return value

    def __getattr__(self, name: str) -> Any:
        if name.startswith("_"):
            raise AttributeError(name)
        if name in ("line", "spindle", "mean", "dialogue"):
            return _Part(self, name)
        return self.figure(name)


class _Part:
    """A struct within the core's."""

    def __init__(self, board: HostBoard, name: str) -> None:
        self._board = board
        self._name = name

    def __getattr__(self, name: str) -> Any:
        if name == "reader":
            return _Part(self._board, f"{self._name}.{name}")
        return self._board.figure(f"{self._name}.{name}")
