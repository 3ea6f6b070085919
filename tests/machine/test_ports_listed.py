"""Listing ports, and telling one board from another."""

from __future__ import annotations

from types import SimpleNamespace

from windctl.machine.ports_listed import ListedPort, find_again, listed_ports


def info(device: str, vid: int | None, pid: int | None, number: str | None) -> SimpleNamespace:
    return SimpleNamespace(device=device, description="n/a", vid=vid, pid=pid, serial_number=number)


def test_usb_ports_come_first_and_carry_their_numbers() -> None:
    ports = listed_ports([info("/dev/ttyS0", None, None, None), info("/dev/ttyU1", 0x1234, 0x0ABC, "77")])
    assert [port.url for port in ports] == ["/dev/ttyU1", "/dev/ttyS0"]
    assert ports[0].usb == "1234:0abc"
    assert (ports[0].serial_number, ports[0].description) == ("77", "")
    assert ports[1].usb == ""


def test_a_board_is_found_again_under_another_name_but_never_guessed() -> None:
    known = ListedPort("/dev/ttyU0", "", 1, 2, "A")
    back = ListedPort("/dev/ttyU3", "", 1, 2, "A")
    other = ListedPort("/dev/ttyU0", "", 1, 2, "B")
    assert find_again(known, [other, back]) == back
    assert find_again(known, [other]) is None
    unnumbered = ListedPort("/dev/ttyU0", "", 1, 2, "")
    twins = [ListedPort("/dev/ttyU1", "", 1, 2, ""), ListedPort("/dev/ttyU2", "", 1, 2, "")]
    assert find_again(unnumbered, twins) is None
    assert find_again(ListedPort("/dev/ttyS0", "", None, None, ""), twins) is None


def test_the_computers_own_listing_can_be_read() -> None:
    assert all(isinstance(port, ListedPort) and port.url for port in listed_ports())
