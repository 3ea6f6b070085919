"""Writes what both sides of the protocol share, from the one definition in messages.toml.

    python firmware_protocol/generate.py           write every generated file anew
    python firmware_protocol/generate.py --check   write nothing; exit 1 and name what is stale

Generated: the host's codec `windctl/protocol/messages.py`, the board's `core/windctl_messages.h` and `.c`,
the golden frames `vectors.json` and the tables in README.md. A writer is a function from the checked
`Definition` to text; another language is one more function in `OUTPUTS`. Only the standard library is used,
and frames are built here by the letter of the specification (bitwise CRC, byte-wise COBS), so that the
vectors are a check on the real codecs and not a copy of them.
"""

from __future__ import annotations

import argparse
import json
import math
import struct
import sys
import tomllib
import zlib
from collections.abc import Callable, Iterable
from dataclasses import dataclass
from pathlib import Path
from typing import Any

HERE = Path(__file__).resolve().parent
sys.path.insert(0, str(HERE))  # also where this file is loaded by its path
import c_codec  # noqa: E402 - needs the path above

DEFINITION = HERE / "messages.toml"
CODEC = HERE.parent / "windctl" / "protocol" / "messages.py"
C_HEADER = HERE / "core" / "windctl_messages.h"
C_SOURCE = HERE / "core" / "windctl_messages.c"
VECTORS = HERE / "vectors.json"
SPECIFICATION = HERE / "README.md"

BODY_LIMIT = 60  # bytes
SEGMENTS = 12  # per Lay
WIDTH = {"u8": 1, "u16": 2, "u32": 4, "i16": 2, "i32": 4, "segments": 4 * SEGMENTS}
PACK = {"u8": "B", "u16": "H", "u32": "I", "i16": "h", "i32": "i", "segments": f"{4 * SEGMENTS}s"}

# table of messages.toml -> (name in the host's codec, values are bits)
TABLES = {
    "states": ("State", False),
    "causes": ("Cause", False),
    "refusals": ("Refusal", False),
    "notices": ("NoticeKind", False),
    "trust": ("Trust", True),
    "inputs": ("InputBit", True),
    "capabilities": ("Capability", True),
    "reading_flags": ("ReadingFlag", True),
}


class DefinitionError(Exception):
    """messages.toml contradicts itself or uses something the writers do not know."""


@dataclass(frozen=True)
class Field:
    """One value of a message's body."""

    name: str
    type: str
    unit: str
    about: str

    @property
    def size(self) -> int:
        """Bytes."""
        return WIDTH[self.type]


@dataclass(frozen=True)
class Message:
    """One message: its code, who hears it, and its fixed body."""

    name: str
    code: int
    to: str
    about: str
    numbered: bool
    moves: bool
    fields: tuple[Field, ...]

    @property
    def size(self) -> int:
        """Bytes of the body."""
        return sum(field.size for field in self.fields)

    @property
    def format(self) -> str:
        """The body's `struct` format, little endian without padding."""
        return "<" + "".join(PACK[field.type] for field in self.fields)


@dataclass(frozen=True)
class TripRow:
    """One trip: what stops the machine, how, and what can be trusted afterwards."""

    name: str
    code: int
    category: int
    count: bool
    guide: bool
    cause: str
    clears: str


@dataclass(frozen=True)
class Definition:
    """messages.toml, checked."""

    protocol: int
    tables: dict[str, dict[str, int]]
    notes: dict[tuple[str, str], str]  # (table, name): the comment beside a value
    messages: tuple[Message, ...]
    trips: tuple[TripRow, ...]
    body_limit: int = BODY_LIMIT
    segments: int = SEGMENTS

    def enums(self) -> list[tuple[str, list[tuple[str, int]]]]:
        """Every table of named values under its name in the codecs, the trips last."""
        tables = [(name, list(self.tables[table].items())) for table, (name, _) in TABLES.items()]
        return [*tables, ("Trip", [("none", 0), *((trip.name, trip.code) for trip in self.trips)])]

    @property
    def schema(self) -> int:
        """CRC-32 of what both sides must agree on: names, codes, types and categories, not prose."""
        agreed: dict[str, Any] = {
            "protocol": self.protocol,
            "tables": self.tables,
            "messages": [
                [m.name, m.code, m.to, m.numbered, m.moves, [[f.name, f.type] for f in m.fields]]
                for m in self.messages
            ],
            "trips": [[t.name, t.code, t.category, t.count, t.guide] for t in self.trips],
        }
        text = json.dumps(agreed, sort_keys=True, separators=(",", ":"), ensure_ascii=True)
        return zlib.crc32(text.encode("ascii"))


