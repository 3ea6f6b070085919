"""What goes onto paper, from the book: the reports and labels of coils and batches, as text."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from windctl.errors import UsageError

if TYPE_CHECKING:
    from windctl.book.book import Book
    from windctl.book.heads import CoilHead
    from windctl.paper.label import Label
    from windctl.paper.report import CoilFacts
    from windctl.record.addenda import Addendum
    from windctl.shop.lot import Lot


def coil_facts(book: Book, head: CoilHead) -> CoilFacts:
    """Everything a report tells of a coil. Raises RecordBroken where its record cannot be read."""
    from windctl.paper.gather import gathered

    return gathered(head, book.events(head.number), book.addenda(head.number), schema())


def report_text(book: Book, head: CoilHead) -> str:
    """The report of one coil, a page of HTML."""
    from windctl.paper.report import coil_report

    return coil_report(coil_facts(book, head))


def batch_text(book: Book, batch: str) -> tuple[tuple[CoilHead, ...], str]:
    """A batch's coils, in the order in which they were begun, and the batch's report, a page of HTML."""
    from windctl.paper.batch import batch_report

    heads = batch_coils(book, batch)
    simulated = [head.number for head in heads if _simulated(book.addenda(head.number))]
    return heads, batch_report(batch, heads, schema(), simulated, _lot(book, heads))


def _lot(book: Book, heads: Sequence[CoilHead]) -> Lot | None:
    """The control chart that `windctl chart --batch` draws; None for too few coils, or of several recipes."""
    from windctl.desk.lots import gather
    from windctl.shop.control import WESTERN_ELECTRIC
    from windctl.shop.lot import free_quantity, lot_of

    try:
        coils = gather(book, heads).coils
        return lot_of(coils, free_quantity(coils), WESTERN_ELECTRIC)
    except (UsageError, ValueError):
        return None


def batch_coils(book: Book, batch: str) -> tuple[CoilHead, ...]:
    """The coils of a batch, in the order in which they were begun. Raises UsageError where there is none."""
    heads = book.list(batch=batch)
    if not heads:
        raise UsageError(f"there is no coil of batch {batch!r} in the coil book {book.path}")
    return heads[::-1]


def labels_of(book: Book, heads: Sequence[CoilHead]) -> list[Label]:
    """The labels of coils. The resistance is by all readings of a coil, where there were any since."""
    from windctl.paper.label import label_of
    from windctl.record.addenda import CoilMeasured

    labels = []
    for head in heads:
        addenda = book.addenda(head.number)
        cold = None
        if any(isinstance(fact, CoilMeasured) and fact.ohm is not None for fact in addenda):
            cold = coil_facts(book, head).cold
        labels.append(label_of(head, cold, simulated=_simulated(addenda)))
    return labels


def _simulated(addenda: Sequence[Addendum]) -> bool:
    """Whether a closed coil's record says that a simulated machine wound it."""
    from windctl.record.addenda import CoilTaught

    taught = [fact.lesson for fact in addenda if isinstance(fact, CoilTaught)]
    return bool(taught) and taught[-1].simulated


def schema() -> int:
    """The schema of a book that is open: an older one is taken forward first."""
    from windctl.book.ledger import STEPS

    return STEPS[-1].version
