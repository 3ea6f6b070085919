"""The book's list as the interface shows it. Pure."""

from __future__ import annotations

from collections.abc import Collection
from typing import TYPE_CHECKING

from windctl.desk.numbers import counted, grouped, ohm
from windctl.tui.looks import OUTCOMES, VERDICTS, Look

if TYPE_CHECKING:
    from windctl.book.heads import CoilHead
    from windctl.errors import QueryError
    from windctl.tui.page import Page

FILTERS = ("", "verdict:within", "verdict:outside", "outcome:open", "outcome:stopped,tripped")
SORTS = ("", "coil", "-turns", "-ohm", "recipe", "spool", "verdict")
MARK = Look("", "◆", "past")

_WIDE = 110
_RECIPE, _WIDE_RECIPE, _BATCH = 18, 28, 12  # cells for a name
_SORTED = {"coil": "coil", "turns": "turns", "ohm": "at 20 °C", "recipe": "recipe", "spool": "spool",
           "verdict": "verdict", "started": "started"}  # fmt: skip


def columns(width: int, sort: str = "") -> tuple[str, ...]:
    """The table's columns, an arrow on the one it is sorted by."""
    wide = ("", "coil", "recipe", "batch", "spool", "started", "turns", "at 20 °C", "verdict")
    narrow = ("", "coil", "recipe", "started", "turns", "at 20 °C", "verdict")
    by = _SORTED[sort.removeprefix("-") or "started"]
    arrow = "▼" if sort.startswith("-") or not sort else "▲"
    return tuple(f"{name} {arrow}" if name == by else name for name in (wide if width >= _WIDE else narrow))


def row(head: CoilHead, marked: bool, width: int) -> tuple[str | Look, ...]:
    """One coil in the table. The verdict of a coil that is not finished is how it ended, if it did."""
    verdict = VERDICTS.get(head.verdict, Look(head.verdict, "·", "unsure"))
    how = verdict if head.outcome == "finished" else OUTCOMES.get(head.outcome, verdict)
    mark: str | Look = MARK if marked else ""
    turns, day = "" if head.turns is None else grouped(head.turns), head.started[:10]
    if width >= _WIDE:
        names = (_cut(head.recipe, _WIDE_RECIPE), _cut(head.batch, _BATCH), head.spool)
        return mark, head.number, *names, day, turns, resistance(head), how
    read = "" if not head.dcr_20c_ohm else ohm(head.dcr_20c_ohm).replace("kohm", "kΩ").replace("ohm", "Ω")
    return mark, head.number, _cut(head.recipe, _RECIPE), day, turns, read, how


def _cut(text: str, most: int) -> str:
    return text if len(text) <= most else text[: most - 1] + "…"


def resistance(head: CoilHead) -> str:
    """At 20 degrees C, with its 95 % half-width."""
    if not head.dcr_20c_ohm:
        return ""
    return ohm(head.dcr_20c_ohm, head.dcr_u95_ohm or 0.0).replace("kohm", "kΩ").replace("ohm", "Ω")


def asked(typed: str, only: str) -> str:
    """The query: what was typed, and the filter."""
    return f"{typed} {only}".strip()


def foot(page: Page, only: str, marked: Collection[str]) -> str:
    """What is listed, and what can be done."""
    parts = [counted(page.total, "coil")]
    if only:
        parts[0] += f", {only}"
    if page.pages > 1:
        parts.append(f"page {page.number + 1} of {page.pages}: N older, P newer")
    if marked:
        parts.append(f"◆ {len(marked)} marked" + (": C compares" if len(marked) > 1 else ""))
    parts.append("Enter shows one" if page.heads else "nothing is found")
    return " · ".join(parts)


def misunderstood(error: QueryError) -> str:
    """Where a query goes wrong, with the place marked below it."""
    return f"  {error.text}\n  {' ' * error.at}▲ {error.what}"


def as_lines(heads: Collection[CoilHead]) -> str:
    """The page as a table that a spreadsheet reads: columns parted by tabs, plain numbers."""
    rows = [("coil", "recipe", "batch", "spool", "started", "outcome", "turns", "ohm_20c", "verdict")]
    for one in heads:
        numbers = ("" if one.turns is None else f"{one.turns:g}", f"{one.dcr_20c_ohm or ''}")
        rows.append(
            (one.number, one.recipe, one.batch, one.spool, one.started, one.outcome, *numbers, one.verdict)
        )
    return "".join("\t".join(cell.replace("\t", " ") for cell in cells) + "\n" for cells in rows)
