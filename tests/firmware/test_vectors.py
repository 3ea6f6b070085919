"""The golden frames and worked cases of vectors.json in C: a program is written from them and run."""

from __future__ import annotations

import ctypes
import json
import re
import subprocess
from pathlib import Path
from typing import Any

from tests.firmware.build import ROOT, core_sources, includes, run
from tests.firmware.host_board import load
from windctl.protocol import messages as m
from windctl.protocol.frames import encode

VECTORS: dict[str, Any] = json.loads(
    (ROOT / "firmware_protocol" / "vectors.json").read_text(encoding="utf-8")
)

HEAD = """\
#include <stdio.h>
#include <string.h>

#include "windctl_board.h"

static int failures;

static void is_equal(const char *what, long long is, long long wanted)
{
    if (is != wanted) {
        printf("%s: %lld, not %lld\\n", what, is, wanted);
        failures++;
    }
}

static void is_body(const char *what, const uint8_t *is, const uint8_t *wanted, size_t size)
{
    is_equal(what, memcmp(is, wanted, size), 0);
}

static void guide_line(uint16_t counts, int16_t steps, const int *positions)
{
    static struct windctl_guide_line line;
    uint8_t packed[4];
    int32_t at = 0;
    uint16_t k;

    windctl_put_u16(packed, counts);
    windctl_put_u16(packed + 2, (uint16_t)steps);
    windctl_line_datum(&line, 1, 0, 0, 0);
    windctl_line_append(&line, 1, packed);
    for (k = 0; k <= counts; k++) {
        is_equal("guide line", at, positions[k]);
        at += windctl_line_follow(&line, k < counts);
    }
}

static void braking(uint16_t decel, uint32_t left, uint16_t pace)
{
    struct windctl_spindle spindle;

    memset(&spindle, 0, sizeof spindle);
    windctl_spindle_configure(&spindle, 1, 1, 65535, decel);
    windctl_spindle_set_pace(&spindle, 65535);
    windctl_spindle_set_out(&spindle, 0, (int32_t)left);
    spindle.v = pace > 30 ? (uint16_t)(pace - 30) : 0;
    windctl_spindle_step(&spindle, 0, 0);
    is_equal("braking", spindle.v, pace);
}
"""


def c_bytes(data: bytes) -> str:
    """A C initialiser."""
    return "{" + ", ".join(str(byte) for byte in data) + "}"


def c_number(value: int) -> str:
    """An integer constant of C, the smallest ones included."""
    return f"({value + 1} - 1)" if value == -(1 << 31) else f"{value}U" if value > 0x7FFFFFFF else str(value)


def codec_check(place: int, entry: dict[str, Any]) -> str:
    """A C function that packs one golden message, frames it, and takes both apart again."""
    name = re.sub(r"(?<=[a-z])(?=[A-Z])", "_", entry["message"]).lower()
    frame = bytes.fromhex(entry["frame"])
    size = m.MESSAGES[entry["code"]].SIZE
    lines = [
        f"static void check_{place}(void)",
        "{",
        f"    static const uint8_t frame[] = {c_bytes(frame)};",
        "    static struct windctl_reader reader;",
        "    uint8_t ring[WINDCTL_SENT_RING];",
        "    uint8_t body[WINDCTL_BODY_LIMIT] = {0};",
        "    size_t at;",
    ]
    if entry["fields"]:
        lines.append(f"    struct windctl_{name} message;")
    for field, value in entry["fields"].items():
        if isinstance(value, str):
            lines.append(f"    static const uint8_t {field}[] = {c_bytes(bytes.fromhex(value))};")
    for field, value in entry["fields"].items():
        given = field if isinstance(value, str) else c_number(value)
        lines.append(f"    message.{field} = {given};")
    if entry["fields"]:
        lines.append(f"    windctl_encode_{name}(&message, body);")
    lines += [
        f'    is_equal("{name} size", windctl_body_size({entry["code"]}), {size});',
        f'    is_equal("{name} length", (int)sizeof frame,',
        f"             windctl_write(ring, 0, {entry['code']}, {entry['sequence']}, body, {size}));",
        f'    is_body("{name} frame", ring, frame, sizeof frame);',
        "    for (at = 0; at + 1 < sizeof frame; at++) {",
        f'        is_equal("{name} too early", windctl_read(&reader, frame[at]), 0);',
        "    }",
        f'    is_equal("{name} read", windctl_read(&reader, 0), 1);',
        f'    is_equal("{name} code", reader.inside[0], {entry["code"]});',
        f'    is_equal("{name} sequence", reader.inside[1], {entry["sequence"]});',
        f'    is_equal("{name} body size", reader.size, {size});',
        f'    is_body("{name} body", reader.inside + 2, body, {size});',
    ]
    if entry["fields"]:
        lines.append("    memset(&message, 0, sizeof message);")
        lines.append(f"    windctl_decode_{name}(reader.inside + 2, &message);")
    for field, value in entry["fields"].items():
        if isinstance(value, str):
            lines.append(f'    is_body("{name} {field}", message.{field}, {field}, sizeof {field});')
        else:
            lines.append(f'    is_equal("{name} {field}", message.{field}, {c_number(value)});')
    return "\n".join([*lines, "}", ""])


