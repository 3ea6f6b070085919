"""How numbers are written for people.

A number keeps as many digits as its uncertainty carries meaning (two significant ones); resistances of
1000 ohm and more are written in kohm, as meters show them. Thousands are parted by a space, never by a sign
that could be a decimal one.
"""

from __future__ import annotations

import math


def grouped(value: float, decimals: int = 0) -> str:
    """`7946.25` to `7 946.2` with one decimal; a rounded zero has no sign."""
    text = f"{value:,.{decimals}f}".replace(",", " ")
    return text[1:] if text.startswith("-") and not text.strip("-0. ") else text


def with_uncertainty(value: float, half_width: float, unit: str, most_decimals: int = 9) -> str:
    """`7.946 ± 0.031 kohm`: the half-width to two significant digits, the value to the same place.

    `unit` "ohm" becomes "kohm" from 1000 on. A half-width that is not positive and finite is left out.
    """
    if unit == "ohm" and abs(value) >= 1000:
        value, half_width, unit = value / 1000, half_width / 1000, "kohm"
    if not (math.isfinite(half_width) and half_width > 0):
        return f"{grouped(value, 3 if unit == 'kohm' else 0)} {unit}"
    decimals = min(max(1 - math.floor(math.log10(half_width)), 0), most_decimals)
    return f"{grouped(value, decimals)} ± {grouped(half_width, decimals)} {unit}"


def ohm(value: float, half_width: float = 0.0) -> str:
    """A resistance: `7.946 kohm`, `812.4 ohm`, with ± where its 95 % half-width is known."""
    if half_width > 0:
        return with_uncertainty(value, half_width, "ohm")
    return f"{grouped(value / 1000, 3)} kohm" if abs(value) >= 1000 else f"{grouped(value, 1)} ohm"


def turns(value: float, half_width: float = 0.0) -> str:
    """A number of turns: whole ones without decimals."""
    if half_width > 0:
        return with_uncertainty(value, half_width, "turns", most_decimals=1)
    return f"{grouped(value, 0 if float(value).is_integer() else 2)} turns"


def at_turn(value: float) -> str:
    """A place in the coil: `7 946`, and `1 414.5` where it is not at the end of a turn."""
    return grouped(value, 0 if abs(value - round(value)) < 0.05 else 1)


def signed_mm(value: float) -> str:
    """A way with its direction, to a hundredth of a millimetre: `+0.15 mm`, `-0.10 mm`, `0.00 mm`."""
    sign = "+" if round(value, 2) > 0 else ""
    return f"{sign}{grouped(value, 2)} mm"


def apart(mm: float) -> str:
    """How two places lie that should be as far apart as planned: `0.20 mm further apart`."""
    return f"{abs(mm):.2f} mm {'further apart' if mm > 0 else 'nearer together'}"


def counted(number: int, what: str) -> str:
    """`no coil`, `1 coil`, `12 coils`."""
    return f"no {what}" if number == 0 else f"{grouped(number)} {what}{'' if number == 1 else 's'}"


def duration(seconds: float) -> str:
    """`0:45`, `8:05`, `1:02:10`."""
    whole = max(0, round(seconds))
    hours, rest = divmod(whole, 3600)
    minutes, left = divmod(rest, 60)
    return f"{hours}:{minutes:02d}:{left:02d}" if hours else f"{minutes}:{left:02d}"


def short_digest(digest: str) -> str:
    """The first 16 characters of a digest: enough to compare by eye."""
    return digest[:16]
