"""A board is found by its USB numbers, whatever its port is called now."""

from __future__ import annotations

import pytest

from windctl.errors import MachineError
from windctl.machine.port_found import found
from windctl.machine.ports_listed import ListedPort
from windctl.profile.model import Port

BOARD = ListedPort("/dev/ttyU0", "a board", 0x1209, 0x0001, "77")
TWIN = ListedPort("/dev/ttyU1", "its twin", 0x1209, 0x0001, "78")
OTHER = ListedPort("/dev/ttyU2", "another", 0x0403, 0x6001, "")
BUILT_IN = ListedPort("/dev/ttyS0", "", None, None, "")
NUMBERED = {"vendor": 0x1209, "product": 0x0001}


def test_a_board_named_by_its_numbers_is_found_under_any_name() -> None:
    port = Port(**NUMBERED, serial_number="77")
    assert found(port, [OTHER, TWIN, BOARD]).url == "/dev/ttyU0"
    moved = ListedPort("/dev/ttyU9", "a board", 0x1209, 0x0001, "77")
    assert found(port.model_copy(update={"url": "/dev/ttyU0"}), [TWIN, moved]).url == "/dev/ttyU9"


def test_twins_are_told_apart_by_the_serial_number_or_by_the_named_port() -> None:
    with pytest.raises(MachineError, match=r"several ports \(/dev/ttyU0, /dev/ttyU1\): say which"):
        found(Port(**NUMBERED), [BOARD, TWIN])
    assert found(Port(**NUMBERED, url="/dev/ttyU1"), [BOARD, TWIN]).url == "/dev/ttyU1"
    assert found(Port(**NUMBERED, serial_number="78"), [BOARD, TWIN]).url == "/dev/ttyU1"


def test_another_board_on_the_named_port_is_not_taken_for_it() -> None:
    port = Port(**NUMBERED, url="/dev/ttyU2")
    assert found(port, [OTHER, BOARD]).url == "/dev/ttyU0"
    with pytest.raises(MachineError, match=r"1209:0001 is not plugged in; .*ttyU2 \(0403:6001\)"):
        found(port, [OTHER])
    with pytest.raises(MachineError, match="the ports there are: none"):
        found(Port(**NUMBERED, serial_number="5"), [])


def test_a_port_learns_the_numbers_of_what_is_on_it_if_they_will_do() -> None:
    learnt = found(Port(url="/dev/ttyU0"), [BOARD, OTHER])
    assert (learnt.vendor, learnt.product, learnt.serial_number) == (0x1209, 0x0001, "77")
    assert found(Port(url="/dev/ttyU2"), [BOARD, OTHER]).serial_number is None
    unnumbered = ListedPort("/dev/ttyU3", "one of two", 0x0403, 0x6001, "")
    assert found(Port(url="/dev/ttyU2"), [OTHER, unnumbered]).vendor is None  # cannot be told apart later
    for url in ("/dev/ttyS0", "/dev/nowhere", "socket://bench:7000"):
        port = Port(url=url)
        assert found(port, [BOARD, BUILT_IN]) == port
