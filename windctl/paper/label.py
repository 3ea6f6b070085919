"""Labels: one coil in 60 x 30 mm, with a code that leads back to its record; and sheets of them."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from textwrap import wrap
from typing import TYPE_CHECKING

from windctl.numbers import grouped, ohm
from windctl.paper import svg
from windctl.paper.html import Markup, page, tag
from windctl.paper.proof import META, Proof, code_drawn
from windctl.paper.svg import INK, MUTED

if TYPE_CHECKING:
    from windctl.book.heads import CoilHead

WIDTH_MM, HEIGHT_MM = 60.0, 30.0
_SIZE = (600.0, 300.0)  # of the drawing
_CODE = 246.0
_LEFT = 24.0
_WIDEST, _WIDEST_BOLD = 0.64, 0.72  # of a letter's size: a letter of the widest of the fonts, on average
PAPERS = {"a4": (210.0, 297.0), "letter": (215.9, 279.4)}  # mm; ISO 216, ANSI/ASME Y14.1
_NAME, _NAME_LEAST = 22.0, 19.0  # size of a recipe's name
_EDGE_MM = 9.0  # that printers leave white


@dataclass(frozen=True, slots=True)
class Label:
    """What stands on a label. `cold`: ohm at 20 degrees C and its 95 % half-width, if known; `day` as text;
    `warning`: a word that must not be missed, such as "simulated"."""

    proof: Proof
    recipe: str
    turns: float | None
    cold: tuple[float, float] | None
    day: str
    warning: str = ""


@dataclass(frozen=True, slots=True)
class Sheet:
    """How labels lie on paper. `start`: the place of the first one, from 1, row by row, so that a sheet that
    was begun can be used up."""

    paper: str
    columns: int
    start: int = 1

    @property
    def size_mm(self) -> tuple[float, float]:
        """The paper's width and height."""
        return PAPERS[self.paper]

    @property
    def label_mm(self) -> tuple[float, float]:
        """Width and height of one label."""
        width = (self.size_mm[0] - 2 * _EDGE_MM) / self.columns
        return width, width * HEIGHT_MM / WIDTH_MM

    @property
    def rows(self) -> int:
        """Rows on one page."""
        return int((self.size_mm[1] - 2 * _EDGE_MM) / self.label_mm[1])

    @property
    def places(self) -> int:
        """Labels on one page."""
        return self.columns * self.rows


def label_of(head: CoilHead, cold: tuple[float, float] | None = None, *, simulated: bool = False) -> Label:
    """The label of a coil. `cold`: what is known of its resistance by now, else what its row says."""
    if cold is None and head.dcr_20c_ohm:
        cold = head.dcr_20c_ohm, head.dcr_u95_ohm or 0.0
    warning = "simulated" if simulated else "" if head.sealed else "not finished"
    return Label(Proof.of(head), head.recipe, head.turns, cold, (head.ended or head.started)[:10], warning)


def label_svg(label: Label, ident: str = "label", *, sized: bool = True) -> str:
    """The drawing; `sized` gives it its 60 x 30 mm, else it takes the width of its place."""
    room = _SIZE[0] - _CODE - _LEFT - 14
    turns = (
        "turns not known" if label.turns is None else f"{grouped(label.turns, _decimals(label.turns))} turns"
    )
    cold = "resistance not known" if label.cold is None else ohm(*label.cold)
    under = f"at 20 °C · {label.day}" if label.cold is not None else label.day
    parts = [
        svg.rect(0, 0, *_SIZE, svg.PAPER),
        _fitted(label.proof.number, 54, room, 44, bold=True),
        *_recipe(label.recipe, room),
        svg.line(_LEFT, 116, _LEFT + room - 14, 116, svg.Pen(INK, 3)),
        _fitted(turns, 160, room, 34),
        _fitted(cold, 206, room, 34),
        _fitted(under, 240, room, 23),
    ]
    if label.warning:
        parts.append(_fitted(label.warning.upper(), 278, room, 26, bold=True))
    else:
        parts.append(_fitted(label.proof.digest[:16], 276, room, 20, fill=MUTED))
    size = _SIZE[0] - _CODE - 10, (_SIZE[1] - _CODE) / 2
    parts.append(code_drawn(label.proof.code_text, *size, _CODE))
    return svg.document(
        *_SIZE,
        parts,
        title=f"Coil {label.proof.number}",
        desc=f"{turns}, {cold} {under}. The code holds number, id and digest of the coil's record.",
        ident=ident,
        size=f"{WIDTH_MM:g}mm {HEIGHT_MM:g}mm" if sized else "",
    )


