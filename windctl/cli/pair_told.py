"""Hum-cancelling pairs in words, tables and JSON."""

from __future__ import annotations

import textwrap
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

from windctl.cli import present

if TYPE_CHECKING:
    from windctl.desk.stock import Found, InStock, Matched
    from windctl.shop.hum import Left
    from windctl.shop.joining import Handed
    from windctl.shop.picks_up import PicksUp

_U95 = 1.96
_MILLI = 1000.0
_WIDE = 98


def hum(picks_up: PicksUp, hz: float) -> str:
    """`0.98 ± 0.07 mV`: what a coil picks up of one microtesla."""
    volt = picks_up.volt(hz)
    return present.with_uncertainty(_MILLI * volt, _U95 * _MILLI * volt * picks_up.rel, "mV")


def both_hums(picks_up: PicksUp) -> str:
    """For one coil, on a line of its own."""
    each = " and ".join(f"{hum(picks_up, hz)} at {hz:.0f} Hz" for hz in (50.0, 60.0))
    return f"{each} of one microtesla, uniform field, without steel"


def level(left: Left) -> str:
    """`-51 dB (-80 to -45)`."""
    return f"{left.db:.0f} dB ({left.low_db:.0f} to {left.high_db:.0f})"


def show(found: Matched, *, stacked: bool) -> None:
    """The pairs, how each is joined, and what the figures mean."""
    if found.pairs:
        _table(found.pairs)
        present.result()
        _meaning(found.pairs, stacked=stacked)
        _joining(found.pairs)


def _table(pairs: Sequence[Found]) -> None:
    rows = []
    for at, each in enumerate(pairs, 1):
        mismatch = 200 * each.pair.mismatch.mean
        half = _U95 * 200 * each.pair.mismatch.sd
        rows.append(
            [
                str(at),
                each.north.head.number,
                each.south.head.number,
                present.with_uncertainty(mismatch, half, "%"),
                level(each.pair.left),
                level(each.pair.near),
            ]
        )
    present.table(["", "north", "south", "turns-area differs", "hum left", "source 1 m away"], rows, "r  r")
    present.result()
    coils = [
        each
        for found in pairs
        for each in ((found.north, found.north_picks_up), (found.south, found.south_picks_up))
    ]
    rows = [
        [coil.head.number, _turns(coil), hum(picks_up, 50.0), hum(picks_up, 60.0), _remark(coil)]
        for coil, picks_up in coils
    ]
    present.table(["coil", "turns", "hum at 50 Hz", "at 60 Hz", ""], rows, " r")


def _turns(coil: InStock) -> str:
    turns = coil.lesson.lesson.turns
    return present.grouped(turns, 0 if turns.is_integer() else 1)


def _remark(coil: InStock) -> str:
    return "outside its tolerance" if coil.head.verdict == "outside" else ""


def _meaning(pairs: Sequence[Found], *, stacked: bool) -> None:
    apart = {round(each.pair.apart_mm, 1) for each in pairs}
    spacing = " and ".join(f"{mm:g}" for mm in sorted(apart))
    how = "one above the other" if stacked else "side by side"
    _wrapped("hum: picked up of one microtesla along the coil's axis; uniform field, without steel.")
    _wrapped("hum left: against both coils in phase, expected and 95 %; uniform field, without steel.")
    _wrapped(
        f"source 1 m away: at its worst place, coils {how}, {spacing} mm between their middles. No match of "
        "the coils gets below what that spacing leaves."
    )


