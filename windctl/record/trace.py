"""The digest of a coil's facts without wall-clock time, ids and names of people: equal for equal runs.

Two runs of the same recipe, profile and simulated fate give the same trace, however fast they ran.
"""

from __future__ import annotations

import hashlib
from collections.abc import Iterable

from windctl.record.canonical import dumps, plain
from windctl.record.events import Event

# Who and when, not what: these differ between two runs of the same coil. The basis repeats recipe and tables.
LEFT_OUT = frozenset(
    {"coil_id", "number", "wall_time", "operator", "version", "batch", "of", "spool", "basis"}
)


def trace_digest(events: Iterable[Event]) -> str:
    """SHA-256, hex, over the canonical forms of the events in order, without the fields of `LEFT_OUT`."""
    digest = hashlib.sha256(b"windctl trace 1\0")
    for event in events:
        fields = {key: value for key, value in plain(event).items() if key not in LEFT_OUT}
        if "setup" in fields:
            fields["setup"] = {k: v for k, v in fields["setup"].items() if k != "coil_token"}
        if "identity" in fields:
            fields["identity"] = {
                k: v for k, v in fields["identity"].items() if k not in ("nonce", "coil_token", "setup_crc")
            }
        digest.update(event.kind.encode() + b"\0" + dumps(fields) + b"\n")
    return digest.hexdigest()
