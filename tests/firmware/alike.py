"""One coil by the whole host on two machines: the virtual one, and the real program on the emulated chip."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import Any, Final, cast

from tests.firmware.chip_bench import ChipBench
from tests.run.winding import here, order
from windctl.book.open import open_book
from windctl.machine.plant.made_for import plant_for
from windctl.machine.plant.plant import Plant
from windctl.machine.twin.signals import Inputs, Outputs
from windctl.machine.virtual.bench import Bench, virtual_bench
from windctl.machine.virtual.line import SerialLine, Way
from windctl.machine.virtual.port import VirtualPort
from windctl.profile.builtin import VIRTUAL
from windctl.protocol.frames import FrameReader
from windctl.protocol.messages import Message, decode
from windctl.run.outcome import Outcome
from windctl.run.runner import Ended
from windctl.run.wind import begin

BAUD: Final = 115_200


class TellsLate:
    """A plant that tells of encoder and index a tick later.

    A chip's core is told of steps as they are begun, and of the counts they make when they are out."""

    def __init__(self, plant: Plant) -> None:
        self._plant = plant
        self._told = (0, 0)

    def step(self, outputs: Outputs, inputs: Inputs) -> None:
        """One tick."""
        self._plant.step(outputs, inputs)
        seen = (inputs.count_delta, inputs.index)
        inputs.count_delta, inputs.index = self._told
        self._told = seen

    def __getattr__(self, name: str) -> Any:
        return getattr(self._plant, name)


class HeardPort(VirtualPort):
    """Keeps what came, with the time."""

    def __init__(self, bench: Bench) -> None:
        super().__init__(bench)
        self._reader = FrameReader()
        self.heard: list[tuple[float, Message]] = []

    def read(self, max_wait_s: float) -> bytes:
        """As a port reads."""
        data = super().read(max_wait_s)
        for frame in self._reader.feed(data):
            self.heard.append((self.now(), decode(frame.code, frame.body)))
        return data


@dataclass(frozen=True)
class Made:
    """A coil and what was said while it was made."""

    ended: Ended
    outcome: Outcome
    heard: list[tuple[float, Message]]
    frames_out: list[float]
    bench: Any


class TimedWay(Way):
    """Keeps when each frame's last byte is out, ms."""

    __slots__ = ("_free_at", "_new", "frames_out")

    def __init__(self, baud: int) -> None:
        super().__init__(baud, 0, whole=True)
        self.frames_out: list[float] = []
        self._free_at = 0.0
        self._new = b""

    def put(self, data: bytes) -> None:
        """Bytes to send."""
        super().put(data)
        self._new += data

    def pull(self, tick: int) -> bytes:
        """What arrives at this tick, in which the new bytes were put."""
        for frame in self._new.split(b"\0")[:-1]:
            self._free_at = max(self._free_at, tick) + 10 * (len(frame) + 1) / (BAUD / 1000)
            self.frames_out.append(self._free_at)
        self._new = b""
        return super().pull(tick)


def _line() -> SerialLine:
    """A byte is a chip's when its stop bit is over: a tick later than a simulated board's."""
    line = SerialLine()
    line.to_board = Way(BAUD, 1, whole=False)
    line.to_host = TimedWay(BAUD)
    return line


def on_virtual(text: str, book: Path, seed: int = 1) -> Made:
    """Wound on the virtual machine."""
    recipe, _ = order(text)
    bench = virtual_bench(recipe, VIRTUAL, seed)
    bench.plant = cast(Plant, TellsLate(bench.plant))
    bench.line = _line()
    return _wind(text, book, bench, bench.line.to_host.frames_out)


def on_chip(
    elf: Path, text: str, book: Path, seed: int = 1, see: Callable[[ChipBench], None] = lambda b: None
) -> Made:
    """Wound on the emulated chip; `see` may look at it before the host does."""
    recipe, _ = order(text)
    bench = ChipBench(elf, Plant(plant_for(recipe, VIRTUAL), seed))
    see(bench)
    return _wind(text, book, cast(Bench, bench), bench.frames_out)


def _wind(text: str, book: Path, bench: Bench, frames_out: list[float]) -> Made:
    _, wanted = order(text)
    port = HeardPort(bench)
    with open_book(book) as opened:
        winding = begin(wanted, opened, port, here(1))
        winding.start()
        ended = winding.wait(280.0)
        outcome = winding.close()
    assert ended is not None
    return Made(ended, outcome, port.heard, frames_out, bench)
