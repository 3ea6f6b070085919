"""Which open coil is meant, and the machine as it was when that coil began."""

from __future__ import annotations

from typing import TYPE_CHECKING

from windctl.desk.machines import VIRTUAL, profile_of
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
    """The machine as it was when the coil began; only the port may be another one now."""
    from windctl.profile.model import MachineProfile

    recorded = MachineProfile.model_validate_json(started.profile_json)
    now = profile_of(shared) if shared.machine is not None else recorded
    url = shared.port if shared.port not in (None, VIRTUAL) else now.port.url
    return recorded.model_copy(update={"port": now.port.model_copy(update={"url": url})})
