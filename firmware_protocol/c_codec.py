"""The board's codec in C99, for the firmware's core: written by generate.py, which see.

Bodies are packed and unpacked by byte shifts, never by laying a struct over bytes; tables are read through
the core's seam for program memory. A linker that collects sections drops what a port does not use.
"""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from generate import Definition, Field, Message

C_TYPE = {"u8": "uint8_t", "u16": "uint16_t", "u32": "uint32_t", "i16": "int16_t", "i32": "int32_t"}
UNSIGNED = {"i16": "u16", "i32": "u32"}
LINE = 114  # columns

HEAD = """\
/* Every message of the board protocol. Generated from messages.toml by generate.py; do not edit.
 *
 * A body is fixed in length, little endian. Units and meanings stand beside the fields. */
#ifndef WINDCTL_MESSAGES_H
#define WINDCTL_MESSAGES_H

#include <stdint.h>

"""

PLAIN = """
/* Unsigned integers in a body. */
uint16_t windctl_get_u16(const uint8_t *at);
uint32_t windctl_get_u32(const uint8_t *at);
void windctl_put_u16(uint8_t *at, uint16_t value);
void windctl_put_u32(uint8_t *at, uint32_t value);

/* Bytes in the body of a message of this code, or WINDCTL_NO_SUCH_CODE. */
#define WINDCTL_NO_SUCH_CODE 0xFF
uint8_t windctl_body_size(uint8_t code);

/* Whether a message to the board can move something or widen a limit: its body begins with boot and epoch. */
uint8_t windctl_moves_something(uint8_t code);

/* A trip's IEC 60204-1 stop category: 0, 1 or 2. A code that is no trip is category 1. */
uint8_t windctl_trip_category(uint8_t trip);

/* Bits of WINDCTL_TRUST_... that may still be trusted after a trip. After what is no trip: none. */
uint8_t windctl_trip_trust(uint8_t trip);
"""

SOURCE_HEAD = """\
/* The codec of the board protocol. Generated from messages.toml by generate.py; do not edit. */
#include "windctl_messages.h"

#include "windctl_seams.h"

uint16_t windctl_get_u16(const uint8_t *at)
{
    return (uint16_t)(at[0] | (uint16_t)at[1] << 8);
}

uint32_t windctl_get_u32(const uint8_t *at)
{
    return windctl_get_u16(at) | (uint32_t)windctl_get_u16(at + 2) << 16;
}

void windctl_put_u16(uint8_t *at, uint16_t value)
{
    at[0] = (uint8_t)value;
    at[1] = (uint8_t)(value >> 8);
}

void windctl_put_u32(uint8_t *at, uint32_t value)
{
    windctl_put_u16(at, (uint16_t)value);
    windctl_put_u16(at + 2, (uint16_t)(value >> 16));
}
"""


def header(definition: Definition) -> str:
    """The text of core/windctl_messages.h."""
    parts = [
        HEAD,
        f"#define WINDCTL_PROTOCOL {definition.protocol}\n",
        "/* CRC-32 of what both sides must agree on; Greet and Identity compare it. */\n",
        f"#define WINDCTL_SCHEMA UINT32_C(0x{definition.schema:08X})\n",
        f"#define WINDCTL_SEGMENTS_PER_LAY {definition.segments}\n",
        f"#define WINDCTL_BODY_LIMIT {definition.body_limit} /* bytes */\n",
    ]
    for name, values in definition.enums():
        members = ",\n".join(f"    WINDCTL_{_upper(name)}_{key.upper()} = {value}" for key, value in values)
        parts.append(f"\nenum {{ /* {name} */\n{members}\n}};\n")
    parts.append(PLAIN)
    for message in definition.messages:
        parts.append(_declaration(message))
    parts.append("\n#endif\n")
    return "".join(parts)


def source(definition: Definition) -> str:
    """The text of core/windctl_messages.c."""
    parts = [SOURCE_HEAD, *_tables(definition)]
    for message in definition.messages:
        if message.fields:
            parts.append(_decoder(message))
            parts.append(_encoder(message))
    return "".join(parts)


def _snake(name: str) -> str:
    return re.sub(r"(?<=[a-z])(?=[A-Z])", "_", name).lower()


def _upper(name: str) -> str:
    return _snake(name).upper()


def _declaration(message: Message) -> str:
    name, upper = _snake(message.name), _upper(message.name)
    way = "host to board" if message.to == "board" else "board to host"
    lines = ["", *_comment(f"{message.name}, {way}. {message.about}")]
    lines.append(f"#define WINDCTL_{upper}_CODE 0x{message.code:02X}")
    lines.append(f"#define WINDCTL_{upper}_SIZE {message.size}")
    if message.fields:
        lines.append(f"struct windctl_{name} {{")
        for field in message.fields:
            lines.extend(_member(field))
        lines.append("};")
        lines.append(f"void windctl_decode_{name}(const uint8_t *body, struct windctl_{name} *message);")
        lines.append(f"void windctl_encode_{name}(const struct windctl_{name} *message, uint8_t *body);")
    return "\n".join(lines) + "\n"


