"""A chain of digests: each link is the SHA-256 of the link before it and of what it ties on.

Whoever knows the last link knows whether any byte of any fact before it was changed. The chain makes
tampering evident; it does not make it impossible, and it says nothing about facts that were never written.
"""

from __future__ import annotations

import hashlib

LINK_BYTES = 32


def genesis(coil_id: str) -> bytes:
    """The link before the first fact of a coil: tied to its id, so that no chain fits another coil."""
    return hashlib.sha256(b"windctl coil 1\0" + coil_id.encode()).digest()


def link(previous: bytes, kind: str, payload: bytes) -> bytes:
    """The link that ties (kind, payload) to everything before `previous`."""
    return hashlib.sha256(previous + len(kind).to_bytes(2, "big") + kind.encode() + payload).digest()
