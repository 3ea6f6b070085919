"""Which serial port a machine's board is on now: under the name it had, or under another one.

A USB adapter that was pulled and put back may get another name. Its vendor, product and serial number stay,
so a profile may name those, and what a port was when a coil began is kept with the coil.
"""

from __future__ import annotations

from collections.abc import Sequence

from windctl.errors import MachineError
from windctl.machine.ports_listed import ListedPort, find_again, listed_ports
from windctl.profile.model import Port


def found(port: Port, listed: Sequence[ListedPort] | None = None) -> Port:
    """`port` with the URL that its board has now, and with its USB numbers where it has any.

    `listed` replaces the computer's own list of ports. Raises MachineError where a board that is named by its
    numbers is not there, or cannot be told from another one.
    """
    if port.url is not None and "://" in port.url:
        return port  # not one of this computer's serial ports
    ports = listed_ports() if listed is None else listed
    if port.vendor is None or port.product is None:
        return _identified(port, ports)
    candidates = [
        one
        for one in ports
        if (one.vendor, one.product) == (port.vendor, port.product)
        and port.serial_number in (None, one.serial_number)
    ]
    if not candidates:
        there = ", ".join(f"{one.url} ({one.usb or one.description or 'not on USB'})" for one in ports)
        raise MachineError(f"{_named(port)} is not plugged in; the ports there are: {there or 'none'}")
    here = [one for one in candidates if one.url == port.url] or candidates
    if len(here) > 1:
        urls = ", ".join(one.url for one in here)
        raise MachineError(
            f"{_named(port)} is on several ports ({urls}): say which with port.url or port.serial_number, "
            "or with --port"
        )
    return port.model_copy(update={"url": here[0].url})


def _identified(port: Port, ports: Sequence[ListedPort]) -> Port:
    """With the numbers of what is on it, if they will do to find it again."""
    here = next((one for one in ports if one.url == port.url), None)
    if here is None or not here.usb or find_again(here, ports) is None:
        return port
    return port.model_copy(
        update={
            "vendor": here.vendor,
            "product": here.product,
            "serial_number": here.serial_number or None,
        }
    )


def _named(port: Port) -> str:
    serial = "" if port.serial_number is None else f", serial number {port.serial_number}"
    return f"the board {port.vendor:04x}:{port.product:04x}{serial}"
