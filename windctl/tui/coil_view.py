"""One coil of the book as the interface shows it. Pure."""

from __future__ import annotations

from collections.abc import Sequence
from textwrap import wrap
from typing import TYPE_CHECKING

from windctl.desk.numbers import grouped, turns
from windctl.tui.coils_view import resistance
from windctl.tui.looks import OUTCOMES, VERDICTS
from windctl.tui.pictures.against import LETTERS, MOST
from windctl.tui.view import target_text

if TYPE_CHECKING:
    from windctl.book.heads import CoilHead
    from windctl.book.verify import VerifyReport
    from windctl.record.addenda import Addendum
    from windctl.shop.compare import Differing
    from windctl.tui.records import Told


_INDENT = 9  # cells for the time before a line
_WIDE = 98  # of plain text


def figures(told: Told) -> tuple[tuple[str, str], ...]:
    """One coil in rows."""
    head, outcome, verdict = told.head, OUTCOMES[told.head.outcome], VERDICTS[told.head.verdict]
    at_20c = resistance(head)
    rows = (
        ("coil", head.number),
        ("recipe", head.recipe),
        ("outcome", f"{outcome.glyph} {outcome.word}" + (f": {head.reason}" if head.reason else "")),
        ("verdict", f"{verdict.glyph} {verdict.word}"),
        ("turns", "" if head.turns is None else turns(head.turns)),
        ("at 20 °C", at_20c),
        ("target", target_text(told.card)),
        ("batch", f"{head.batch} of {head.of}" if head.of else head.batch),
        ("spool", head.spool),
        ("started", head.started[:16].replace("T", " ")),
        ("machine", told.machine),
        ("record", head.record_digest[:16]),
    )
    return tuple((name, value) for name, value in rows if value)


def against(first: CoilHead, others: Sequence[CoilHead]) -> str:
    """The coils beside it, a line each: its letter, and by how much its resistance differs in the end."""
    parts = [f"A {first.number}"]
    for letter, other in zip(LETTERS, others[:MOST], strict=False):
        off = ""
        if first.dcr_20c_ohm and other.dcr_20c_ohm:
            off = f" {round(100 * (other.dcr_20c_ohm / first.dcr_20c_ohm - 1), 2) + 0.0:+.2f} %"
        more = ""
        if first.turns is not None and other.turns is not None and other.turns != first.turns:
            more = f", {other.turns - first.turns:+.0f} turns"
        same = ", same program" if other.program_digest == first.program_digest else ""
        parts.append(f"{letter} {other.number}{off}{more}{same}")
    return "\n".join(parts)


def otherwise(differing: Sequence[Differing]) -> list[tuple[str, str]]:
    """What was set otherwise, as lines like the events': a sign, and each coil's value behind its letter."""
    lines = []
    for one in differing:
        values = ", ".join(
            f"{letter} {'–' if value is None else value}"
            for letter, value in zip("A" + LETTERS, one.values, strict=False)
        )
        lines.append(("≠", f"{one.name}: {values}"))
    return lines


def pairing(said: Sequence[Addendum]) -> str:
    """What a coil goes with and how their leads are joined, or from what it was parted last; empty where it
    never was of a pair. `said`: all that was said of it."""
    from windctl.record.addenda import PairMade, PairParted

    last = next((fact for fact in reversed(said) if isinstance(fact, PairMade | PairParted)), None)
    match last:
        case PairMade():
            left = f"{last.left_db:.0f} dB ({last.left_low_db:.0f} to {last.left_high_db:.0f})"
            return f"goes with {last.partner_number}: {last.joined}; hum left {left}"
        case PairParted():
            when = last.wall_time[:10]
            return f"goes with no other: parted from {last.partner_number} on {when}, {last.reason}"
    return ""


def verified(report: VerifyReport) -> str:
    """A check in words."""
    if not report.broken:
        return "✔ the record agrees with its digests"
    return "✖ " + "; ".join(one.what for one in report.broken)


def story(told: Sequence[tuple[str, str]], width: int) -> list[str]:
    """What happened, in lines of at most `width`; what goes on stands under its own beginning."""
    lines = []
    for since, what in told:
        for at, piece in enumerate(wrap(what, max(width - _INDENT, 20)) or [""]):
            lines.append(f"{'' if at else since:>{_INDENT - 2}}  {piece}")
    return lines


def as_text(told: Told) -> str:
    """The coil as plain text, to be pasted into a message: figures, then what happened."""
    rows = figures(told)
    width = max(len(name) for name, _ in rows)
    lines = [f"{name:<{width}}  {value}" for name, value in rows]
    lines += ["", *wrap(told.pair, _WIDE)] if told.pair else []
    return "\n".join([*lines, "", *(f"{since:>8}  {what}" for since, what in told.lines)]) + "\n"


def line_of(head: CoilHead) -> str:
    """One coil in a list to choose from."""
    found = resistance(head)
    count = "" if head.turns is None else f"{grouped(head.turns)} turns"
    parts = (head.number, head.recipe, head.started[:10], count, found)
    return " · ".join(part for part in parts if part)
