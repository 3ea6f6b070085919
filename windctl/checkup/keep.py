"""Calibrations into a profile's text: only the values change, everything else stays as it was written."""

from __future__ import annotations

import re
from collections.abc import Mapping

from windctl.forms.positions import find_positions

_LINE = re.compile(r"[^\n]*\n|[^\n]+")
_VALUE_ENDS = " \t\r\n,]}#"


def with_calibration(text: str, values: Mapping[str, float | int]) -> str:
    """The TOML `text` with these values, by dotted key such as `guide.backlash_mm`.

    A key that is there gets its value replaced; one that is missing is added under its table's header, and a
    missing table at the end. Raises ValueError where neither can be done without rewriting (an inline table),
    or no number stands there.
    """
    for path, value in values.items():
        text = _with_one(text, tuple(path.split(".")), repr(value))
    return text


def _with_one(text: str, path: tuple[str, ...], value: str) -> str:
    places = find_positions(text)
    lines = _LINE.findall(text)
    place = places.get(path)
    if place is not None:
        line = lines[place.value.line - 1]
        begin = place.value.column - 1
        if line[begin] in "\"'[{":
            raise ValueError(f"{'.'.join(path)} is no number; write {value} there by hand")
        end = begin
        while end < len(line) and line[end] not in _VALUE_ENDS:
            end += 1
        lines[place.value.line - 1] = line[:begin] + value + line[end:]
        return "".join(lines)
    *table, key = path
    name = ".".join(table)
    header = places.get(tuple(table)) if table else None
    if header is None:
        gap = "" if not text or text.endswith("\n") else "\n"
        return f"{text}{gap}\n[{name}]\n{key} = {value}\n"
    line = lines[header.key.line - 1]
    if line.lstrip().startswith("["):
        if not line.endswith("\n"):
            lines[header.key.line - 1] = line + "\n"
        lines.insert(header.key.line, f"{key} = {value}\n")
        return "".join(lines)
    if line[header.key.column - 1 :].startswith(f"{name}."):  # dotted keys: one more of them
        lines.insert(header.key.line - 1, f"{name}.{key} = {value}\n")
        return "".join(lines)
    raise ValueError(f"{name} is written as an inline table; write {name}.{key} = {value} into it by hand")
