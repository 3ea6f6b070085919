"""The book as the interface reads it: pages of coils, one coil as it is told, its check, its export."""

from __future__ import annotations

import json
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from windctl.desk.books import book_to_read
from windctl.errors import RecordBroken, UsageError
from windctl.tui.page import PAGE, Page
from windctl.tui.pictures.curve import Point
from windctl.tui.sitting import Sitting
from windctl.tui.view import Card

if TYPE_CHECKING:
    from windctl.book.heads import CoilHead
    from windctl.book.verify import VerifyReport
    from windctl.record.addenda import Addendum
    from windctl.record.curve import CurvePoint
    from windctl.record.events import Event
    from windctl.shop.compare import Differing

_Z95 = 1.959964
ALIKE = 40  # coils of one recipe, among which others are chosen to compare


@dataclass(frozen=True, slots=True)
class Told:
    """A recorded coil as the interface shows it."""

    head: CoilHead
    card: Card
    curve: tuple[Point, ...]
    lines: tuple[tuple[str, str], ...]  # when, what
    machine: str
    pair: str = ""  # what it goes with, or was parted from


class Records(Sitting):
    """What was wound. Everything raises BookError; reading never makes a book."""

    def page(self, number: int, query: str = "", sort: str = "") -> Page:
        """One page of the coils that `query` asks for, in the book's language, sorted as `sort` says, else
        the one begun last first. Raises QueryError."""
        with self._book() as book:
            if book is None:
                return Page((), 0, 0)
            total = book.count(query)
            number = max(0, min(number, -(-total // PAGE) - 1))
            heads = book.list(query, sort=sort, limit=PAGE, offset=number * PAGE)
            return Page(heads, total, number)

    def alike(self, number: str) -> tuple[CoilHead, ...]:
        """Other coils of the same recipe that were read, the one begun last first: worth comparing."""
        with book_to_read(self.shared) as book:
            head = book.find(number)
            heads = book.list(recipe=head.recipe, limit=ALIKE + 1)
        return tuple(one for one in heads if one.number != head.number and one.sealed)[:ALIKE]

    def told(self, number: str) -> Told:
        """One coil, as it is shown. Raises BookError, RecordBroken."""
        from windctl.record.curve import review

        with book_to_read(self.shared) as book:
            head = book.find(number)
            events = list(book.events(number))
            curve = book.curve(number) if head.sealed else review(events).curve
            said = book.addenda(number)
        return _told(head, events, curve, said)

    def differing(self, numbers: Sequence[str]) -> tuple[Differing, ...]:
        """What of recipe, machine, spool and program's version these coils did not have in common."""
        from windctl.desk.compared import gather
        from windctl.shop.compare import differing

        with book_to_read(self.shared) as book:
            return differing([gather(book, book.find(number)) for number in numbers])

    def draw(self, numbers: Sequence[str]) -> Path:
        """Draw these coils against the first of them into a file beside the user; where it went."""
        from windctl.desk.compared import gather
        from windctl.paper.compared import compared_svg
        from windctl.paper.svg import standalone
        from windctl.shop.compare import curves

        with book_to_read(self.shared) as book:
            coils = [gather(book, book.find(number)) for number in numbers]
        drawn = curves(coils)
        if not drawn.turns:
            raise UsageError("no two of these coils were read over the same turns: there is nothing to draw")
        return written(f"{numbers[0]}-compared.svg", standalone(compared_svg(coils, drawn)))

    def verify(self, number: str) -> VerifyReport:
        """Check one record against its digests."""
        with book_to_read(self.shared) as book:
            return book.verify(number)

    def export(self, number: str) -> Path:
        """Write the whole record beside the user, as JSON; where it went."""
        with book_to_read(self.shared) as book:
            record = {"format": 1, **dict(book.export(number))}
        return written(f"{number}.json", json.dumps(record, ensure_ascii=False, indent=2))

    def report(self, number: str) -> Path:
        """Write the coil's report beside the user, a page to print; where it went."""
        from windctl.desk.papers import report_text

        with book_to_read(self.shared) as book:
            return written(f"{number}.html", report_text(book, book.find(number)))


def written(name: str, text: str) -> Path:
    """Write a file beside the user; where it went. Raises OSError."""
    path = Path.cwd() / name
    path.write_text(text, encoding="utf-8", newline="\n")
    return path


def points_of(curve: tuple[CurvePoint, ...]) -> list[Point]:
    """A recorded curve as it is drawn."""
    return [Point(one.turn, one.ohm_20c, one.final_ohm, _Z95 * one.final_sd) for one in curve]


def _told(
    head: CoilHead, events: list[Event], curve: tuple[CurvePoint, ...], said: Sequence[Addendum]
) -> Told:
    from windctl.paper.told import said_since
    from windctl.record.events import CoilStarted
    from windctl.tui.coil_view import pairing
    from windctl.tui.telling import tell, when

    started = events[0]
    if not isinstance(started, CoilStarted):
        raise RecordBroken(f"the record of coil {head.number} does not begin with its start")
    target = started.target
    points = points_of(curve)
    last = points[-1] if points else None
    card = Card(
        number=head.number,
        recipe=head.recipe,
        machine=started.machine,
        target_kind=target.kind,
        target_value=target.value,
        tolerance_pct=target.tolerance_pct,
        most_turns=float(target.max_turns),
        planned_turns=started.planned_turns,
        planned_ohm=last.finish if last and last.finish else target.value,
        planned_u95=points[0].u95 or 0.0 if points else 0.0,
        depth_mm=0.0,
        batch=head.batch,
        of=head.of,
    )
    lines = []
    for event in events:
        text = tell(event, started.setup.counts_per_turn) if event.kind not in _DENSE else None
        if text is not None:
            lines.append((when(event), text))
    since = [one for fact in said if (one := said_since(fact)) is not None]
    lines += [
        ("since", f"{what} ({', '.join(part for part in (who, moment) if part)})")
        for moment, who, what in since
    ]
    return Told(head, card, tuple(points), tuple(lines), started.machine, pairing(said))


_DENSE = ("status_heard", "reading_taken")
