"""What ties paper to the book: a coil's number, id and the digest of its record, in a form for machines."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from windctl.paper import svg
from windctl.paper.html import Markup, figure, pairs, section, tag

if TYPE_CHECKING:
    from windctl.book.heads import CoilHead

META = "windctl-record"  # the name under which a page holds its proofs
_QUIET = 4  # modules left white around a code, as ISO/IEC 18004 wants them


@dataclass(frozen=True, slots=True)
class Proof:
    """Number, id and digest (hex) of a coil's record. `sealed`: the digest is for ever."""

    number: str
    ident: str
    digest: str
    sealed: bool

    @classmethod
    def of(cls, head: CoilHead) -> Proof:
        """The proof of a coil's row."""
        return cls(head.number, head.id, head.record_digest, head.sealed)

    @property
    def line(self) -> str:
        """`b1-2026-0147 0c3a8df8-... 67a268f1...`: what a page keeps under `META`."""
        return f"{self.number} {self.ident} {self.digest}"

    @property
    def code_text(self) -> str:
        """The same in capitals, which make a smaller code; case means nothing in any of the three."""
        return self.line.upper()


def code(text: str) -> tuple[tuple[bool, ...], ...]:
    """The QR code of a text, True for dark, without its quiet zone. Level M: a seventh may be unreadable."""
    import segno

    made = segno.make(text, error="m", micro=False, boost_error=False)
    return tuple(tuple(bool(module) for module in row) for row in made.matrix)


def code_drawn(text: str, x: float, y: float, size: float) -> str:
    """The QR code of a text as one path, its quiet zone included, `size` wide with its corner at x, y."""
    rows = code(text)
    module = size / (len(rows) + 2 * _QUIET)
    path = []
    for down, row in enumerate(rows):
        across = 0
        while across < len(row):
            length = 0
            while across + length < len(row) and row[across + length]:
                length += 1
            if length:
                path.append(f"M{across + _QUIET} {down + _QUIET}h{length}v1h-{length}z")
            across += max(length, 1)
    return svg.group(
        svg.rect(0, 0, len(rows) + 2 * _QUIET, len(rows) + 2 * _QUIET, svg.PAPER),
        svg.element("path", d="".join(path), fill="#000000", shape_rendering="crispEdges"),
        transform=f"translate({svg.number(x)} {svg.number(y)}) scale({svg.number(module, 5)})",
    )


def proof_section(proof: Proof, schema: int) -> Markup:
    """The last part of a report: how to check it against the book."""
    drawing = svg.document(
        100,
        100,
        [code_drawn(proof.code_text, 0, 0, 100)],
        title="QR code",
        desc=f"Holds number, id and digest of coil {proof.number}.",
        ident="code",
    )
    state = (
        "closed: nothing in it can change unseen" if proof.sealed else "still open: the digest will change"
    )
    rows = [
        ("number", proof.number),
        ("id", tag("span", proof.ident, class_="digest")),
        ("digest of the record", tag("span", proof.digest, class_="digest")),
        ("record", state),
        ("schema of the coil book", str(schema)),
    ]
    how = tag(
        "p",
        "Whoever has the coil book checks this page with ",
        tag("code", f"windctl coils verify {proof.number}"),
        ": the record there must be whole and end with this digest. Every fact in it, down to the single "
        "reading, is tied into the digest.",
    )
    words = tag("div", pairs("What this page stands on", rows), how)
    return section("Proof", tag("div", words, figure(drawing), class_="proof"))
