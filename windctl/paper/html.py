"""HTML, piece by piece. Whatever is no `Markup` yet is escaped, so nothing from a record becomes markup."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from windctl.paper.svg import escaped

# Nothing is loaded, nothing runs, nothing is sent: the page is whole as it stands.
_POLICY = "default-src 'none'; style-src 'unsafe-inline'; img-src data:; base-uri 'none'; form-action 'none'"
_ICON = "data:,"  # else a browser asks its server for one

_PROSE = ("p", "li", "caption", "figcaption", "td", "th", "dd", "small")
_WITHIN_A_FIGURE = re.compile(
    r"(?<=\d) (?=\d{3}(?!\d)|±)|(?<=±) |"
    r"(?<=\d) (?=(?:°C|kohm|ohm|%|mm|m|cN|rpm|µV|mV|Hz|g|K|min)(?![A-Za-z]))"
)


class Markup(str):
    """Text that is HTML or inline SVG already."""

    __slots__ = ()


@dataclass(frozen=True, slots=True)
class Column:
    """A table's column. `figures`: set flush right, in digits of equal width, never broken."""

    name: str
    figures: bool = False


def tag(name: str, *content: str, **attributes: str | None) -> Markup:
    """One element with its end tag. `_` in an attribute's name stands for `-`, one at its end is dropped."""
    said = "".join(
        f' {key.rstrip("_").replace("_", "-")}="{escaped(value)}"'
        for key, value in attributes.items()
        if value is not None
    )
    pieces = (one if isinstance(one, Markup) else knit(one) for one in content) if name in _PROSE else content
    return Markup(f"<{name}{said}>{joined(*pieces)}</{name}>")


def knit(text: str) -> str:
    """Text in which no line ends within a figure, or between it and its unit or its ±."""
    return _WITHIN_A_FIGURE.sub("\u00a0", text)


def joined(*content: str) -> Markup:
    """Pieces one after another, escaped where they are plain text."""
    return Markup("".join(one if isinstance(one, Markup) else escaped(one) for one in content))


def section(title: str, *content: str, class_: str | None = None) -> Markup:
    """A part of the page under a heading, which names it for whoever cannot see it."""
    ident = ident_of(title)
    return tag("section", tag("h2", title, id=ident), *content, class_=class_, aria_labelledby=ident)


def ident_of(title: str) -> str:
    """A title as an id: its letters and digits, parted by hyphens."""
    return re.sub("[^a-z0-9]+", "-", title.lower()).strip("-") or "part"


def figure(drawing: str, *caption: str, class_: str | None = None) -> Markup:
    """A drawing (SVG) with its caption below."""
    return tag("figure", Markup(drawing), tag("figcaption", *caption), class_=class_)


def table(
    caption: str,
    columns: Sequence[Column],
    rows: Sequence[Sequence[str]],
    *,
    foot: Sequence[str] = (),
    class_: str | None = None,
) -> Markup:
    """A table with heads to its columns; the first cell of each row is the row's head."""
    heads = [tag("th", column.name, scope="col", class_=_class(column)) for column in columns]
    parts = [
        tag("caption", caption),
        tag("thead", tag("tr", *heads)),
        tag("tbody", *(_row(columns, row) for row in rows)),
    ]
    if foot:
        parts.append(tag("tfoot", _row(columns, foot)))
    return tag("table", *parts, class_=class_)


def pairs(caption: str, rows: Sequence[tuple[str, str]]) -> Markup:
    """A table of what is called how: name left, value right."""
    lines = [tag("tr", tag("th", name, scope="row"), tag("td", value)) for name, value in rows]
    return tag("table", tag("caption", caption), tag("tbody", *lines), class_="pairs")


def page(
    title: str, css: str, *content: str, meta: Sequence[tuple[str, str]] = (), class_: str | None = None
) -> str:
    """A whole page that stands by itself. `meta`: names and contents, in order; names may come again."""
    metas = [_meta(name, told) for name, told in meta]
    head = tag(
        "head",
        Markup('<meta charset="utf-8">'),
        Markup(f'<meta http-equiv="Content-Security-Policy" content="{escaped(_POLICY)}">'),
        Markup('<meta name="viewport" content="width=device-width, initial-scale=1">'),
        *metas,
        tag("title", title),
        Markup(f'<link rel="icon" href="{_ICON}">'),
        tag("style", Markup(css)),
    )
    return f"<!DOCTYPE html>\n{tag('html', head, tag('body', *content, class_=class_), lang='en')}\n"


def css_text(words: str) -> str:
    """Words as a CSS string, quotes included: every character that is no letter, digit or plain sign is
    written by its number, so that none can end the string or the style element."""
    kept = (c if c.isascii() and (c.isalnum() or c in " .,:-") else f"\\{ord(c):x} " for c in words)
    return f'"{"".join(kept)}"'


def _meta(name: str, told: str) -> Markup:
    return Markup(f'<meta name="{escaped(name)}" content="{escaped(told)}">')


def _row(columns: Sequence[Column], cells: Sequence[str]) -> Markup:
    parts = []
    for n, (column, cell) in enumerate(zip(columns, cells, strict=True)):
        if n == 0:
            parts.append(tag("th", cell, scope="row", class_=_class(column)))
        else:
            parts.append(tag("td", cell, class_=_class(column)))
    return tag("tr", *parts)


def _class(column: Column) -> str | None:
    return "n" if column.figures else None


_SIGNS: Mapping[str, str] = {"within": "✓", "outside": "✗", "not judged": "○"}


def verdict_words(verdict: str) -> str:
    """A verdict with its sign, which reads without colour."""
    return f"{_SIGNS.get(verdict, '')} {verdict}".strip()
