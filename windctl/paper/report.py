"""The report of one coil: one page that stands by itself, for a customer's folder and for years."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from windctl.material.copper import to_20c
from windctl.numbers import counted, duration, grouped, ohm, turns
from windctl.paper import charts, winding
from windctl.paper.course import Course
from windctl.paper.html import (
    Column,
    Markup,
    figure,
    page,
    pairs,
    section,
    table,
    tag,
    verdict_words,
)
from windctl.paper.layers import Growth, growth_of
from windctl.paper.look import report_css
from windctl.paper.measured import measured_section
from windctl.paper.proof import META, Proof, proof_section
from windctl.paper.recorded import Bobbin, bobbin_of, profile_of, recipe_of, settings
from windctl.paper.told import said_since, story
from windctl.record import events as facts
from windctl.record.addenda import Addendum, magnet, withdrawn
from windctl.record.curve import CurvePoint
from windctl.record.events import CoilStarted
from windctl.shop.picks_up import recorded

if TYPE_CHECKING:
    from windctl.book.heads import CoilHead
    from windctl.record.state import State
    from windctl.shop.life import Life

_MACHINE = ("spindle", "guide", "tension", "readings")  # of a profile, what bears on a coil
_FAR_CELSIUS = 90.0
_NO_LIMIT = 0xFFFF  # sensor units: above what any tension is
_WAYS = {
    "live": "while it turned",
    "checks": "at stops, with the wire bared",
    "none": "not while it was wound: turns were counted",
}


@dataclass(frozen=True, slots=True)
class CoilFacts:
    """What a report is made from: the coil's row, its folded facts and their course, what was known as it
    grew, its readings since (None where this version cannot tell), and all else that was said. `schema`: of
    the book it came from."""

    head: CoilHead
    started: CoilStarted
    state: State
    course: Course
    curve: tuple[CurvePoint, ...]
    life: Life | None
    addenda: tuple[Addendum, ...]
    schema: int

    @property
    def turns(self) -> float:
        """Turns on the bobbin as last known."""
        return self.state.turns if self.head.turns is None else self.head.turns

    @property
    def cold(self) -> tuple[float, float] | None:
        """The coil's resistance now, ohm at 20 degrees C by all its readings, and its 95 % half-width."""
        now = None if self.life is None else self.life.now
        return self.final if now is None else (now.ohm, now.u95)

    @property
    def final(self) -> tuple[float, float] | None:
        """The same as it was known when winding ended."""
        if not self.head.dcr_20c_ohm:
            return None
        return self.head.dcr_20c_ohm, self.head.dcr_u95_ohm or 0.0


def coil_report(coil: CoilFacts) -> str:
    """The page. Raises RecordBroken where the stored program cannot be read."""
    head, proof = coil.head, Proof.of(coil.head)
    recipe = recipe_of(coil.started)
    bobbin = bobbin_of(recipe)
    told = magnet(coil.addenda)
    if bobbin is not None and told is not None:
        bobbin = replace(bobbin, pole=told.pole)
    growth = None if bobbin is None else growth_of(coil.started, bobbin, coil.turns)
    foot = f"{head.number} · {head.id} · {head.record_digest[:16]}"
    return page(
        f"Coil {head.number}: {head.recipe}",
        report_css(foot),
        _head(coil, bobbin, growth),
        tag(
            "main",
            _resistance(coil),
            measured_section(
                coil.life,
                coil.addenda,
                recorded(None if growth is None else growth.core, coil.addenda, coil.started.prior),
            ),
            _pace(coil),
            _section(bobbin, growth),
            _story(coil),
            _since(coil.addenda),
            proof_section(proof, coil.schema),
            _settings(coil, recipe),
        ),
        meta=[(META, proof.line)],
    )


def _head(coil: CoilFacts, bobbin: Bobbin | None, growth: Growth | None) -> Markup:
    head = coil.head
    names = tag(
        "div",
        tag("p", "Coil", class_="kind"),
        tag("h1", head.number),
        tag("p", head.recipe, class_="sub"),
    )
    drawing = ""
    if bobbin is not None and growth is not None:
        drawing = figure(winding.face(bobbin, growth.build_mm))
    day = (head.ended or head.started)[:10]
    batch = f"batch {head.batch}" + (f", of {head.of}" if head.of else "") if head.batch else ""
    target = coil.started.target
    goal = turns(target.value) if target.kind == "turns" else f"{ohm(target.value)} at 20 °C"
    figures = tag(
        "dl",
        _key("turns", grouped(coil.turns, 0 if float(coil.turns).is_integer() else 2), head.outcome),
        _key("resistance at 20 °C", *_resistance_words(coil)),
        _key("judged", verdict_words(head.verdict), f"{goal} ±\u00a0{target.tolerance_pct:g}\u00a0%"),
        _key("wound", day, batch),
        class_="key",
    )
    parts = [tag("div", names, drawing, class_="title"), figures]
    if coil.course.simulated:
        words = "Simulated: this coil was wound by a simulated machine. There is no such coil."
        parts.append(tag("p", words, class_="warn"))
    if not head.sealed:
        words = "The record of this coil is still open: the coil is not finished."
        parts.append(tag("p", words, class_="warn"))
    out = withdrawn(coil.addenda)
    if out is not None:
        parts.append(tag("p", f"Withdrawn by {out.by}: {out.reason}", class_="warn"))
    return tag("header", *parts)


def _key(name: str, value: str, below: str = "") -> Markup:
    return tag("div", tag("dt", name), tag("dd", value, tag("small", below) if below else Markup("")))