def load(text: str) -> Definition:
    """Parse and check messages.toml. Raises DefinitionError with the first thing that cannot be."""
    data = tomllib.loads(text)
    messages = tuple(
        Message(
            name=m["name"],
            code=m["code"],
            to=m["to"],
            about=m["about"],
            numbered=m.get("numbered", m["to"] == "board"),
            moves=m.get("moves", False),
            fields=tuple(
                Field(f["name"], f["type"], f.get("unit", ""), f.get("about", "")) for f in m["fields"]
            ),
        )
        for m in data["message"]
    )
    trips = tuple(TripRow(**t) for t in data["trip"])
    tables = {name: data[name] for name in TABLES}
    definition = Definition(data["protocol"], tables, _notes(text), messages, trips)
    _check(definition)
    return definition


def _notes(text: str) -> dict[tuple[str, str], str]:
    """The comments beside the values of the tables: what the values mean."""
    notes: dict[tuple[str, str], str] = {}
    table = ""
    for line in text.splitlines():
        if line.startswith("["):
            table = line.strip("[] ").split("]")[0]
        elif table in TABLES and "#" in line:
            setting, note = line.split("#", 1)
            notes[table, setting.split("=")[0].strip()] = note.strip()
    return notes


def _check(definition: Definition) -> None:
    unique: list[tuple[str, list[Any]]] = [
        ("message codes", [m.code for m in definition.messages]),
        ("message names", [m.name for m in definition.messages]),
        ("trip codes", [t.code for t in definition.trips]),
        *((name, list(table.values())) for name, table in definition.tables.items()),
    ]
    for what, values in unique:
        if len(set(values)) != len(values):
            raise DefinitionError(f"{what} are not all different")
    for name, (_, bits) in TABLES.items():
        for key, value in definition.tables[name].items():
            if not 0 <= value <= 255 or (bits and value.bit_count() != 1):
                raise DefinitionError(f"{name}.{key} is {value}: wants {'one bit of ' if bits else ''}a u8")
    for message in definition.messages:
        expected = "board" if message.code < 0x80 else "host"
        if message.to != expected:
            raise DefinitionError(f"{message.name}: code {message.code:#04x} goes to the {expected}")
        for field in message.fields:
            if field.type not in WIDTH:
                raise DefinitionError(f"{message.name}.{field.name}: type {field.type} is not known")
        if message.size > BODY_LIMIT:
            raise DefinitionError(f"{message.name}: body of {message.size} bytes, limit {BODY_LIMIT}")
        if message.moves and [f.name for f in message.fields[:2]] != ["boot", "epoch"]:
            raise DefinitionError(f"{message.name} moves, so its body begins with boot and epoch")


# ---------------------------------------------------------------- the host's codec

CODEC_HEAD = '''"""Every message of the board protocol, as frozen dataclasses. Generated from messages.toml.

A body is fixed in length, little endian. `encode_body` raises `struct.error` for a value outside its type.
Named values (states, causes, ...) stay plain integers in the messages, so that a newer board's unknown value
can still be shown; compare them with the tables here.
"""

from __future__ import annotations

import struct
from dataclasses import dataclass
from enum import IntEnum, IntFlag
from typing import ClassVar, Final

PROTOCOL: Final = {protocol}
SCHEMA: Final = {schema}  # CRC-32 of what both sides must agree on
SEGMENTS_PER_LAY: Final = {segments}
BODY_LIMIT: Final = {limit}  # bytes
'''

CODEC_TAIL = '''

class BadMessageError(ValueError):
    """A frame whose code is not known, or whose body has another length than its code's."""


def decode(code: int, body: bytes) -> Message:
    """The message in a frame of this code. Raises BadMessageError if the code or the length is wrong."""
    kind = MESSAGES.get(code)
    if kind is None:
        raise BadMessageError(f"message code {code:#04x} is not known to protocol {PROTOCOL}")
    if len(body) != kind.SIZE:
        raise BadMessageError(f"{kind.NAME} has {len(body)} bytes, wants {kind.SIZE}")
    return kind.decode_body(body)
'''


