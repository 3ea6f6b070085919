"""TOML text to a validated form, or every problem of the text with its line and column."""

from __future__ import annotations

import re
import tomllib
from collections.abc import Iterator, Mapping
from typing import Any, TypeVar

from pydantic import ValidationError

from windctl.errors import FileInvalid, Problem
from windctl.forms.faults import Fault, KeyPath, KeysDisagreeError, dotted, shorten
from windctl.forms.form import Form
from windctl.forms.messages import fault_of, form_in
from windctl.forms.positions import Place, Spot, find_positions

M = TypeVar("M", bound=Form)

_PARSER_PLACE = re.compile(
    r"(?P<what>.*) \(at (?:line (?P<line>\d+), column (?P<column>\d+)|end of document)\)"
)
# A dotted key of thousands of parts costs the parser and the scanner the square of that in time and memory.
_DEEP_KEY = re.compile(
    r"""(?:^|[\[{,])[ \t]*+(?:(?:[A-Za-z0-9_-]++|"(?:\\.|[^"\\\n])*+"|'[^'\n]*+')[ \t]*+\.[ \t]*+){40}""",
    re.MULTILINE,
)
_NUMBER_BEFORE = re.compile(r"=[ \t]*([-+]?\d[\d.]*)[ \t]*$")
_COMMA_PART = re.compile(r",(\d+)[ \t]*(?:#.*)?$")
_UNIT = re.compile(r"[A-Za-z°%][A-Za-z0-9°%/]*")
_LONG_NUMBER = re.compile(r"[0-9_]{4000,}")


def load_form(text: str, file: str, model: type[M], error: type[FileInvalid]) -> M:
    """The form that the text describes. Raises `error` with all its problems, in the file's order.

    `file` is only a name for the messages. Nothing else is raised, whatever the text.
    """
    data, places = parsed(text, file, error)
    try:
        return model.model_validate(data)
    except ValidationError as invalid:
        faults = all_faults(invalid, model, data)
    raise error(sorted((_problem(fault, places, file) for fault in faults), key=_order))


def parsed(text: str, file: str, error: type[FileInvalid]) -> tuple[dict[str, Any], Mapping[KeyPath, Place]]:
    """What a TOML text holds, and where. Raises `error` with the one problem of a text that is none."""
    if not text.strip():
        raise error([Problem(file, 0, 0, "is empty")])
    if text.startswith("\ufeff"):
        raise error(
            [Problem(file, 1, 1, "begins with a byte order mark; save it as plain UTF-8 without one")]
        )
    if deep := _DEEP_KEY.search(text):
        spot = _spot_at(text, deep.start())
        raise error([Problem(file, spot.line, spot.column, "is a key of more than 40 parts")])
    try:
        text.encode()
        return tomllib.loads(text), find_positions(text)
    except UnicodeEncodeError as failure:
        spot = _spot_at(text, failure.start)
        raise error([Problem(file, spot.line, spot.column, "is not a character of UTF-8 text")]) from None
    except tomllib.TOMLDecodeError as broken:
        raise error([_broken(broken, text, file)]) from None
    except ValueError:  # the only other one: an integer with more digits than Python converts
        match = _LONG_NUMBER.search(text)
        spot = _spot_at(text, match.start() if match else 0)
        raise error([Problem(file, spot.line, spot.column, "is a number with far too many digits")]) from None
    except RecursionError:
        raise error([Problem(file, 0, 0, "has tables or arrays nested too deeply")]) from None


def all_faults(invalid: ValidationError, model: type[Form], data: Mapping[str, Any]) -> list[Fault]:
    """What pydantic found, and what the checks across keys find among the values that are valid on their own.

    Pydantic runs those checks only on a table without any other error, and those across tables only when all
    tables are in order; a winder wants to hear everything at once.
    """
    faults: list[Fault] = []
    bad: set[KeyPath] = set()
    for entry in invalid.errors(include_url=False):
        cause = entry.get("ctx", {}).get("error")
        if isinstance(cause, KeysDisagreeError):
            faults += [_under(tuple(entry["loc"]), fault) for fault in cause.faults]
        else:
            faults.append(fault_of(entry, model))
            bad.add(tuple(entry["loc"]))
    faults += _checked(_partial(model, data, bad, ()), ())
    return list(dict.fromkeys(faults))


def _under(base: KeyPath, fault: Fault) -> Fault:
    return Fault((*base, *fault.path), fault.text, fault.missing, fault.at_key)


def _partial(model: type[Form], data: Mapping[str, Any], bad: set[KeyPath], base: KeyPath) -> Form:
    """An unvalidated instance in which exactly the keys that are wrong themselves are unset."""
    values: dict[str, Any] = {}
    unset: list[str] = []
    for name, field in model.model_fields.items():
        path = (*base, name)
        inner = form_in(field.annotation)
        if path in bad:
            unset.append(name)
        elif name in data and inner is not None:
            values[name] = _partial(inner, data[name], bad, path)
        elif name in data:
            values[name] = data[name]
    partial = model.model_construct(**values)
    for name in unset:
        partial.__dict__.pop(name, None)
    return partial


def _checked(partial: Form, base: KeyPath) -> Iterator[Fault]:
    for name, value in partial.__dict__.items():
        if isinstance(value, Form):
            yield from _checked(value, (*base, name))
    for fault in partial.faults(partial=True):
        yield _under(base, fault)


def _problem(fault: Fault, places: Mapping[KeyPath, Place], file: str) -> Problem:
    """A missing key is placed at its table, a wrong key at itself, anything else at the value."""
    path = fault.path[:-1] if fault.missing else fault.path
    while path and path not in places:
        path = path[:-1]
    place = places.get(path, Place(Spot(1, 1), Spot(1, 1)))
    spot = place.key if fault.missing or fault.at_key else place.value
    return Problem(file, spot.line, spot.column, f"{dotted(fault.path)} {fault.text}")


def _order(problem: Problem) -> tuple[int, int, str]:
    return problem.line, problem.column, problem.text


def _broken(broken: tomllib.TOMLDecodeError, text: str, file: str) -> Problem:
    match = _PARSER_PLACE.fullmatch(str(broken))
    if match is None:
        return Problem(file, 0, 0, f"is not valid TOML: {shorten(str(broken), 120)}")
    spot = Spot(int(match["line"]), int(match["column"])) if match["line"] else _spot_at(text, len(text))
    what = shorten(match["what"], 120)
    return Problem(file, spot.line, spot.column, f"is not valid TOML: {_likely(text, spot) or what}")


def _likely(text: str, spot: Spot) -> str | None:
    """The slip that people make where the parser only finds that the line should have ended."""
    lines = text.split("\n")
    line = lines[spot.line - 1] if spot.line <= len(lines) else ""
    before, after = _NUMBER_BEFORE.search(line[: spot.column - 1]), line[spot.column - 1 :]
    if before is None:
        return None
    if comma := _COMMA_PART.match(after):
        return f"the decimal sign is a point: {before[1]}.{comma[1]}"
    if unit := _UNIT.match(after):
        return f"a number stands alone, its unit is in the key's name: {before[1]}, without {unit[0]}"
    return None


def _spot_at(text: str, at: int) -> Spot:
    start = text.rfind("\n", 0, at) + 1
    return Spot(text.count("\n", 0, at) + 1, at - start + 1)
