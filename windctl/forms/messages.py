"""What a validation error says to a winder: the value, the limit and the unit."""

from __future__ import annotations

import datetime
import difflib
import math
import re
from collections.abc import Iterable, Iterator, Mapping
from typing import Any, get_args

from pydantic.fields import FieldInfo
from pydantic_core import ErrorDetails

from windctl.forms.faults import Fault, KeyPath, dotted, shorten
from windctl.forms.form import Form

_LONGEST_INTEGER = 10**18

_LIMITS = {
    "greater_than": ("gt", "must be more than"),
    "greater_than_equal": ("ge", "must be at least"),
    "less_than": ("lt", "must be less than"),
    "less_than_equal": ("le", "must be at most"),
}


def fault_of(error: ErrorDetails, model: type[Form]) -> Fault:
    """One of pydantic's errors in the tool's own words."""
    path: KeyPath = tuple(error["loc"])
    kind, context = error["type"], error.get("ctx", {})
    if kind == "extra_forbidden":
        return Fault(path, _unknown_key(path, error["input"], model), at_key=True)
    field = field_at(model, path)
    if kind == "missing":
        return Fault(path, _missing(path, field), missing=True)
    unit = unit_of(field)
    value = _show(error["input"], unit)
    if kind in _LIMITS:
        key, words = _LIMITS[kind]
        limit = context[key]
        if path == ("format",):
            words = "must be"  # only one version exists
        return Fault(path, f"is {value}, {words} {_show(limit, unit)}")
    text = _wrong_type(kind, value, error["input"], unit)
    meaning = field.description if field is not None and field.description else "its form"
    return Fault(path, text or _wrong_text(kind, value, error, meaning))


def _wrong_type(kind: str, value: str, given: object, unit: str) -> str | None:
    needed = {
        "float_type": f"a number in {unit}" if unit else "a number",
        "int_type": f"a whole number of {unit}" if unit else "a whole number",
        "bool_type": "true or false",
        "string_type": "a text in quotes",
        "model_type": "a table",
    }.get(kind)
    if needed is None:
        return None
    if kind == "int_type" and isinstance(given, float):
        return f"is {given!r}, where {needed} is needed"  # with its point: that is what is wrong
    unquote = kind in ("float_type", "int_type", "bool_type") and isinstance(given, str)
    return f"is {value}, where {needed} is needed" + ("; write it without quotes" if unquote else "")


def _wrong_text(kind: str, value: str, error: ErrorDetails, meaning: str) -> str:
    context = error.get("ctx", {})
    if kind == "literal_error":
        choices = re.findall(r"'([^']*)'", str(context["expected"]))
        near = nearest(str(error["input"]), choices) if isinstance(error["input"], str) else None
        hint = f'; did you mean "{near}"?' if near else ""
        return f"is {value}, must be " + " or ".join(f'"{choice}"' for choice in choices) + hint
    if kind == "finite_number":
        return f"is {value}, which is not a finite number"
    if kind == "string_too_long":
        return f"has {len(str(error['input']))} characters, at most {context['max_length']} are allowed"
    if kind == "string_pattern_mismatch":
        return f"is {value}, which does not fit: {meaning}"
    if kind in ("text_empty", "text_control"):
        return error["msg"]
    return f"is {value}: {error['msg']}"


def _missing(path: KeyPath, field: FieldInfo | None) -> str:
    if field is not None and form_in(field.annotation) is not None:
        return f"is missing; the table [{dotted(path)}] is needed"
    meaning = field.description if field is not None else None
    return f"is missing: {_in_a_sentence(meaning)}" if meaning else "is missing"


def _in_a_sentence(meaning: str) -> str:
    """A key's description without its own full stop, and its capital where that is only the beginning's."""
    small = meaning[:1].lower() if meaning[1:2].islower() else meaning[:1]
    return f"{small}{meaning[1:]}".removesuffix(".")


def _unknown_key(path: KeyPath, value: object, model: type[Form]) -> str:
    *parents, name = path
    table = form_at(model, tuple(parents)) or model
    where = f"a key of [{dotted(tuple(parents))}]" if parents else "a key or table of this form"
    near = nearest(str(name), table.model_fields)
    if near is not None:
        return f"is not {where}; did you mean {near}?"
    elsewhere = [dotted(home) for home in _homes_of(str(name), model) if not isinstance(value, Mapping)]
    if elsewhere:
        return f"is not {where}; it belongs at {' or '.join(elsewhere)}"
    return f"is not {where}; known are {', '.join(table.model_fields)}"


def nearest(name: str, known: Iterable[str]) -> str | None:
    """The known name that this one is most likely a slip of, or None."""
    matches = difflib.get_close_matches(name[:80].lower(), list(known), n=1, cutoff=0.7)
    return matches[0] if matches else None


def _homes_of(name: str, model: type[Form], base: KeyPath = ()) -> Iterator[KeyPath]:
    for key, field in model.model_fields.items():
        if key == name:
            yield (*base, key)
        inner = form_in(field.annotation)
        if inner is not None:
            yield from _homes_of(name, inner, (*base, key))


def form_in(annotation: Any) -> type[Form] | None:
    """The form that a field's annotation names, also in `Form | None`."""
    for kind in (annotation, *get_args(annotation)):
        if isinstance(kind, type) and issubclass(kind, Form):
            return kind
    return None


def form_at(model: type[Form], path: KeyPath) -> type[Form] | None:
    """The form of the table at this path."""
    table: type[Form] | None = model
    for part in path:
        field = table.model_fields.get(str(part)) if table is not None else None
        table = form_in(field.annotation) if field is not None else None
    return table


def field_at(model: type[Form], path: KeyPath) -> FieldInfo | None:
    """The field that describes the key at this path."""
    if not path:
        return None
    table = form_at(model, path[:-1])
    return table.model_fields.get(str(path[-1])) if table is not None else None


def unit_of(field: FieldInfo | None) -> str:
    """The unit in a field's metadata, or an empty text."""
    extra = field.json_schema_extra if field is not None else None
    return str(extra.get("unit", "")) if isinstance(extra, dict) else ""


def _show(value: object, unit: str) -> str:
    """A value as the file has it, a number with its unit; tables and arrays are not spelled out."""
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, int) and abs(value) >= _LONGEST_INTEGER:
        return "a number of more than 18 digits"
    if isinstance(value, int | float):
        return f"{_number(value)} {unit}" if unit and math.isfinite(value) else _number(value)
    if isinstance(value, str):
        return f'"{shorten(value)}"'
    if isinstance(value, datetime.date | datetime.time):
        return f"the date or time {value.isoformat()}"
    return "an array" if isinstance(value, list) else "a table"


def _number(value: float) -> str:
    """A number as a person writes it."""
    if isinstance(value, float) and value.is_integer() and abs(value) < _LONGEST_INTEGER:
        return f"{value:.0f}"
    return repr(value)