def _member(field: Field) -> list[str]:
    note = ": ".join(part for part in (field.unit, field.about) if part)
    if field.type == "segments":
        declared = f"const uint8_t *{field.name};"
        note = "packed as in the body, which it points into"
    else:
        declared = f"{C_TYPE[field.type]} {field.name};"
    if not note:
        return [f"    {declared}"]
    if len(declared) + len(note) + 11 <= LINE:
        return [f"    {declared} /* {note} */"]
    return [*_comment(note, "    "), f"    {declared}"]


def _comment(text: str, indent: str = "") -> list[str]:
    lines: list[str] = []
    line = "/*"
    for word in text.split(" "):
        if len(indent) + len(line) + 1 + len(word) + 3 > LINE:
            lines.append(indent + line)
            line = " *"
        line += f" {word}"
    return [*lines, f"{indent}{line} */"]


def _tables(definition: Definition) -> list[str]:
    to_board = {m.code: m for m in definition.messages if m.to == "board"}
    to_host = {m.code: m for m in definition.messages if m.to == "host"}
    last_board, last_host = max(to_board), max(to_host)
    board_sizes = [to_board[c].size if c in to_board else 0xFF for c in range(last_board + 1)]
    host_sizes = [to_host[c].size if c in to_host else 0xFF for c in range(0x80, last_host + 1)]
    moves = [int(c in to_board and to_board[c].moves) for c in range(last_board + 1)]
    count, guide = definition.tables["trust"]["count"], definition.tables["trust"]["guide"]
    trips = {t.code: t for t in definition.trips}
    codes = range(max(trips) + 1)
    categories = [trips[c].category if c in trips else 1 for c in codes]
    trust = [(count * trips[c].count | guide * trips[c].guide) if c in trips else 0 for c in codes]
    return [
        _table("sizes_to_board", board_sizes, "by code"),
        _table("sizes_to_host", host_sizes, "by code less 0x80"),
        _table("moving", moves, "by code"),
        _table("categories", categories, "by trip"),
        _table("trust", trust, "by trip"),
        _function(
            "windctl_body_size",
            "code",
            [
                "    if (code & 0x80) {",
                "        code = (uint8_t)(code - 0x80);",
                "        return code < sizeof sizes_to_host ? WINDCTL_ROM_U8(&sizes_to_host[code]) : "
                "WINDCTL_NO_SUCH_CODE;",
                "    }",
                "    return code < sizeof sizes_to_board ? WINDCTL_ROM_U8(&sizes_to_board[code]) : "
                "WINDCTL_NO_SUCH_CODE;",
            ],
        ),
        _function(
            "windctl_moves_something",
            "code",
            ["    return code < sizeof moving ? WINDCTL_ROM_U8(&moving[code]) : 0;"],
        ),
        _function(
            "windctl_trip_category",
            "trip",
            ["    return trip < sizeof categories ? WINDCTL_ROM_U8(&categories[trip]) : 1;"],
        ),
        _function(
            "windctl_trip_trust",
            "trip",
            ["    return trip < sizeof trust ? WINDCTL_ROM_U8(&trust[trip]) : 0;"],
        ),
    ]


def _table(name: str, values: list[int], by: str) -> str:
    return f"\n/* {by} */\nstatic const uint8_t {name}[] WINDCTL_ROM = {{{', '.join(map(str, values))}}};\n"


def _function(name: str, argument: str, body: list[str]) -> str:
    text = "\n".join(body)
    return f"\nuint8_t {name}(uint8_t {argument})\n{{\n{text}\n}}\n"


def _decoder(message: Message) -> str:
    name = _snake(message.name)
    lines = ["", f"void windctl_decode_{name}(const uint8_t *body, struct windctl_{name} *message)", "{"]
    for field, at in _places(message):
        place = f"body + {at}" if at else "body"
        if field.type == "segments":
            value = place
        elif field.type == "u8":
            value = f"body[{at}]"
        elif field.type in UNSIGNED:
            value = f"({C_TYPE[field.type]})windctl_get_{UNSIGNED[field.type]}({place})"
        else:
            value = f"windctl_get_{field.type}({place})"
        lines.append(f"    message->{field.name} = {value};")
    return "\n".join([*lines, "}", ""])


def _encoder(message: Message) -> str:
    name = _snake(message.name)
    lines = ["", f"void windctl_encode_{name}(const struct windctl_{name} *message, uint8_t *body)", "{"]
    statements: list[str] = []
    for field, at in _places(message):
        place = f"body + {at}" if at else "body"
        value = f"message->{field.name}"
        if field.type == "segments":
            lines += ["    uint8_t place;", ""]
            statements.append(f"    for (place = 0; place < {field.size}; place++) {{")
            statements += [f"        body[{at} + place] = {value}[place];", "    }"]
        elif field.type == "u8":
            statements.append(f"    body[{at}] = {value};")
        else:
            plain = UNSIGNED.get(field.type, field.type)
            cast = f"({C_TYPE[plain]})" if field.type in UNSIGNED else ""
            statements.append(f"    windctl_put_{plain}({place}, {cast}{value});")
    return "\n".join([*lines, *statements, "}", ""])


def _places(message: Message) -> list[tuple[Field, int]]:
    at, places = 0, []
    for field in message.fields:
        places.append((field, at))
        at += field.size
    return places
