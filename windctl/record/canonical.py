"""The one written form of an event: JSON with sorted keys, no spaces, UTF-8, numbers as Python writes them.

A float is written with the fewest digits that read back as the same float, which is the same on every
computer; infinities and NaN are refused. The same event gives the same bytes for ever.
"""

from __future__ import annotations

import dataclasses
import json
from typing import Any

from windctl.errors import RecordBroken
from windctl.plan.experience.basis import Basis
from windctl.plan.pace import PaceSpec
from windctl.plan.prior import Prior
from windctl.protocol.messages import Identity, Reading, Refused, Setup, Status
from windctl.record.events import KINDS, Event, Target

# The parts of events that are themselves more than a number or a text.
_PARTS: dict[str, type[Any]] = {
    "setup": Setup,
    "pace": PaceSpec,
    "prior": Prior,
    "basis": Basis,
    "target": Target,
    "identity": Identity,
    "status": Status,
    "reading": Reading,
    "refused": Refused,
}

_FIELDS: dict[type[Any], tuple[str, ...]] = {
    kind: tuple(field.name for field in dataclasses.fields(kind))
    for kind in (*KINDS.values(), *_PARTS.values())
}


def dumps(value: object) -> bytes:
    """Canonical JSON of plain values.

    Raises ValueError for NaN and infinities.
    """
    return json.dumps(
        value, sort_keys=True, separators=(",", ":"), ensure_ascii=False, allow_nan=False
    ).encode()


def plain(fact: object) -> dict[str, Any]:
    """The fields of an event or of a part of one as plain values: `dataclasses.asdict`, several times faster.

    A coil has ten thousand facts, and its end and its verification write all of them anew.
    """
    return {
        name: plain(value) if type(value) in _FIELDS else value
        for name in _FIELDS[type(fact)]
        for value in (getattr(fact, name),)
    }


def encode(event: Event) -> bytes:
    """The canonical bytes of an event, without its kind."""
    return dumps(plain(event))


def decode(kind: str, payload: bytes) -> Event:
    """The event of `kind` that `payload` describes.

    Raises RecordBroken when it describes none.
    """
    try:
        fields = json.loads(payload)
        for name, part in _PARTS.items():
            if name in fields and isinstance(fields[name], dict):
                fields[name] = part(**fields[name])
        return KINDS[kind](**fields)
    except (ValueError, KeyError, TypeError) as error:
        raise RecordBroken(f"a stored fact of kind {kind!r} cannot be read: {error}") from error
