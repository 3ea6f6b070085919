"""`windctl estimate`: what a coil of unknown make is wound with, from what can be measured outside."""

from __future__ import annotations

from collections.abc import Callable
from math import hypot
from pathlib import Path
from typing import TYPE_CHECKING, Any, TypeVar

import click

from windctl.cli import present, typed
from windctl.cli.options import Shared, takes
from windctl.desk.machines import profile_of
from windctl.errors import UsageError, WindctlError

if TYPE_CHECKING:
    from windctl.recipe.tables import Bobbin
    from windctl.shop.mixture import Interval
    from windctl.shop.unknown_coil import Findings

F = TypeVar("F", bound=Callable[..., Any])

_NAMED = 0.005  # sizes less likely than this are not worth a word


def _mm(*declarations: str, text: str, **more: Any) -> Callable[[F], F]:
    limits = typed.FiniteRange(min=0, min_open=True, max=500)
    return click.option(*declarations, type=limits, metavar="MM", help=text, **more)


@click.command(short_help="What an unknown coil is wound with.")
@click.option("--ohm", callback=typed.ohm_option, required=True, metavar="OHM",
              help="Resistance as the meter shows it; 7.2k is understood.")  # fmt: skip
@click.option("--celsius", type=typed.FiniteRange(min=-40, max=60), required=True, metavar="C",
              help="Temperature of the coil, °C: let it lie in the room for an hour.")  # fmt: skip
@_mm("--build", "build_mm", required=True,
     text="From the core to the winding's surface at the ends of the core: half of the length over the "
          "winding less the core's length, mm.")  # fmt: skip
@_mm("--build-sd", "build_sd_mm", text="Standard deviation of that, mm.", default=0.1, show_default=True)
@click.option("--mass", "grams", type=typed.FiniteRange(min=0, min_open=True), metavar="G",
              help="Mass of the wire alone, g: the coil less an empty bobbin.")  # fmt: skip
@click.option("--mass-sd", "grams_sd", type=typed.FiniteRange(min=0, min_open=True), metavar="G",
              default=0.05, show_default=True, help="Standard deviation of that, g.")  # fmt: skip
@_mm("--overall", "overall_mm", text="Over the enamel of a loose end, by micrometer, mm.")
@click.option("--bobbin", "bobbin_of", type=click.Path(path_type=Path), metavar="RECIPE",
              help="Take the bobbin from this recipe, instead of the six below.")  # fmt: skip
@_mm("--core-length", text="Outside length of the core that the wire lies on, mm.")
@_mm("--core-width", text="Its outside width, mm.")
@_mm("--corner-radius", text="Radius of its corners, mm; half the width if not given.")
@_mm("--core-perimeter", text="Length round it, measured, mm; beats the computed one.")
@_mm("--gap", text="Free height between the flanges, mm.")
@_mm("--flange-depth", text="From the core to the flange's edge, mm; for the recipe.")
@click.option("--enamel", type=click.Choice(["grade 1", "grade 2"]), help="Grade of the enamel, if known.")
@click.option("--lay", "style", type=click.Choice(["scatter", "even"]), help="How it is laid, if known.")
@click.option("--sizes", type=click.Choice(["awg", "metric"]), default="awg", show_default=True,
              help="Which series the wire is one of.")  # fmt: skip
@click.option("--recipe", "recipe_file", type=click.Path(path_type=Path), metavar="FILE",
              help="Write a recipe that would match it into this new file.")  # fmt: skip
@takes("machine", "json")
def estimate(shared: Shared, /, **given: Any) -> None:
    """What a finished coil of unknown make is wound with: wire, length and turns, from outside measurements.

    How far the meter can be trusted comes from the machine's profile. ± is half of the 95 % interval.
    """
    from windctl.coil.geometry import core_of
    from windctl.shop.one_wire import Outside
    from windctl.shop.unknown_coil import identify

    readings = profile_of(shared).readings
    bobbin = _bobbin(given)
    file: Path | None = given["recipe_file"]
    if file is not None and file.exists():
        raise UsageError(f"{file} is there already: name another file")
    ohm = given["ohm"] - readings.lead_ohm
    if ohm <= 0:
        raise UsageError(f"{given['ohm']:g} ohm is no more than the leads, {readings.lead_ohm:g} ohm")
    own = (readings.gain_sd_pct / 100, readings.noise_pct / 100)
    outside = Outside(
        ohm=ohm,
        ohm_rel=hypot(*own, readings.floor_ohm / ohm, readings.lead_sd_ohm / ohm),
        celsius=given["celsius"],
        celsius_sd=readings.celsius_sd,
        core=core_of(bobbin),
        gap_mm=bobbin.flange_gap_mm,
        build_mm=given["build_mm"],
        build_sd_mm=given["build_sd_mm"],
        grams=given["grams"],
        grams_sd=given["grams_sd"],
        overall_mm=given["overall_mm"],
    )
    findings = identify(outside, given["sizes"], given["enamel"], given["style"])
    if file is not None:
        _write_recipe(file, findings, bobbin)
    if shared.json:
        present.result_json(_as_json(findings, file))
    else:
        _show(findings, file)