def label_sheets(labels: Sequence[Label], sheet: Sheet) -> str:
    """A page to print at full size: as many sheets as the labels take, the first from `sheet.start` on."""
    places: list[Label | None] = [*[None] * (sheet.start - 1), *labels]
    pages = [places[at : at + sheet.places] for at in range(0, len(places), sheet.places)]
    drawn = [
        tag("div", *(_place(label, f"label-{n}-{m}") for m, label in enumerate(some)), class_="sheet")
        for n, some in enumerate(pages)
    ]
    numbers = ", ".join(label.proof.number for label in labels[:3]) + (", ..." if len(labels) > 3 else "")
    meta = [(META, label.proof.line) for label in labels]
    return page(f"Labels: {numbers}", _sheet_css(sheet), *drawn, meta=meta)


def _place(label: Label | None, ident: str) -> Markup:
    if label is None:
        return tag("div", class_="used")
    return tag("div", Markup(label_svg(label, ident, sized=False)), class_="label")


def _sheet_css(sheet: Sheet) -> str:
    (paper_w, paper_h), (width, height) = sheet.size_mm, sheet.label_mm
    return f"""
@page {{ size: {paper_w:g}mm {paper_h:g}mm; margin: {_EDGE_MM:g}mm; }}
* {{ box-sizing: border-box; }}
html, body {{ margin: 0; background: #fff; }}
.sheet {{ display: grid; grid-template-columns: repeat({sheet.columns}, {width:.3f}mm);
  grid-auto-rows: {height:.3f}mm; break-after: page; break-inside: avoid; }}
.sheet:last-child {{ break-after: auto; }}
.label {{ border: 0.15mm dotted #8a8378; overflow: hidden; }}
.label svg {{ display: block; width: 100%; height: 100%; }}
@media screen {{ body {{ padding: 6mm; }} .sheet {{ margin-bottom: 6mm; }} }}
"""


def _recipe(words: str, room: float) -> list[str]:
    """A recipe's name in one line, or smaller in two, so that it can still be read at arm's length."""
    if len(words) * _WIDEST * _NAME <= room:
        return [_fitted(words, 94, room, _NAME + 1, fill=MUTED)]
    lines = wrap(words, int(room / (_WIDEST * _NAME_LEAST)))
    if len(lines) > 2:
        lines = [lines[0], " ".join(lines[1:])]  # which is cut
    return [_fitted(line, 80 + 22 * n, room, _NAME_LEAST, fill=MUTED) for n, line in enumerate(lines)]


def _fitted(words: str, y: float, room: float, size: float, *, bold: bool = False, fill: str = INK) -> str:
    """Words made smaller, and if need be cut, until they fit."""
    wide = _WIDEST_BOLD if bold else _WIDEST
    least = 0.62 * size
    fits = min(size, room / (wide * max(len(words), 1)))
    if fits < least:
        words = words[: max(1, int(room / (wide * least)) - 1)].rstrip() + "…"
        fits = least
    return svg.text(_LEFT, y, words, size=round(fits, 1), bold=bold, fill=fill)


def _decimals(turns: float) -> int:
    return 0 if float(turns).is_integer() else 1