def _resistance_words(coil: CoilFacts) -> tuple[str, str]:
    cold = coil.cold
    if cold is None:
        return "not known", ""
    if coil.life is not None and coil.life.changed:
        return ohm(*cold), "changed since it was made"
    return ohm(*cold), "± is the 95 % interval" if cold[1] > 0 else ""


def _resistance(coil: CoilFacts) -> Markup:
    target, read = coil.started.target, coil.course.hand_read
    how = _WAYS.get(coil.started.readings_mode, coil.started.readings_mode)
    parts = []
    if coil.curve or coil.final is not None:
        zero = coil.state.zeroed
        leads = coil.started.prior.offset_ohm if zero is None else zero.ohm
        by_hand = [
            (turn, to_20c(max(value - leads, 0.0), celsius))
            for turn, value, celsius in read
            if -_FAR_CELSIUS <= celsius <= _FAR_CELSIUS  # else a slip of the pen, which copper's law refuses
        ]
        drawing = charts.resistance(coil.curve, target, coil.turns, by_hand, _marks(coil), coil.final)
        parts.append(figure(drawing, f"Resistance at 20 °C as the coil grew, read {how}."))
    if coil.curve:
        drawing = charts.finish(coil.curve, target, coil.turns, coil.final[0] if coil.final else None)
        words = (
            "What the finished coil was foreseen to have, after each reading; the band holds it in 95 of 100."
        )
        parts.append(figure(drawing, words))
    if not parts:
        return section("Resistance", tag("p", f"Read {how}. Nothing was measured."))
    return section("Resistance", *parts)


def _marks(coil: CoilFacts) -> list[charts.Marked]:
    """What a reader of the curve should know of, by turn."""
    marked = []
    for event in coil.course.rare:
        match event:
            case facts.Spliced():
                marked.append(charts.Marked(event.turn, "splice"))
            case facts.WireChanged():
                marked.append(charts.Marked(event.turn, "new spool"))
            case facts.CheckTaken() if event.read:
                marked.append(charts.Marked(event.turn, "check"))
            case facts.AlarmRaised():
                marked.append(charts.Marked(event.turn, "alarm"))
    return marked


def _pace(coil: CoilFacts) -> Markup:
    course, parts = coil.course, []
    if course.speed_rpm:
        said = f"Spindle speed. It turned for {duration(course.seconds)}"
        if course.celsius is not None and course.celsius[1] > course.celsius[0]:
            said += f", at {course.celsius[0]:.1f} to {course.celsius[1]:.1f} °C"
        parts.append(figure(charts.speed(course.speed_rpm, coil.turns, _marks(coil)), f"{said}."))
    if course.tension_cn:
        drawing = charts.tension(course.tension_cn, coil.turns, _band(coil))
        parts.append(figure(drawing, "Tension of the wire, as mean over whole turns."))
    return section("Speed and tension", *parts) if parts else Markup("")


def _band(coil: CoilFacts) -> tuple[float, float] | None:
    """The tension that the machine allowed, cN, by the scale of the board that answered."""
    setup = coil.started.setup
    limited = 0 < setup.tension_high < _NO_LIMIT
    for event in coil.course.rare:
        if isinstance(event, facts.BoardGreeted) and event.identity.tension_scale and limited:
            scale = event.identity.tension_scale / 10_000.0
            return setup.tension_low * scale, setup.tension_high * scale
    return None


def _section(bobbin: Bobbin | None, growth: Growth | None) -> Markup:
    if bobbin is None or growth is None:
        return Markup("")
    lay = "as the hand is asked to lay it" if growth.by_hand else "as the guide laid it"
    words = (
        f"The winding {lay}, with wire and packing as planned: cut through the middle of the long "
        "sides, where it stands highest, to scale."
    )
    return section("Section", figure(winding.section(bobbin, growth), words), class_="whole")


def _settings(coil: CoilFacts, recipe: object) -> Markup:
    started, head = coil.started, coil.head
    wire = started.basis.wire if started.basis is not None else ""
    rows = [
        ("recipe", started.recipe_name),
        ("operator", started.operator),
        ("machine", started.machine),
        ("spool", started.spool),
        ("wire", wire),
        ("batch", started.batch),
        ("begun", head.started[:16].replace("T", " ")),
        ("ended", (head.ended or "")[:16].replace("T", " ")),
        ("windctl", started.version),
        ("recipe's digest", tag("span", started.recipe_digest[:16], class_="digest")),
        ("guide's program", tag("span", started.program_digest[:16], class_="digest")),
    ]
    tables = [pairs("coil", [row for row in rows if row[1]])]
    if isinstance(recipe, dict):
        tables += [pairs(name, values) for name, values in settings(recipe)]
    profile = profile_of(started)
    machine = {f"machine: {name}": profile[name] for name in _MACHINE if name in profile}
    tables += [pairs(name, values) for name, values in settings(machine)]
    return section("Settings", tag("div", *tables, class_="columns whole"))


def _story(coil: CoilFacts) -> Markup:
    lines = story(coil.course.rare, coil.started.setup.counts_per_turn)
    columns = [Column("time"), Column("what happened")]
    caption = f"Time since the run began; besides, {counted(coil.course.readings, 'reading')} of the contact"
    rows = [(line.when, line.what) for line in lines]
    return section("What happened", table(caption, columns, rows, class_="story"))


def _since(addenda: Sequence[Addendum]) -> Markup:
    rows = [row for row in map(said_since, addenda) if row is not None]
    if not rows:
        return Markup("")
    columns = [Column("when"), Column("who"), Column("what")]
    return section("Since then", table("Said after the record was closed", columns, rows, class_="since"))