def python_codec(definition: Definition) -> str:
    """The text of windctl/protocol/messages.py."""
    parts = [
        CODEC_HEAD.format(
            protocol=definition.protocol,
            schema=_hex(definition.schema, 8),
            segments=SEGMENTS,
            limit=BODY_LIMIT,
        )
    ]
    for table, (name, bits) in TABLES.items():
        about = f"Values of [{table}]" + (", to be combined." if bits else ".")
        base = "IntFlag" if bits else "IntEnum"
        parts.append(_python_enum(name, base, about, definition.tables[table].items()))
    trips = [("none", 0), *((trip.name, trip.code) for trip in definition.trips)]
    parts.append(_python_enum("Trip", "IntEnum", "Why the board stopped by itself.", trips))
    parts.append(_python_trips(definition.trips))
    parts.extend(_python_message(message) for message in definition.messages)
    for name, to in (("HostMessage", "board"), ("BoardMessage", "host")):
        members = "\n    | ".join(m.name for m in definition.messages if m.to == to)
        parts.append(f"\n\n{name} = (\n    {members}\n)  # fmt: skip")
    parts.append("\n\nMessage = HostMessage | BoardMessage\n")
    parts.append("\nMESSAGES: Final[dict[int, type[Message]]] = {\n")
    parts.extend(f"    {_hex(message.code, 2)}: {message.name},\n" for message in definition.messages)
    parts.append("}\n")
    parts.append(CODEC_TAIL)
    return "".join(parts)


def _hex(value: int, digits: int) -> str:
    return f"0x{value:0{digits}X}"


def _python_enum(name: str, base: str, about: str, values: Iterable[tuple[str, int]]) -> str:
    lines = [f'\n\nclass {name}({base}):\n    """{about}"""\n\n']
    lines.extend(f"    {key.upper()} = {value}\n" for key, value in values)
    return "".join(lines)


def _python_trips(trips: tuple[TripRow, ...]) -> str:
    lines = [
        "\n\n@dataclass(frozen=True, slots=True)\nclass TripRule:\n",
        '    """One trip: its IEC 60204-1 stop category, and whether count and guide can be trusted."""\n\n',
        "    trip: Trip\n    category: int\n    count: bool\n    guide: bool\n",
        "    cause: str\n    clears: str\n",
        "\n\nTRIPS: Final[dict[int, TripRule]] = {\n",
    ]
    for trip in trips:
        lines.append(f"    {trip.code}: TripRule(\n        Trip.{trip.name.upper()},\n")
        lines.extend(f"        {value!r},\n" for value in (trip.category, trip.count, trip.guide))
        lines.extend(f"        {json.dumps(text)},\n" for text in (trip.cause, trip.clears))
        lines.append("    ),\n")
    lines.append("}\n")
    return "".join(lines)


def _python_message(message: Message) -> str:
    packer = f"_{message.name.upper()}"
    lines = [
        f'\n\n{packer} = struct.Struct("{message.format}")\n',
        f"\n\n@dataclass(frozen=True, slots=True)\nclass {message.name}:\n",
        _docstring(message.about),
        f'    NAME: ClassVar[str] = "{message.name}"\n',
        f"    CODE: ClassVar[int] = {_hex(message.code, 2)}\n",
        f"    SIZE: ClassVar[int] = {message.size}\n",
    ]
    if message.to == "board":
        lines.append(f"    NUMBERED: ClassVar[bool] = {message.numbered}\n")
        lines.append(f"    MOVES: ClassVar[bool] = {message.moves}\n")
    if message.fields:
        lines.append("\n")
    for field in message.fields:
        kind = "bytes" if field.type == "segments" else "int"
        note = _field_note(field)
        if len(field.name) + len(note) <= 90:
            lines.append(f"    {field.name}: {kind}  # {note}\n")
        else:
            lines.extend(f"    # {line}\n" for line in _wrap(note, 104))
            lines.append(f"    {field.name}: {kind}\n")
    values = [f"self.{field.name}" for field in message.fields]
    lines.append('\n    def encode_body(self) -> bytes:\n        """The body as it goes into a frame."""\n')
    one_line = f"        return {packer}.pack({', '.join(values)})\n"
    if len(one_line) <= 111:
        lines.append(one_line)
    else:
        lines.append(f"        return {packer}.pack(\n")
        lines.extend(f"            {value},\n" for value in values)
        lines.append("        )\n")
    lines.append("\n    @classmethod\n")
    lines.append(f"    def decode_body(cls, body: bytes) -> {message.name}:\n")
    lines.append('        """The message in a body of exactly SIZE bytes."""\n')
    lines.append(f"        return cls(*{packer}.unpack(body))\n")
    return "".join(lines)


