"""The part of a report on what was measured, and how sure it is, line by line."""

from __future__ import annotations

from collections.abc import Sequence

from windctl.numbers import grouped, ohm, with_uncertainty
from windctl.paper.html import Column, Markup, section, table, tag
from windctl.record.addenda import Addendum, CoilMeasured
from windctl.shop.hum import MAINS_HZ
from windctl.shop.life import Life
from windctl.shop.picks_up import PicksUp
from windctl.shop.still_reads import ColdValue, Still

_Z95 = 1.959964
_BUDGET = (
    Column("source"),
    Column("standard deviation", True),
    Column("of the resistance", True),
    Column("of the variance", True),
)


def measured_section(life: Life | None, addenda: Sequence[Addendum], hum: PicksUp | None) -> Markup:
    """Readings, their budgets, what else was measured, and the hum that follows."""
    parts = []
    if life is not None and (len(life.readings) > 1 or (life.readings and life.made is None)):
        parts.append(_readings(life))
    if life is None:
        words = "The machine's profile in this record has a form that this version of windctl does not read."
        parts.append(tag("p", words))
    elif life.made is not None and life.now is not None:
        if life.changed:
            parts += [_budget("As it was made", life.made), _budget("As it is now", life.now)]
        else:
            parts.append(_budget("Cold resistance", life.made))
    else:
        words = "No resistance of the finished coil was read: turns were counted, and the rest is as planned."
        parts.append(tag("p", words))
    others = [row for fact in addenda if isinstance(fact, CoilMeasured) for row in _besides(fact)]
    if others:
        columns = [Column("when"), Column("what"), Column("measured", True), Column("how")]
        parts.append(table("Measured besides", columns, others))
    if hum is not None:
        parts.append(_hum(hum))
    return section("Measurements and their uncertainty", *parts)


def _readings(life: Life) -> Markup:
    columns = [
        Column("reading"),
        Column("meter"),
        Column("at 20 °C, 95 %", True),
        Column("against the coil as made", True),
        Column("still the same?"),
    ]
    rows = [
        (
            f"{reading.number}: {reading.label}",
            reading.meter,
            ohm(reading.ohm, reading.u95_ohm),
            *_against(said),
        )
        for reading, said in zip(life.readings, life.stills, strict=True)
    ]
    return table("Resistance of the finished coil, reading by reading", columns, rows)


def _against(said: Still | None) -> tuple[str, str]:
    if said is None:
        return "", ""
    sign = "+" if said.difference_ohm > 0 else ""
    return f"{sign}{with_uncertainty(said.difference_ohm, said.u95_ohm, 'ohm')}", said.statement


def _budget(name: str, value: ColdValue) -> Markup:
    whole = value.sd**2
    rows = [
        (
            line.name,
            f"{_small(line.sd)} {line.unit}" if line.unit else f"{_small(100.0 * line.sd)} %",
            f"{_small(line.ohm)} ohm",
            f"{100.0 * line.ohm**2 / whole:.1f} %",
        )
        for line in value.budget
    ]
    foot = ("together", "", f"{_small(value.sd)} ohm", "100 %")
    numbers = ", ".join(str(reading.number) for reading in value.readings)
    of = f", from readings {numbers}" if len(value.readings) > 1 else ""
    caption = f"{name}: {ohm(value.ohm, value.u95)} at 20 °C (95 %){of}"
    return table(caption, _BUDGET, rows, foot=foot, class_="whole")


def _besides(fact: CoilMeasured) -> list[tuple[str, str, str, str]]:
    """What a measurement holds beside resistance, a row each."""
    when = fact.wall_time[:16].replace("T", " ")
    at = "" if fact.test_hz is None else f"at {grouped(fact.test_hz)} Hz"
    load = [f"{fact.load_pf:g} pF" if fact.load_pf is not None else "",
            f"{ohm(fact.load_ohm)}" if fact.load_ohm is not None else ""]  # fmt: skip
    across = " and ".join(part for part in load if part)
    found = (
        ("mass of the wire", _told(fact.grams, fact.grams_sd, "g"), ""),
        ("build", _told(fact.build_mm, fact.build_sd_mm, "mm"), ""),
        ("inductance", "" if fact.henry is None else f"{fact.henry:.4g} H", at),
        ("quality", "" if fact.quality is None else f"{fact.quality:.3g}", at),
        (
            "resonance",
            "" if fact.resonance_hz is None else f"{grouped(fact.resonance_hz)} Hz",
            f"with {across} across it" if across else "",
        ),
    )
    stage = f", {fact.stage}" if fact.stage else ""
    return [(f"{when}{stage}", what, value, how) for what, value, how in found if value]


def _told(value: float | None, sd: float | None, unit: str) -> str:
    return "" if value is None else with_uncertainty(value, _Z95 * (sd or 0.0), unit)


def _hum(hum: PicksUp) -> Markup:
    columns = [Column("mains"), Column("hum per microtesla", True)]
    rows = []
    for hz in MAINS_HZ:
        per, unit = (1e3, "mV") if hum.volt(hz) >= 1e-3 else (1e6, "µV")
        volt = per * hum.volt(hz)
        rows.append((f"{hz:g} Hz", with_uncertainty(volt, _Z95 * hum.rel * volt, unit)))
    area = with_uncertainty(hum.turns_area_m2, _Z95 * hum.rel * hum.turns_area_m2, "m²")
    caption = f"Hum, from turns times mean area of {area}: uniform field along the axis, without steel"
    return table(caption, columns, rows, class_="whole")


def _small(value: float) -> str:
    """Two significant digits, as uncertainties are written."""
    text = f"{value:.2g}"
    return grouped(float(text)) if "e+" in text else text