def _bobbin(given: dict[str, Any]) -> Bobbin:
    """The bobbin of a recipe, or the one described."""
    from pydantic import ValidationError

    from windctl.recipe.load import load_recipe
    from windctl.recipe.tables import Bobbin

    described = {
        "core_length_mm": given["core_length"],
        "core_width_mm": given["core_width"],
        "corner_radius_mm": given["corner_radius"],
        "core_perimeter_mm": given["core_perimeter"],
        "flange_gap_mm": given["gap"],
        "flange_depth_mm": given["flange_depth"],
    }
    if given["bobbin_of"] is not None:
        if any(value is not None for value in described.values()):
            raise UsageError("--bobbin has the whole bobbin: leave out what describes another one")
        return load_recipe(given["bobbin_of"]).bobbin
    missing = [
        f"--{name.removeprefix('flange_').removesuffix('_mm').replace('_', '-')}"
        for name in ("core_length_mm", "core_width_mm", "flange_gap_mm")
        if described[name] is None
    ]
    if missing:
        raise UsageError(f"the bobbin is not described: give {', '.join(missing)}, or --bobbin RECIPE")
    if described["corner_radius_mm"] is None:
        described["corner_radius_mm"] = described["core_width_mm"] / 2
    if described["flange_depth_mm"] is None:
        described["flange_depth_mm"] = round(_DEPTH * given["build_mm"], 2)
    try:
        return Bobbin.model_validate({name: value for name, value in described.items() if value is not None})
    except ValidationError as error:
        raise UsageError(f"there is no such bobbin: {_words(error)}") from None


_DEPTH = 1.25  # of the build: room for what the long sides stand higher, where nobody measured the flange


def _words(error: Any) -> str:
    """What a form says of itself, in one line."""
    return "; ".join(f"{'.'.join(map(str, each['loc']))} {each['msg']}".strip() for each in error.errors())


def _write_recipe(file: Path, findings: Findings, bobbin: Bobbin) -> None:
    from windctl.recipe.load import parse_recipe
    from windctl.shop.rewind import Rewind, recipe_text

    try:
        text = recipe_text(findings, Rewind("Rewind of an unknown coil", bobbin))
    except ValueError as error:
        raise UsageError(f"no recipe can be made of this: {error}") from error
    parse_recipe(text, str(file))  # nothing is written that is no good recipe
    try:
        with file.open("x", encoding="utf-8") as stream:
            stream.write(text)
    except FileExistsError:
        raise UsageError(f"{file} is there already: name another file") from None
    except OSError as error:
        raise WindctlError(f"{file} cannot be written: {error.strerror or error}") from error


def _as_json(findings: Findings, file: Path | None) -> dict[str, Any]:
    best = findings.best
    return {
        "dcr_20c_ohm": findings.outside.ohm_20c,
        "wires": [
            {"size": size.name, "bare_mm": size.bare_mm, "probability": size.probability, "odds": size.odds}
            for size in findings.sizes
        ],
        "enamel": best.enamel,
        "lay": best.fit.style,
        "turns": _interval(findings.turns),
        "wire_length_m": _interval(findings.length_m),
        "bare_mm": _interval(findings.bare_mm),
        "packing": _interval(findings.packing),
        "recipe": None if file is None else str(file),
    }


def _interval(interval: Interval) -> dict[str, float]:
    return {"value": interval.value, "low": interval.low, "high": interval.high}


def _show(findings: Findings, file: Path | None) -> None:
    first, *rest = findings.sizes
    others = ", ".join(
        f"{size.name} {100 * size.probability:.0f} %" for size in rest if size.probability > _NAMED
    )
    present.pairs(
        [
            ("wire", f"{first.name} ({first.bare_mm:.4f} mm bare), {_odds(first.odds)}"),
            *([("or", others)] if others else []),
            ("resistance", f"{present.ohm(findings.outside.ohm_20c)} at 20 °C"),
            ("turns", _range(findings.turns, 0, "turns")),
            ("wire length", _range(findings.length_m, 0, "m")),
            ("bare diameter", _range(findings.bare_mm, 4, "mm")),
            ("packing", _range(findings.packing, 2, "")),
        ]
    )
    if findings.outside.grams is None:
        present.message("The mass of the wire (--mass) would tell much more.")
    if file is not None:
        present.result(
            f"recipe: {file}; see that the wire and the direction are right, then windctl plan {file}"
        )


def _odds(odds: float) -> str:
    return "odds of more than 10 000 to 1" if odds > 1e4 else f"odds of {odds:.2g} to 1 against all others"


def _range(interval: Interval, decimals: int, unit: str) -> str:
    low, value, high = (present.grouped(v, decimals) for v in (interval.low, interval.value, interval.high))
    return f"{value} {unit} ({low} to {high})".replace("  ", " ")
