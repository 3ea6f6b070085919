"""The ATmega328P with the real program in it, emulated: pins, converter, serial line, cycles."""

from __future__ import annotations

import importlib
from collections import Counter
from collections.abc import Callable, Iterable
from pathlib import Path
from typing import Any, Final

from tests.firmware.build import MissingTool
from tests.firmware.chip_receive import receive_buffer

HZ: Final = 16_000_000
CYCLES_PER_TICK: Final = HZ // 1000
RAM: Final = (0x100, 0x900)  # addresses of the data memory, end excluded
PAINT: Final = 0xC5

# what `pins.h` wires
INPUT_PINS: Final = {
    "a": "PD2",
    "b": "PD3",
    "index": "PD4",
    "guide_low": "PB3",
    "guide_high": "PB4",
    "stop": "PC3",
    "guard": "PC4",
    "pedal": "PC5",
}
OUTPUT_PINS: Final = {
    "drive_enable": "PD5",
    "guide_step": "PD6",
    "guide_way": "PD7",
    "way": "PB0",
    "step": "PB1",
    "guide_enable": "PB2",
    "busy": "PB5",
}
ANALOG_PINS: Final = {"contact": "PC0", "tension": "PC1", "celsius": "PC2"}
VOLTS: Final = 5.0

# the data sheet's vector numbers
VECTORS: Final = {
    1: "INT0",
    2: "INT1",
    5: "PCINT2",
    7: "TIMER2_COMPA",
    11: "TIMER1_COMPA",
    12: "TIMER1_COMPB",
} | {
    18: "USART_RX",
    19: "USART_UDRE",
}

_DIGITAL_CHANGE = 1


def _core() -> Any:
    try:
        _mend(importlib.import_module("yasimavr.device_library.descriptors"))
        return importlib.import_module("yasimavr.lib.core")
    except ImportError:
        raise MissingTool("yasimavr") from None


def _mend(descriptors: Any) -> None:
    """The emulator's table of the converter's clock divisors lacks 64, which the data sheet has."""
    described = descriptors.PeripheralClassDescriptor
    if hasattr(described, "mended"):
        return
    before = described.__init__

    def init(self: Any, config: Any) -> None:
        before(self, config)
        if self.config.get("clk_ps_factors") == [2, 2, 4, 8, 16, 32, 128]:
            self.config["clk_ps_factors"] = [2, 2, 4, 8, 16, 32, 64, 128]

    described.__init__ = init
    described.mended = True


