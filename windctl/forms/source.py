"""The text of a file, or a plain reason why there is none."""

from __future__ import annotations

import codecs
from pathlib import Path

from windctl.errors import FileInvalid, Problem

# A hand-written form is a few kilobytes. The limit also ends the reading of a device or a pipe without end.
MAX_BYTES = 64 * 1024

_FOREIGN_MARKS = (codecs.BOM_UTF16_LE, codecs.BOM_UTF16_BE, codecs.BOM_UTF32_LE, codecs.BOM_UTF32_BE)


def read_text(path: Path, error: type[FileInvalid], max_bytes: int = MAX_BYTES) -> str:
    """The file's text, which is UTF-8. Raises `error` with one problem when it cannot be had."""
    file = str(path)
    try:
        with path.open("rb") as stream:
            content = stream.read(max_bytes + 1)
    except FileNotFoundError:
        reason = "there is no such file"
    except IsADirectoryError:
        reason = "is a folder, not a file"
    except PermissionError:
        reason = "is a folder, not a file" if path.is_dir() else "may not be read by this user"
    except (OSError, ValueError) as failure:  # ValueError: a zero character in the name
        reason = f"cannot be read: {getattr(failure, 'strerror', None) or failure}"
    else:
        return text_of(content, file, error, max_bytes)
    raise error([Problem(file, 0, 0, reason)])


def text_of(content: bytes, file: str, error: type[FileInvalid], max_bytes: int = MAX_BYTES) -> str:
    """The bytes as text. Raises `error` when they are too many, or not UTF-8 text."""
    if len(content) > max_bytes:
        raise error([Problem(file, 0, 0, f"is larger than {max_bytes // 1024} KiB, which no such file is")])
    if content.startswith(_FOREIGN_MARKS):
        raise error([Problem(file, 1, 1, "is text in UTF-16 or UTF-32; save it as UTF-8")])
    if b"\0" in content:
        raise error([Problem(file, *_line_and_column(content, content.index(b"\0")), "is not a text file")])
    try:
        return content.decode("utf-8")
    except UnicodeDecodeError as failure:
        place = _line_and_column(content, failure.start)
        byte = content[failure.start]
        raise error(
            [Problem(file, *place, f"is not UTF-8 text: byte 0x{byte:02x}; save it as UTF-8")]
        ) from None


def _line_and_column(content: bytes, at: int) -> tuple[int, int]:
    """Column in characters where what stands before is UTF-8."""
    before = content[:at].rpartition(b"\n")[2].decode("utf-8", errors="replace")
    return content.count(b"\n", 0, at) + 1, len(before) + 1