def program() -> str:
    """The C program."""
    frames = VECTORS["frames"]
    calls = [f"    check_{place}();" for place in range(len(frames))]
    for row in VECTORS["guide_line"]:
        positions = ", ".join(map(str, row["positions"]))
        calls.append(
            f"    {{\n        static const int positions[] = {{{positions}}};\n"
            f"        guide_line({row['counts']}, {row['steps']}, positions);\n    }}"
        )
    calls += [f"    braking({r['decel']}, {r['left']}, {r['pace']});" for r in VECTORS["braking"]]
    checks = [codec_check(place, entry) for place, entry in enumerate(frames)]
    return "\n".join([HEAD, *checks, "int main(void)", "{", *calls, "    return failures > 0;", "}", ""])


def test_the_core_makes_and_takes_the_golden_frames_and_reproduces_the_worked_cases(
    cc: str, tmp_path: Path
) -> None:
    assert {entry["code"] for entry in VECTORS["frames"]} == set(m.MESSAGES)
    source = tmp_path / "vectors.c"
    source.write_text(program(), encoding="utf-8")
    run(
        cc, ["-std=c99", "-Wall", "-Werror", *includes(), "-o", tmp_path / "vectors", source, *core_sources()]
    )
    done = subprocess.run([tmp_path / "vectors"], capture_output=True, text=True, timeout=60, check=False)
    assert (done.returncode, done.stdout) == (0, "")


def test_the_check_would_notice(cc: str, tmp_path: Path) -> None:
    source = tmp_path / "vectors.c"
    wrong = program().replace("message.max_pace = 0;", "message.max_pace = 1;", 1)
    assert wrong != program()
    source.write_text(wrong, encoding="utf-8")
    run(cc, ["-std=c99", *includes(), "-o", tmp_path / "vectors", source, *core_sources()])
    done = subprocess.run([tmp_path / "vectors"], capture_output=True, text=True, timeout=60, check=False)
    assert done.returncode == 1
    assert "setup frame" in done.stdout


def test_checksum_and_stuffing_as_published(cc: str) -> None:
    library = load()
    library.windctl_crc_over.argtypes = [ctypes.c_uint16, ctypes.c_char_p, ctypes.c_uint8]
    library.windctl_crc_over.restype = ctypes.c_uint16
    # CRC-16/IBM-3740: check value of the catalogue of parametrised CRC algorithms.
    assert library.windctl_crc_over(0xFFFF, b"123456789", 9) == 0x29B1
    # The example packet of Cheshire and Baker 1999. A frame goes on with its CRC: the last block is longer.
    packet = bytes.fromhex("4500002C4C79000040064F37")
    published = bytes.fromhex("024501042C4C790105 40064F37")
    frame = ctypes.create_string_buffer(66)
    library.windctl_host_frame(packet[0], packet[1], packet[2:], len(packet) - 2, frame)
    assert frame.raw[:8] == published[:8]
    assert frame.raw[8] == published[8] + 2
    assert frame.raw[9:13] == published[9:]


def test_a_frame_of_each_length_is_what_the_python_side_makes(cc: str) -> None:
    library = load()
    frame = ctypes.create_string_buffer(66)
    for size in range(m.BODY_LIMIT + 1):
        for fill in (0, 1, 255):
            body = bytes((k * fill) & 0xFF for k in range(size))
            length = library.windctl_host_frame(0x33, size, body, size, frame)
            assert frame.raw[:length] == encode(0x33, size, body)