class Chip:
    """One chip that runs `elf`. Time passes in `run`, in cycles; the callbacks come at their cycle."""

    def __init__(self, elf: Path, eeprom: bytes = b"") -> None:
        self._core = core = _core()
        firmware = core.Firmware.read_elf(str(elf))
        firmware.frequency = HZ
        firmware.vcc = firmware.aref = VOLTS
        self._device = device = importlib.import_module("yasimavr.device_library").load_device("atmega328p")
        # The emulator knows no digital input disable register; nothing but current depends on it.
        device.set_option(core.Device.Option.IgnoreBadCpuIO, True)
        self._loop = core.SimLoop(device)
        self._loop.set_fast_mode(True)
        device.load_firmware(firmware)
        self._firmware = firmware
        self._probe = core.DeviceDebugProbe(device)
        self._hooks: list[Any] = []
        self._driven: dict[str, bool] = {}  # inputs and their levels
        self._pins = {
            name: device.find_pin(pin) for name, pin in (INPUT_PINS | OUTPUT_PINS | ANALOG_PINS).items()
        }
        self._uart = core.IOCTL_UART("0")
        self._received = receive_buffer(core, device)
        self._on_byte: Callable[[int], None] = lambda byte: None
        self._connect(self._uart, self._serial)
        self._paint()

    # ------------------------------------------------------------ time

    @property
    def cycle(self) -> int:
        """Cycles since power came."""
        return int(self._loop.cycle())

    def run(self, cycles: int) -> None:
        """Lets so many cycles pass, or a few more: an instruction is not cut."""
        self._loop.run(cycles)

    def run_to(self, cycle: int) -> None:
        """Lets time pass up to this cycle."""
        left = cycle - self._loop.cycle()
        if left > 0:
            self._loop.run(left)

    @property
    def running(self) -> bool:
        """False once the program did something that no chip can do."""
        return bool(self._device.state() == self._core.Device.State.Running)

    def brown_out(self) -> None:
        """The supply dips: the chip is reset, its memory stays.

        The emulator clears the registers that show the pins' levels as well, and writes them only when a
        level changes: what is high would read as low, an open guard as closed. So each is changed once.
        """
        self._device.reset(int(self._core.Device.ResetFlag.BOD))
        for name, high in self._driven.items():
            self._pins[name].set_external_state("L" if high else "H")
            self.set(name, high)

    # ------------------------------------------------------------ pins and line

    def set(self, name: str, high: bool | int) -> None:
        """Drives an input."""
        self._driven[name] = bool(high)
        self._pins[name].set_external_state("H" if high else "L")

    def set_volts(self, name: str, volts: float) -> None:
        """Drives an analogue input."""
        self._pins[name].set_external_state("A", min(max(volts / VOLTS, 0.0), 1.0))

    def high(self, name: str) -> bool:
        """Whether an output is high."""
        return bool(self._pins[name].digital_state())

    def on_change(self, name: str, call: Callable[[bool], None]) -> None:
        """Calls with the new level whenever an output changes."""

        def raised(data: Any, _index: int) -> None:
            if data.sigid == _DIGITAL_CHANGE:
                call(bool(data.data.value()))

        hook = self._core.CallableSignalHook(raised)
        self._hooks.append(hook)
        self._pins[name].signal().connect(hook)

    @property
    def overruns(self) -> int:
        """Bytes that came while two others were waiting in the receiver."""
        return int(self._received.overruns)

    def send(self, data: bytes) -> None:
        """Bytes onto the chip's receive line, one after the other at its own rate."""
        for byte in data:
            self._received.coming.append(byte)
            request = self._core.ctlreq_data_t()
            request.data = self._core.vardata_t(bytes((byte,)))
            ok, _ = self._device.ctlreq(self._uart, self._core.CTLREQ_USART_BYTES, request)
            assert ok

    def on_byte(self, call: Callable[[int], None]) -> None:
        """Calls with each byte the chip has sent, when its stop bit is over."""
        self._on_byte = call

    def _serial(self, data: Any, _index: int) -> None:
        signals = self._core.UART.SignalId
        if data.sigid == signals.TX_Data:
            self._on_byte(data.data.value())
        elif data.sigid == signals.RX_Complete:
            self._received.complete(taken=bool(data.data.value()))

    def _connect(self, peripheral: Any, call: Callable[[Any, int], None]) -> None:
        ok, request = self._device.ctlreq(peripheral, self._core.CTLREQ_GET_SIGNAL)
        assert ok
        hook = self._core.CallableSignalHook(call)
        self._hooks.append(hook)
        request.data.value(self._core.Signal).connect(hook)

    # ------------------------------------------------------------ memory

    def symbol(self, name: str) -> tuple[int, int]:
        """Address and size of a variable of the program."""
        for symbol in self._firmware.symbols():
            if symbol.name == name:
                return int(symbol.addr), int(symbol.size)
        raise KeyError(name)

    def peek(self, name: str) -> int:
        """An unsigned variable of the program."""
        return int.from_bytes(self.peek_bytes(name), "little")

    def peek_bytes(self, name: str) -> bytes:
        """Any variable of the program."""
        return bytes(self._probe.read_data(*self.symbol(name)))

    def poke(self, name: str, at: int, value: int) -> None:
        """Writes a byte of a variable of the program."""
        self._probe.write_data(self.symbol(name)[0] + at, bytes((value,)))

    def _paint(self) -> None:
        first, end = RAM
        self._probe.write_data(first, bytes([PAINT]) * (end - first))

    def stack_never_used(self, ram_used: int) -> int:
        """Bytes between the variables' end and the deepest the stack has been."""
        first, end = RAM
        free = bytes(self._probe.read_data(first + ram_used, end - first - ram_used))
        return len(free) - len(free.lstrip(bytes([PAINT])))

    # ------------------------------------------------------------ measuring

    def watch_interrupts(self) -> InterruptTimes:
        """Begins to measure how long each interrupt takes."""
        times = InterruptTimes(self, self._core.InterruptController.State)
        self._connect(self._core.IOCTL_INTR, times.seen)
        return times


class InterruptTimes:
    """Cycles from an interrupt's acknowledgement to its return, by vector."""

    def __init__(self, chip: Chip, states: Any) -> None:
        self._chip = chip
        self._states = states
        self._began: list[tuple[int, int]] = []
        self.worst: Counter[str] = Counter()
        self.times: Counter[str] = Counter()
        self.total: Counter[str] = Counter()

    def seen(self, data: Any, _index: int) -> None:
        """An interrupt changes its state."""
        state = data.data.value()
        if state == self._states.Acknowledged:
            self._began.append((data.index, self._chip.cycle))
        elif state == self._states.Returned and self._began:
            vector, began = self._began.pop()
            name = VECTORS.get(vector, f"vector {vector}")
            took = self._chip.cycle - began
            self.worst[name] = max(self.worst[name], took)
            self.times[name] += 1
            self.total[name] += took

    def table(self) -> Iterable[str]:
        """A line for each."""
        for name in sorted(self.worst):
            yield f"{name}: {self.times[name]} times, worst {self.worst[name]} cycles"