def _docstring(text: str) -> str:
    lines = _wrap(text, 100)
    body = "\n    ".join(lines)
    return f'    """{body}"""\n\n' if len(lines) == 1 else f'    """{body}\n    """\n\n'


def _field_note(field: Field) -> str:
    kind = (
        f"{SEGMENTS} x (u16, i16) packed, {WIDTH['segments']} bytes"
        if field.type == "segments"
        else field.type
    )
    note = f"{kind}, {field.unit}" if field.unit else kind
    return f"{note}: {field.about}" if field.about else note


def _wrap(text: str, width: int) -> list[str]:
    lines, line = [], ""
    for word in text.split(" "):
        if line and len(line) + 1 + len(word) > width:
            lines.append(line)
            line = word
        else:
            line = f"{line} {word}" if line else word
    return [*lines, line]


# ---------------------------------------------------------------- golden frames


def crc16(data: bytes) -> int:
    """CRC-16/IBM-3740, bit by bit: polynomial 0x1021, initial 0xFFFF, nothing reflected, no final xor."""
    crc = 0xFFFF
    for byte in data:
        crc ^= byte << 8
        for _ in range(8):
            crc = ((crc << 1) ^ 0x1021 if crc & 0x8000 else crc << 1) & 0xFFFF
    return crc


def cobs(data: bytes) -> bytes:
    """COBS (Cheshire and Baker 1999), for fewer than 254 bytes, without the delimiter."""
    return b"".join(bytes([len(block) + 1]) + block for block in data.split(b"\0"))


def frame(code: int, sequence: int, body: bytes) -> bytes:
    """One frame as it stands on the wire, delimiter included."""
    inside = bytes([code, sequence]) + body
    return cobs(inside + crc16(inside).to_bytes(2, "big")) + b"\0"


def _sample(field: Field, place: int, pattern: int) -> int | str:
    """A value for a field that depends on nothing but its place: mixed, smallest, largest."""
    size = WIDTH[field.type]
    if field.type == "segments":
        pairs = [((place + 7 * k) % 400 + 1, (-1) ** k * ((place + k) % 15)) for k in range(SEGMENTS)]
        return b"".join(struct.pack("<Hh", *pair) for pair in pairs).hex()
    signed = field.type.startswith("i")
    if pattern == 1:
        return -(1 << (8 * size - 1)) if signed else 0
    if pattern == 2:
        return (1 << (8 * size - 1)) - 1 if signed else (1 << (8 * size)) - 1
    raw = bytes((37 * (place + 1) + 11 * k) % 256 for k in range(size))
    return int.from_bytes(raw, "little", signed=signed)


def vectors(definition: Definition) -> str:
    """The text of vectors.json."""
    frames = []
    for message in definition.messages:
        for pattern in range(3 if message.fields else 1):
            values = {f.name: _sample(f, place, pattern) for place, f in enumerate(message.fields)}
            raw = [bytes.fromhex(v) if isinstance(v, str) else v for v in values.values()]
            body = struct.pack(message.format, *raw)
            sequence = (message.code * 3 + pattern) % 256
            entry = {"message": message.name, "code": message.code, "sequence": sequence, "fields": values}
            frames.append({**entry, "frame": frame(message.code, sequence, body).hex()})
    worked = {
        "guide_line": [guide_line(n, g) for n, g in ((7, 3), (8, -5), (10, 10), (11, 0), (400, 14), (1, -1))],
        "braking": [braking(decel, left) for decel in (3333, 20_000) for left in (1, 2, 10, 1000, 100_000)],
        "quadrature": quadrature(),
    }
    parts = [f'"format": 1,\n"schema": {definition.schema},\n"frames": [\n']
    parts.append(",\n".join(json.dumps(entry) for entry in frames) + "\n]")
    for name, rows in worked.items():
        parts.append(f',\n"{name}": [\n' + ",\n".join(json.dumps(row) for row in rows) + "\n]")
    return "{\n" + "".join(parts) + "\n}\n"


