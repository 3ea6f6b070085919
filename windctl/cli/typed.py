"""Values that people type: either decimal sign, `k` for thousand, and a guard against a slipped point."""

from __future__ import annotations

import math
import sys
from contextlib import suppress
from typing import Any

import click

from windctl.desk.figures import parse_ohm as parse_ohm
from windctl.errors import UsageError


class FiniteRange(click.FloatRange):
    """A number within limits. Click itself takes "nan" for one, which no limit keeps out."""

    name = "number"  # as a refusal calls it

    def convert(
        self, value: Any, param: click.Parameter | None, ctx: click.Context | None
    ) -> Any:  # as click's own
        number = super().convert(value, param, ctx)
        if isinstance(number, float) and not math.isfinite(number):
            self.fail(f"{value} is not a finite number.", param, ctx)
        return number


class WholeRange(click.IntRange):
    """A whole number within limits."""

    name = "whole number"


class Figure(FiniteRange):
    """The same as people write it: either decimal sign, and `k` for thousand behind it."""

    def convert(
        self, value: Any, param: click.Parameter | None, ctx: click.Context | None
    ) -> Any:  # as click's own
        if isinstance(value, str):
            value = value.strip().replace(",", ".")
            if value[-1:] in ("k", "K"):
                with suppress(ValueError):
                    value = repr(float(value[:-1]) * 1000.0)
        return super().convert(value, param, ctx)


def ohm_option(ctx: click.Context, param: click.Parameter, value: str | None) -> float | None:
    """Callback of an option that takes a resistance: ohm, or click's complaint about that option."""
    if value is None:
        return None
    try:
        return parse_ohm(value)
    except ValueError as error:
        raise click.BadParameter(str(error), ctx, param) from None


def slipped_thousand(value: float, expected: float) -> float | None:
    """What was probably meant, if `value` is about a thousand times off `expected` (> 0); else None."""
    for meant in (value * 1000, value / 1000):
        if 0.2 < meant / expected < 5:
            return meant
    return None


def may_ask(no_input: bool) -> bool:
    """Whether somebody sits at the terminal and has not asked to be left alone."""
    return not no_input and sys.stdin is not None and sys.stdin.isatty()


def confirm_ohm(value: float, expected: float, what: str, may_ask: bool) -> float:
    """`value`, or what was meant where it is a thousand times off and the operator says so.

    Raises UsageError where nobody can be asked.
    """
    meant = slipped_thousand(value, expected)
    if meant is None:
        return value
    slip = f"{what} of {value:g} ohm is about a thousand times off the expected {expected:.4g} ohm"
    if not may_ask:
        raise UsageError(f"{slip}; if {meant:g} ohm is meant, write that.")
    return meant if click.confirm(f"{slip}. Take {meant:g} ohm instead?", err=True) else value
