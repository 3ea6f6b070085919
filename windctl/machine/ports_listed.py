"""The serial ports of this computer, and finding one again that came back under another name."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Protocol


class PortInfo(Protocol):
    """What is used of one entry of pyserial's listing."""

    @property
    def device(self) -> str: ...
    @property
    def description(self) -> str | None: ...
    @property
    def vid(self) -> int | None: ...
    @property
    def pid(self) -> int | None: ...
    @property
    def serial_number(self) -> str | None: ...


@dataclass(frozen=True, slots=True)
class ListedPort:
    """One serial port. `vendor` and `product` are USB numbers, None for a port that is not on USB."""

    url: str
    description: str
    vendor: int | None
    product: int | None
    serial_number: str

    @property
    def usb(self) -> str:
        """ "1a86:7523", or "" for a port that is not on USB."""
        if self.vendor is None or self.product is None:
            return ""
        return f"{self.vendor:04x}:{self.product:04x}"

    def same_device(self, other: ListedPort) -> bool:
        """Whether both are the same piece of hardware, whatever the port is called now."""
        return self.usb != "" and (self.usb, self.serial_number) == (other.usb, other.serial_number)


def listed_ports(found: Iterable[PortInfo] | None = None) -> list[ListedPort]:
    """All serial ports, those on USB first, by name. `found` replaces the computer's own listing."""
    if found is None:
        from serial.tools.list_ports import comports

        found = comports()
    ports = [
        ListedPort(
            url=info.device,
            description="" if info.description in (None, "n/a") else str(info.description),
            vendor=info.vid,
            product=info.pid,
            serial_number=info.serial_number or "",
        )
        for info in found
    ]
    return sorted(ports, key=lambda port: (port.usb == "", port.url))


def find_again(known: ListedPort, ports: Iterable[ListedPort]) -> ListedPort | None:
    """The port that `known` is now, or None if it is not there or cannot be told from another one."""
    same = [port for port in ports if known.same_device(port)]
    return same[0] if len(same) == 1 else None
