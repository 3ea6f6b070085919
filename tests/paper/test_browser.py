"""Pages in a real browser: they render, print on A4 and Letter, and ask for nothing outside of their file.

One start of Chromium for all of it. CI installs it; elsewhere its absence is a reason to skip.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from io import BytesIO
from pathlib import Path

import numpy as np
import pytest
import zxingcpp
from PIL import Image
from pypdf import PdfReader

from tests.paper.browser import INCH, browser, chromium
from tests.paper.conftest import BATCH, RECIPE
from windctl.book.book import Book
from windctl.desk.papers import batch_text, labels_of, report_text
from windctl.paper.label import Sheet, label_sheets

PAPERS = {"a4": (210.0, 297.0), "letter": (215.9, 279.4)}  # mm; ISO 216, ANSI/ASME Y14.1
QR = zxingcpp.BarcodeFormat.QRCode
WIDE, NARROW = (1000, 1400), (390, 800)


@dataclass
class Seen:
    """What the browser made of one page."""

    file: Path
    requests: list[str]
    complaints: list[str]
    pictures: list[Image.Image]
    overflow: list[int]  # pixels by which the page is wider than its window
    prints: dict[str, PdfReader]
    title: str


@pytest.fixture(scope="module")
def seen(book: Book, tmp_path_factory: pytest.TempPathFactory) -> Iterator[dict[str, Seen]]:
    if chromium() is None:
        pytest.skip("no Chromium on this computer")
    folder = tmp_path_factory.mktemp("browser")
    pages = {
        "report": report_text(book, book.find("1")),
        "batch": batch_text(book, BATCH)[1],
        "labels": label_sheets(labels_of(book, [book.find(n) for n in "123"]), Sheet("a4", 3, start=2)),
        "asks": '<!DOCTYPE html><title>asks</title><img src="http://example.invalid/x.png">',
    }
    found = {}
    with browser(folder) as tab:
        for name, text in pages.items():
            file = folder / f"{name}.html"
            file.write_text(text, encoding="utf-8")
            tab.open(file)
            pictures, overflow = [], []
            for width, height in (WIDE, NARROW) if name != "asks" else ():
                pictures.append(Image.open(BytesIO(tab.picture(width, height, scale=1.0))).convert("L"))
                overflow.append(tab.evaluate("document.documentElement.scrollWidth - innerWidth"))
            prints = {
                paper: PdfReader(BytesIO(tab.pdf(*size)))
                for paper, size in PAPERS.items()
                if name in ("report", "batch") or (name, paper) == ("labels", "a4")
            }
            found[name] = Seen(
                file, tab.requests, tab.complaints, pictures, overflow, prints, tab.evaluate("document.title")
            )
    yield found


def test_a_page_that_asks_for_something_outside_is_caught(seen: dict[str, Seen]) -> None:
    """Else the next test could not fail."""
    assert "http://example.invalid/x.png" in seen["asks"].requests


@pytest.mark.parametrize("name", ["report", "batch", "labels"])
def test_nothing_is_asked_for_but_the_file(seen: dict[str, Seen], name: str) -> None:
    asked = [one for one in seen[name].requests if not one.startswith("data:")]
    assert asked == [seen[name].file.as_uri()]
    assert seen[name].complaints == []


@pytest.mark.parametrize("name", ["report", "batch", "labels"])
def test_it_is_drawn(seen: dict[str, Seen], name: str) -> None:
    """Ink and paper are both there, in grey as well: between a hundredth and a half of the window is dark."""
    pixels = np.asarray(seen[name].pictures[0])
    dark = float((pixels < 128).mean())
    assert 0.005 < dark < 0.5
    assert float((pixels > 250).mean()) > 0.4


@pytest.mark.parametrize("name", ["report", "batch"])
def test_it_fits_a_wide_window_and_a_telephone(seen: dict[str, Seen], name: str) -> None:
    assert max(seen[name].overflow) <= 0


@pytest.mark.parametrize("paper", list(PAPERS))
def test_a_report_prints_on_either_paper(seen: dict[str, Seen], book: Book, paper: str) -> None:
    """Sizes in points of 1/72 inch (ISO 32000); fonts are in the file, every page has its foot, and words
    that a record holds stand there as they are."""
    made = seen["report"].prints[paper]
    assert 3 <= len(made.pages) <= 6
    texts = [one.extract_text() for one in made.pages]
    for n, one in enumerate(made.pages):
        size = [float(side) * INCH / 72 for side in (one.mediabox.width, one.mediabox.height)]
        assert size == pytest.approx(PAPERS[paper], abs=0.5)
        assert f"{n + 1} / {len(made.pages)}" in texts[n] and book.find("1").number in texts[n]
        fonts = one["/Resources"]["/Font"]
        for font in fonts.values():
            kind = font.get_object()
            inner = kind["/DescendantFonts"][0].get_object() if "/DescendantFonts" in kind else kind
            assert kind["/Subtype"] == "/Type3" or any(
                name.startswith("/FontFile") for name in inner["/FontDescriptor"].get_object()
            )
    whole = " ".join(" ".join(texts).split())
    assert "".join(RECIPE.split()) in "".join(whole.split())  # long words are broken
    for heading in ("Resistance", "Section", "What happened", "Proof", "Settings"):
        assert heading in whole
    assert len(texts[-1].split()) > 20  # no page for a line or two


def test_no_heading_stands_alone_at_the_foot_of_a_page(seen: dict[str, Seen]) -> None:
    headings = {
        "Resistance",
        "Section",
        "Speed and tension",
        "What happened",
        "Since then",
        "Proof",
        "Settings",
    }
    for made in (*seen["report"].prints.values(), *seen["batch"].prints.values()):
        for one in made.pages:
            lines = [line.strip() for line in one.extract_text().splitlines() if line.strip()]
            body = [line for line in lines if " / " not in line and "·" not in line]
            assert body[-1] not in headings


def test_labels_print_on_one_sheet_and_their_codes_read(seen: dict[str, Seen], book: Book) -> None:
    """Read off the picture by a general reader of codes, as a telephone would."""
    assert len(seen["labels"].prints["a4"].pages) == 1
    found = zxingcpp.read_barcodes(np.asarray(seen["labels"].pictures[0]), formats=QR)
    heads = [book.find(n) for n in "123"]
    assert {one.text.lower() for one in found} == {f"{h.number} {h.id} {h.record_digest}" for h in heads}
    assert seen["labels"].title.startswith("Labels: ")
