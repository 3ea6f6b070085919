"""Which open coil is meant, and the machine as it was when that coil began."""

from __future__ import annotations

from typing import TYPE_CHECKING

from windctl.desk.machines import VIRTUAL, port_at, profile_of
from windctl.errors import UsageError

if TYPE_CHECKING:
    from windctl.book.book import Book
    from windctl.book.heads import CoilHead
    from windctl.desk.asked import Shared
    from windctl.profile.model import MachineProfile
    from windctl.record.events import CoilStarted


def open_coil(book: Book, coil: str | None, bench: str | None) -> CoilHead:
    """The coil to go on with: the one named, or the only one open."""
    if coil is not None:
        return book.find(coil)
    heads = book.open_coils(bench)
    if not heads:
        raise UsageError("no coil is open: there is nothing to go on with")
    if len(heads) > 1:
        named = ", ".join(head.number for head in heads)
        raise UsageError(f"several coils are open ({named}): say which one to go on with")
    return heads[0]


def recorded_profile(shared: Shared, started: CoilStarted) -> MachineProfile:
    """The machine as it was when the coil began; only the port may be another one now.

    A board that was found by its USB numbers then is looked for by them, unless a port is named.
    """
    from windctl.profile.model import MachineProfile

    recorded = MachineProfile.model_validate_json(started.profile_json)
    now = profile_of(shared) if shared.machine is not None else recorded
    port = now.port
    if shared.port is not None and shared.port != VIRTUAL:
        port = port_at(port, shared.port)
    elif port.vendor is None and port.url == recorded.port.url:
        port = recorded.port
    return recorded.model_copy(update={"port": port})
