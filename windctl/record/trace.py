"""The digest of a coil's facts without wall-clock time, ids and names of people: equal for equal runs.

Two runs of the same recipe, profile and simulated fate give the same trace, however fast they ran.
"""

from __future__ import annotations

import hashlib
import json
from collections.abc import Iterable

from windctl.errors import RecordBroken
from windctl.record.canonical import dumps
from windctl.record.entries import CHUNK, Entry, chunk_bytes

# Who and when, not what: these differ between two runs of the same coil. The basis repeats recipe and tables.
LEFT_OUT = frozenset(
    {"coil_id", "number", "wall_time", "operator", "version", "batch", "of"}
    | {"spool", "spool_left_m", "spool_left_sd_m", "basis"}
)

_NAMES_WITHIN = {"setup": {"coil_token"}, "identity": {"nonce", "coil_token", "setup_crc"}}


def trace_digest(entries: Iterable[Entry]) -> str:
    """SHA-256, hex, over the facts as they are stored, in order, without the fields of `LEFT_OUT`.

    Taken from the stored form and not from what this version reads in it, so that a later version, which may
    know more fields, finds the same. Raises RecordBroken for a row that is no fact.
    """
    digest = hashlib.sha256(b"windctl trace 2\0")
    for entry in entries:
        facts = chunk_bytes(entry) if entry.kind == CHUNK else _without_names(entry)
        digest.update(entry.kind.encode() + b"\0" + len(facts).to_bytes(4, "big") + facts)
    return digest.hexdigest()


def _without_names(entry: Entry) -> bytes:
    try:
        fields = json.loads(entry.payload)
        kept = {key: value for key, value in fields.items() if key not in LEFT_OUT}
        for part, names in _NAMES_WITHIN.items():
            if part in kept:
                kept[part] = {key: value for key, value in kept[part].items() if key not in names}
        return dumps(kept)
    except (ValueError, AttributeError) as error:
        raise RecordBroken(f"a stored fact of kind {entry.kind!r} cannot be read: {error}") from error