def guide_line(n: int, g: int) -> dict[str, Any]:
    """Where the guide stands after 0..n counts of a segment of g steps, by the closed formula."""
    sign = -1 if g < 0 else 1
    positions = [sign * ((k * abs(g) + n // 2) // n) for k in range(n + 1)]
    return {"counts": n, "steps": g, "positions": positions}


def braking(decel: int, left: int) -> dict[str, int]:
    """The highest pace with v*v <= 2*decel*left: from it, `left` steps suffice to stand."""
    return {"decel": decel, "left": left, "pace": math.isqrt(2 * decel * left)}


def quadrature() -> list[dict[str, Any]]:
    """What each change of the two encoder channels counts; states are channel A * 2 + channel B."""
    ring = (0b00, 0b01, 0b11, 0b10)  # the order in which counting up goes through them
    rows = []
    for before in range(4):
        for now in range(4):
            moved = (ring.index(now) - ring.index(before)) % 4
            rows.append({"index": before << 2 | now, "counts": {0: 0, 1: 1, 3: -1}.get(moved)})
    return rows


# ---------------------------------------------------------------- the tables of the specification


def specification(definition: Definition) -> str:
    """README.md with the tables between its markers written anew; the rest stays as it is."""
    text = SPECIFICATION.read_text(encoding="utf-8")
    tables = {
        "schema": f"`0x{definition.schema:08X}`, protocol {definition.protocol}",
        "messages": "\n\n".join(_message_section(message) for message in definition.messages),
        "trips": _trip_table(definition.trips),
        **{name: _value_table(definition, name) for name in TABLES},
    }
    for name, table in tables.items():
        begin, end = f"<!-- generated: {name} -->", "<!-- end -->"
        head, found, rest = text.partition(begin)
        if not found or end not in rest:
            raise DefinitionError(f"README.md has no place for the table of {name}")
        text = f"{head}{begin}\n{table}\n{end}{rest.partition(end)[2]}"
    return text


def _table(head: tuple[str, ...], rows: Iterable[tuple[object, ...]]) -> str:
    lines = [head, tuple("---" for _ in head), *rows]
    return "\n".join("| " + " | ".join(str(cell) for cell in line) + " |" for line in lines)


def _value_table(definition: Definition, name: str) -> str:
    rows = [
        (v, f"`{key}`", definition.notes.get((name, key), "")) for key, v in definition.tables[name].items()
    ]
    return _table(("bit" if TABLES[name][1] else "value", "name", "meaning"), rows)


def _message_section(message: Message) -> str:
    traits = [f"{message.size} bytes"]
    if message.to == "board":
        traits.append("numbered" if message.numbered else "not numbered")
    lines = [f"#### {message.name} (0x{message.code:02X}, {', '.join(traits)})", message.about]
    if message.fields:
        rows, at = [], 0
        for field in message.fields:
            kind = "12 x (u16, i16)" if field.type == "segments" else field.type
            rows.append((at, f"`{field.name}`", kind, field.unit, field.about))
            at += WIDTH[field.type]
        lines.append(_table(("byte", "field", "type", "unit", ""), rows))
    return "\n\n".join(lines)


def _trip_table(trips: tuple[TripRow, ...]) -> str:
    rows = [
        (
            t.code,
            f"`{t.name}`",
            t.category,
            "yes" if t.count else "no",
            "yes" if t.guide else "no",
            t.cause,
            t.clears,
        )
        for t in trips
    ]
    return _table(("code", "name", "category", "count kept", "guide kept", "cause", "what clears it"), rows)


# ---------------------------------------------------------------- writing and checking

OUTPUTS: dict[Path, Callable[[Definition], str]] = {
    CODEC: python_codec,
    C_HEADER: c_codec.header,
    C_SOURCE: c_codec.source,
    VECTORS: vectors,
    SPECIFICATION: specification,
}


def stale(definition: Definition) -> list[Path]:
    """The generated files that do not hold what the definition says."""
    return [
        path
        for path, write in OUTPUTS.items()
        if not path.exists() or path.read_text(encoding="utf-8") != write(definition)
    ]


def main(arguments: list[str] | None = None) -> int:
    """Command line; returns the exit code."""
    parser = argparse.ArgumentParser(description="Write the protocol's generated files from messages.toml.")
    parser.add_argument("--check", action="store_true", help="only say which files are stale; exit 1 if any")
    check: bool = parser.parse_args(arguments).check
    definition = load(DEFINITION.read_text(encoding="utf-8"))
    behind = stale(definition)
    for path in behind:
        name = path.relative_to(HERE.parent).as_posix()
        if check:
            print(f"stale: {name} (run firmware_protocol/generate.py)", file=sys.stderr)
        else:
            path.write_text(OUTPUTS[path](definition), encoding="utf-8")
            print(f"wrote {name}", file=sys.stderr)
    return 1 if check and behind else 0


if __name__ == "__main__":
    sys.exit(main())
