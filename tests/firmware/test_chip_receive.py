"""What is received and what is sent share a register's address, but nothing else.

Data sheet of the ATmega328P, from memory: "the USART Transmit Data Buffer Register and USART Receive Data
Buffer Registers share the same I/O address"; the receive buffer holds two bytes.
"""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

from tests.firmware.build import AVR, HERE, run
from tests.firmware.chip import CYCLES_PER_TICK, HZ, Chip

Elf = Callable[..., Path]


def probe(folder: Path) -> Chip:
    """A chip with a program of a dozen lines, to which three bytes come."""
    elf = folder / "probe.elf"
    run("avr-gcc", [*AVR, f"-DF_CPU={HZ}UL", "-o", elf, HERE / "receive_probe.c"])
    chip = Chip(elf)
    heard: list[int] = []
    chip.on_byte(heard.append)
    chip.run(1000)
    chip.send(b"\x11\x22\x33")
    chip.run(CYCLES_PER_TICK)
    assert chip.peek("done") == 1
    assert heard == [0x55]
    return chip


def test_what_is_sent_does_not_take_the_place_of_what_waits(chip: Elf, tmp_path: Path) -> None:
    assert probe(tmp_path).peek("seen").to_bytes(3, "little") == b"\x11\x22\x33"


def test_a_byte_too_many_is_noticed(chip: Elf, tmp_path: Path) -> None:
    probed = probe(tmp_path)  # its program reads no more
    probed.send(b"\x01\x02\x03")
    probed.run(CYCLES_PER_TICK)
    assert probed.overruns == 1
