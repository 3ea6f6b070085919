"""Every key of a form with everything that can be wrong with one: the text, and what must be said of it.

The limits are written down here once more, by hand, from the outward forms: a test of a form against itself
would find nothing.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Literal

Kind = Literal["number", "whole", "text", "flag", "choice"]


@dataclass(frozen=True)
class Key:
    """One key: its unit, and its limits as the file's author would say them ("more than" or "at least")."""

    name: str  # table.key
    kind: Kind
    good: str  # a value that goes with the sample
    unit: str = ""
    above: str = ""  # must be more than this
    least: str = ""
    most: str = ""
    choices: tuple[str, ...] = ()
    needs: tuple[str, ...] = ()  # lines that must stand in its table as well
    instead_of: tuple[str, ...] = ()  # keys of its table that it takes the place of

    @property
    def needed(self) -> str:
        """What the message says belongs there."""
        of = f" of {self.unit}" if self.unit else ""
        plain = f" in {self.unit}" if self.unit else ""
        return {
            "number": f"a number{plain}",
            "whole": f"a whole number{of}",
            "text": "a text in quotes",
            "flag": "true or false",
        }[self.kind]

    def with_unit(self, value: str) -> str:
        """The value as a message gives it."""
        return f"{value} {self.unit}" if self.unit else value


@dataclass(frozen=True)
class Case:
    """A spoilt text, the only problem it has, and a name for the test's report."""

    name: str
    text: str
    said: str  # line:column: message


def cases(sample: str, keys: Sequence[Key]) -> Iterator[Case]:
    """Every key of `keys` spoilt in every way that its kind knows, in a sample that is otherwise good."""
    for key in keys:
        for what, value, said in _wrong(key):
            text, line, column = placed(sample, key, value)
            yield Case(f"{key.name}-{what}", text, f"{line}:{column}: {key.name} {said}")


def placed(sample: str, key: Key, value: str) -> tuple[str, int, int]:
    """The sample with the key set to `value`, and where the value stands (line and column from 1)."""
    table, _, name = key.name.rpartition(".")
    lines = sample.splitlines()
    if table and f"[{table}]" not in lines:
        lines.append(f"[{table}]")
    start = lines.index(f"[{table}]") + 1 if table else 0
    end = next((at for at in range(start, len(lines)) if lines[at].startswith("[")), len(lines))
    leave_out = {name, *key.instead_of, *(need.split(" = ")[0] for need in key.needs)}
    inside = [line for line in lines[start:end] if line.split(" = ")[0] not in leave_out]
    inside += [*key.needs, f"{name} = {value}"]
    spoilt = [*lines[:start], *inside, *lines[end:]]
    return "\n".join(spoilt) + "\n", start + len(inside), len(f"{name} = ") + 1


def _wrong(key: Key) -> Iterator[tuple[str, str, str]]:
    """(what it is, the value as written, what must be said of it)."""
    if key.kind in ("number", "whole"):
        yield from _wrong_number(key)
        return
    if key.kind == "choice":
        allowed = " or ".join(f'"{choice}"' for choice in key.choices)
        yield "unheard of", '"qqqq"', f'is "qqqq", must be {allowed}'
        slip = key.choices[0][:-1] + key.choices[0][-1] * 2
        yield "slip", f'"{slip}"', f'is "{slip}", must be {allowed}; did you mean "{key.choices[0]}"?'
        yield "number", "7", f"is 7, must be {allowed}"
        yield "empty", '""', f'is "", must be {allowed}'
        return
    yield "number", "7", f"is 7, where {key.needed} is needed"
    yield "array", "[]", f"is an array, where {key.needed} is needed"
    if key.kind == "flag":
        unquote = "; write it without quotes"
        yield "text", '"true"', f'is "true", where {key.needed} is needed{unquote}'
    else:
        yield "flag", "true", f"is true, where {key.needed} is needed"
        yield "date", "2026-01-31", f"is the date or time 2026-01-31, where {key.needed} is needed"


def _wrong_number(key: Key) -> Iterator[tuple[str, str, str]]:
    needed = f"where {key.needed} is needed"
    yield "text", '"12"', f'is "12", {needed}; write it without quotes'
    yield "flag", "true", f"is true, {needed}"
    yield "array", "[1, 2]", f"is an array, {needed}"
    yield "table", "{ a = 1 }", f"is a table, {needed}"
    yield "date", "2026-01-31", f"is the date or time 2026-01-31, {needed}"
    if key.kind == "whole":
        yield "fraction", "2.5", f"is 2.5, {needed}"
        yield "not finite", "nan", f"is nan, {needed}"
    else:
        for value in ("nan", "inf", "-inf"):
            yield "not finite", value, f"is {value}, which is not a finite number"
    low = f"more than {key.with_unit(key.above)}" if key.above else f"at least {key.with_unit(key.least)}"
    below = "-1000000" if key.kind == "whole" else "-1e9"
    shown = "-1000000" if key.kind == "whole" else "-1000000000"
    yield "far below", below, f"is {key.with_unit(shown)}, must be {low}"
    if key.above == "0" or float(key.least or "0") > 0:
        yield "zero", "0", f"is {key.with_unit('0')}, must be {low}"
    absurd, shown = ("1" + "0" * 18, "a number of more than 18 digits") if key.kind == "whole" else ("", "")
    if key.kind == "number":
        absurd, shown = "1e12", key.with_unit("1000000000000")
    if float(absurd) > float(key.most):
        yield "absurd", absurd, f"is {shown}, must be at most {key.with_unit(key.most)}"