def _joining(pairs: Sequence[Found]) -> None:
    """One drawing for all pairs that are joined alike."""
    from windctl.shop.joining import Handed, join
    from windctl.shop.leads_drawn import as_text

    kinds: dict[tuple[str, str], list[int]] = {}
    for at, each in enumerate(pairs, 1):
        joined = each.pair.joined
        kinds.setdefault((joined.first.way, joined.second.way), []).append(at)
    for numbers in kinds.values():
        one = pairs[numbers[0] - 1].pair.joined
        alone = len(pairs) == 1
        first, second = (_named(coil, alone=alone) for coil in (one.first, one.second))
        joined = join(
            Handed(first, one.first.way, one.first.pole), Handed(second, one.second.way, one.second.pole)
        )
        present.result()
        of = "" if len(kinds) == 1 else f" {_numbers(numbers)}"
        _wrapped(f"in series{of}: {joined.in_series}.")
        _wrapped(f"in parallel: {joined.in_parallel}.")
        _wrapped(f"{joined.polarity}; swap the ends where other pickups want the other polarity.")
        present.result()
        for line in as_text(joined):
            present.result(f"    {line}".rstrip())


def _wrapped(text: str) -> None:
    for line in textwrap.wrap(text, _WIDE, subsequent_indent="  ", break_on_hyphens=False):
        present.result(line)


def _named(coil: Handed, *, alone: bool) -> str:
    return coil.name if alone else f"the {coil.pole} coil"


def _numbers(numbers: Sequence[int]) -> str:
    return f"(pair{'' if len(numbers) == 1 else 's'} {', '.join(map(str, numbers))})"


def ending(found: Matched, *, take: bool, dry_run: bool) -> None:
    """Who is left over and why, and whether anything was kept."""
    poles = [coil.pole for coil in found.alone]
    if not found.pairs:
        norths, souths = (present.counted(poles.count(each), "coil") for each in ("north", "south"))
        present.message(f"no pairs: {norths} with north to the strings and {souths} with south can be paired")
    elif found.alone:
        present.message("no partner for " + ", ".join(f"{c.head.number} ({c.pole})" for c in found.alone))
    for one in found.left_out:
        present.message(f"left out: {one.number}: {one.why}")
    if any(abs(each.pair.mismatch.mean) < each.pair.mismatch.sd for each in found.pairs):
        present.message(
            "what is not known of cores and builds decides: a measured core_perimeter_mm in the recipe "
            "and a caliper's figure of each coil ('windctl coils measure COIL --build MM') tell them apart"
        )
    if found.pairs and dry_run:
        present.message("nothing was recorded")
    elif found.pairs:
        pairs = present.counted(len(found.pairs), "pair")
        present.message(f"{pairs} kept" if take else "nothing is kept; --take makes them part of the records")


def as_json(found: Matched, *, taken: bool) -> dict[str, Any]:
    """The same for other programs, format 1."""
    return {
        "pairs": [_pair_json(each) for each in found.pairs],
        "alone": [coil.head.number for coil in found.alone],
        "left_out": [{"coil": one.number, "why": one.why} for one in found.left_out],
        "taken": taken and bool(found.pairs),
    }


def _pair_json(each: Found) -> dict[str, Any]:
    pair, joined = each.pair, each.pair.joined
    lead_of, lead = joined.positive
    return {
        "north": _coil_json(each.north, each.north_picks_up),
        "south": _coil_json(each.south, each.south_picks_up),
        "mismatch": 2 * pair.mismatch.mean,
        "mismatch_sd": 2 * pair.mismatch.sd,
        "hum_left": _left_json(pair.left),
        "source_1_m": _left_json(pair.near) | {"spacing_mm": pair.apart_mm},
        "joined": {
            "series": joined.in_series,
            "parallel": joined.in_parallel,
            "joint": [{"coil": joined.first.name, "lead": "finish"},
                      {"coil": joined.second.name, "lead": joined.joint}],
            "ends": [{"coil": joined.first.name, "lead": "start"},
                     {"coil": joined.second.name, "lead": joined.end}],
            "positive": {"coil": lead_of.name, "lead": lead},
        },
    }  # fmt: skip


def _coil_json(coil: InStock, picks_up: PicksUp) -> dict[str, Any]:
    return {
        "coil": coil.head.number,
        "id": coil.head.id,
        "turns": coil.lesson.lesson.turns,
        "direction_from_face": coil.recipe.coil.direction_from_face,
        **picks_up.as_json(),
    }


def _left_json(left: Left) -> dict[str, float]:
    return {"db": left.db, "low_db": left.low_db, "high_db": left.high_db}
