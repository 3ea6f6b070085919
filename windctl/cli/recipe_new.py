"""`windctl recipe new`: a few questions, and a recipe file with a comment on every line."""

from __future__ import annotations

import sys
from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING, Any, Literal

import click

from windctl.cli import present, typed
from windctl.errors import UsageError, WindctlError

if TYPE_CHECKING:
    from windctl.cli.options import Shared
    from windctl.plan.draft import Answers

_WAYS = {"cw": "cw", "clockwise": "cw", "ccw": "ccw", "counter-clockwise": "ccw", "anticlockwise": "ccw"}
_STYLES = {"scatter": "scatter", "s": "scatter", "even": "even", "e": "even"}


def write_new(shared: Shared, file: Path) -> None:
    """Ask, write `file`, say what the coil will be. Raises UsageError where nobody can answer or the file is
    there already; nothing is written before the last answer, and nothing that is no good recipe."""
    from windctl.plan.draft import draft
    from windctl.recipe.load import parse_recipe

    if shared.no_input:
        raise UsageError("recipe new asks; with --no-input, copy one of the ready recipes and change it")
    if file.exists():
        raise UsageError(f"{file} is there already: name another file")
    answers = _asked()
    try:
        text = draft(answers)
    except ValueError as error:
        raise UsageError(f"these answers make no recipe: {error}") from error
    recipe = parse_recipe(text, str(file))
    _write(file, text)
    if shared.json:
        present.result_json({"file": str(file), "name": recipe.name, "digest": recipe.digest})
    else:
        present.result(f"{file}: {recipe.name}, {present.short_digest(recipe.digest)}")
        present.message(f"next: windctl plan {file}")


def _write(file: Path, text: str) -> None:
    """The whole text in a new file, or no file."""
    try:
        with file.open("x", encoding="utf-8") as stream:
            try:
                stream.write(text)
                stream.flush()
            except OSError:
                file.unlink()
                raise
    except FileExistsError:
        raise UsageError(f"{file} is there already: name another file") from None
    except OSError as error:
        raise WindctlError(f"{file} cannot be written: {error.strerror or error}") from error


def _asked() -> Answers:
    """The answers, each one asked for again until it can be right."""
    from windctl.plan.draft import Answers
    from windctl.recipe.tables import LONGEST_MM

    present.message(
        "Lengths in mm; either decimal sign will do. An empty answer takes what stands in brackets."
    )
    name = _ask("What the coil is called", _name)
    length = _ask("Core: outside length, mm", _length(LONGEST_MM))
    width = _ask("Core: outside width, mm", _length(length, "the core's length"))
    gap = _ask("Free height between the flanges, mm", _length(LONGEST_MM))
    depth = _ask("Flange depth, core to edge, mm", _length(LONGEST_MM))
    way = _ask("Wire's way round, seen from the strings (cw, ccw)", _one_of(_WAYS), "cw")
    size = _ask("Bare wire: number or mm (AWG 42, 0.063)", _size)
    overall = _ask("Over the enamel, mm (or grade 1)", _overall(size), "grade 1")
    style = _ask("Lay (scatter, even)", _one_of(_STYLES), "scatter")
    target, amount = _ask("Target: turns (8000) or resistance at 20 °C (5.9k, 5900 ohm)", _target)
    return Answers(name, length, width, gap, depth, way, size, overall, style, target, amount)


def _ask(question: str, understood: Callable[[str], Any], default: str | None = None) -> Any:
    def proc(answer: str) -> Any:
        try:
            return understood(answer.strip())
        except ValueError as error:
            raise click.UsageError(str(error)) from None

    try:
        return click.prompt(
            present.writable(question, sys.stderr), default=default, value_proc=proc, err=True
        )
    except click.Abort:
        if sys.stdin is not None and sys.stdin.isatty():
            raise
        raise UsageError(f"the answers ended before this question: {question}") from None


def _name(answer: str) -> str:
    if not answer or len(answer) > 80 or not answer.isprintable():
        raise ValueError("a name has 1 to 80 printable characters")
    return answer


def _length(most: float, what: str = "") -> Callable[[str], float]:
    def understood(answer: str) -> float:
        value = _number(answer)
        if not 0 < value <= most:
            limit = f"{what}, {most:g} mm" if what else f"{most:g} mm"
            raise ValueError(f"{answer} mm: it must be more than 0 mm and at most {limit}")
        return value

    return understood


def _number(answer: str) -> float:
    try:
        return float(answer.replace(",", "."))
    except ValueError:
        raise ValueError(f"{answer!r} is not a number") from None


def _one_of(known: dict[str, str]) -> Callable[[str], str]:
    def understood(answer: str) -> str:
        if answer.lower() not in known:
            raise ValueError(f"{answer!r} is none of {', '.join(dict.fromkeys(known.values()))}")
        return known[answer.lower()]

    return understood


def _size(answer: str) -> str:
    """A gauge by its name, or a bare diameter in mm."""
    from windctl.material.wire import bare_mm_of

    try:
        value = float(answer.replace(",", "."))
    except ValueError:
        pass
    else:
        if not 0.01 <= value <= 1:
            raise ValueError(f"{answer} mm bare: it must be from 0.01 to 1 mm; a number is written AWG 42")
        return repr(value)
    try:
        bare_mm_of(answer, None)
    except ValueError as error:
        raise ValueError(f"{answer!r}: {error}") from None
    return answer


def _overall(size: str) -> Callable[[str], float | None]:
    def understood(answer: str) -> float | None:
        from windctl.material.enamel import increase_mm
        from windctl.material.wire import bare_mm_of

        by_gauge = not size[0].isdigit()
        bare = bare_mm_of(size, None) if by_gauge else float(size)
        if answer.lower() == "grade 1":
            increase_mm(bare, "grade 1")
            return None
        value = _number(answer)
        if not bare <= value <= 1.2:
            raise ValueError(f"{answer} mm: it must be from the bare {bare:.4g} mm to 1.2 mm")
        return value

    return understood


def _target(answer: str) -> tuple[Literal["turns", "dcr_20c_ohm"], float]:
    from windctl.recipe.tables import MOST_TURNS

    if answer.replace(" ", "").isdecimal():
        turns = int(answer.replace(" ", ""))
        if not 1 <= turns <= MOST_TURNS:
            raise ValueError(f"{answer} turns: it must be from 1 to {MOST_TURNS} turns")
        return "turns", float(turns)
    return "dcr_20c_ohm", typed.parse_ohm(answer)
