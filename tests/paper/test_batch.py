"""The report of a batch: every coil with its digest, and the figures of the lot."""

from __future__ import annotations

from statistics import mean, stdev

import pytest

from tests.paper.conftest import BATCH, RECIPE
from tests.paper.reading import page, rows, stands_alone, table
from windctl.book.book import Book
from windctl.desk.papers import batch_coils, batch_text
from windctl.errors import UsageError


def test_it_holds_every_coil_and_its_digest(book: Book) -> None:
    heads, text = batch_text(book, BATCH)
    root = page(text)
    stands_alone(root)
    assert [head.number[-4:] for head in heads] == ["0001", "0002", "0003"]
    lines = rows(table(root, "In the order"))[1:]
    assert [line[0] for line in lines] == [head.number for head in heads]
    proofs = rows(table(root, "What this page stands on"))[1:]
    assert proofs == [[head.number, head.id, head.record_digest] for head in heads]
    metas = [one.attributes["content"] for one in root.all("meta") if one.attributes.get("name")]
    assert [f"{head.number} {head.id} {head.record_digest}" for head in heads] == metas[1:]


def test_its_head_tells_the_lot(book: Book) -> None:
    heads, text = batch_text(book, BATCH)
    words = page(text).all("header")[0].text
    assert BATCH in words and RECIPE in words and "3 of 3" in words
    known = [head.dcr_20c_ohm for head in heads if head.dcr_20c_ohm is not None]
    assert f"{mean(known):.1f} ohm" in words and f"{stdev(known):.1f} ohm (sd)" in words
    assert "Simulated: these coils were" in words


def test_a_batch_that_nobody_wound_is_refused(book: Book) -> None:
    with pytest.raises(UsageError, match="no coil of batch 'another'"):
        batch_coils(book, "another")


def test_a_batch_of_one_recipe_has_its_control_chart(book: Book) -> None:
    """Two of the three went to turns, so resistance was free; the third is of another target."""
    _, text = batch_text(book, BATCH)
    root = page(text)
    titles = [one.all("title")[0].text for one in root.all("svg")]
    assert any(title.startswith("Individual values") for title in titles)
    assert root.all("li")
