"""What paper and files say of records: number, id and digest, to hold the book against.

A page or a drawing carries them as `<meta name="windctl-record" content="NUMBER ID DIGEST">`, one for each
coil; a file of coils holds the coils themselves.
"""

from __future__ import annotations

import re
from dataclasses import dataclass
from html.parser import HTMLParser
from pathlib import Path

import sqlalchemy as sa

from windctl.book.exchange import coil_of, coils_in
from windctl.book.heads import CoilHead
from windctl.book.store import Store
from windctl.book.tables import coils, entries
from windctl.book.verify import BrokenCoil
from windctl.errors import BookError, RecordBroken, UsageError

META = "windctl-record"
SHORTEST = 12  # digits of a digest that was shortened: one in 10^14 others begins alike

_DIGEST = re.compile(r"[0-9a-f]{12,64}", re.ASCII)


@dataclass(frozen=True, slots=True)
class Claim:
    """A coil's record ends, or did when this was written, in a digest that begins with `digest` (hex)."""

    number: str
    ident: str  # "": not said
    digest: str
    proven: bool = False  # by the whole record, which was checked


def digest_of(text: str) -> str:
    """A digest that somebody typed. Raises UsageError."""
    digest = "".join(text.split()).lower()
    if not _DIGEST.fullmatch(digest):
        raise UsageError(
            f"{text!r} is not a digest: give {SHORTEST} to 64 of 0-9 and a-f, from its beginning on"
        )
    return digest


def claims_in(path: Path) -> tuple[Claim, ...]:
    """What a page, a drawing or a file of coils says; of the latter every coil is checked first.

    Raises BookError for a file that cannot be read, RecordBroken for one that says nothing or does not agree
    with itself.
    """
    try:
        with path.open("rb") as file:
            marked = file.read(512).lstrip(b"\xef\xbb\xbf \t\r\n").startswith(b"<")
        text = path.read_text(encoding="utf-8", errors="replace") if marked else ""
    except OSError as error:
        raise BookError(
            f"{path} cannot be read ({error.strerror}): check its name and permissions"
        ) from error
    if not marked:
        heads = [coil_of(one).head for one in coils_in(path)[1]]
        return tuple(Claim(head.number, head.id, head.record_digest, proven=True) for head in heads)
    page = _Page()
    page.feed(text)
    page.close()
    if not page.claims:
        raise RecordBroken(f"{path} carries no digest of a record: no <meta name={META!r}> stands in it")
    return tuple(_claim(path, said) for said in page.claims)


class _Page(HTMLParser):
    """Gathers what stands under the name."""

    def __init__(self) -> None:
        super().__init__()
        self.claims: list[str] = []

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:
        said = dict(attrs)
        if tag == "meta" and said.get("name") == META:
            self.claims.append(said.get("content") or "")


def _claim(path: Path, said: str) -> Claim:
    match said.lower().split():
        case [number, ident, digest] if _DIGEST.fullmatch(digest):
            return Claim(number, ident, digest)
    raise RecordBroken(f"{path} says {said!r} of a record, which is not a number, an id and a digest")


def held_against(store: Store, head: CoilHead, claim: Claim) -> list[BrokenCoil]:
    """What is wrong with a coil whose record agrees with itself: it must be the one that was claimed, or that
    one gone on since."""
    if head.record_digest.startswith(claim.digest):
        return []
    with store.reading() as connection:
        links = connection.execute(sa.select(entries.c.seq, entries.c.link).where(entries.c.coil == head.id))
        if any(isinstance(row.link, bytes) and row.link.hex().startswith(claim.digest) for row in links):
            return []  # of an open coil: rows came after it was written down
    what = (
        f"the record ends at row {head.n_entries - 1} with {head.record_digest[:16]}, and none of its rows "
        f"has the digest {claim.digest[:16]} that was given: its end was cut off or exchanged"
    )
    return [BrokenCoil(head.number, head.n_entries - 1, what)]


def claimed(store: Store, claim: Claim) -> str | None:
    """The id of the coil that a claim is about; None where the book has none such."""
    if claim.ident:
        which = coils.c.id == claim.ident
    elif claim.number:
        which = coils.c.number == claim.number
    else:
        which = sa.and_(coils.c.record_digest >= claim.digest, coils.c.record_digest < f"{claim.digest}~")
    with store.reading() as connection:
        return connection.scalar(sa.select(coils.c.id).where(which))
