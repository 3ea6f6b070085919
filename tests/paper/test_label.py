"""Labels: the code leads back to the record, words stay clear of it, sheets fill as they are asked to."""

from __future__ import annotations

import re
import xml.etree.ElementTree as ET

import numpy as np
import pytest
import zxingcpp
from hypothesis import given, settings
from hypothesis import strategies as st
from PIL import Image, ImageDraw

from tests.paper.conftest import BATCH, RECIPE
from tests.paper.reading import page, stands_alone
from windctl.book.book import Book
from windctl.desk.papers import batch_coils, labels_of
from windctl.paper.label import Label, Sheet, label_sheets, label_svg
from windctl.paper.proof import Proof, code

QR = zxingcpp.BarcodeFormat.QRCode  # a few modules of it may be a code of another kind, too
NS = "{http://www.w3.org/2000/svg}"
PROOF = Proof("b1-2026-0147", "0c3a8df8-a366-46bf-8903-b58d1736c9a9", "67a268f101b101b8" * 4, True)
LABEL = Label(PROOF, "a recipe", 8062.0, (5898.0, 52.0), "2026-05-04")

RAW = st.binary(min_size=48, max_size=48)  # of an id and a digest


def decoded(drawing: str) -> list[str]:
    """What a general reader of codes makes of a drawing's dark modules. Drawn here by the path's own words
    and nothing else: M x y h n v 1 h -n z is a bar of n modules."""
    root = ET.fromstring(drawing)
    (group,) = [one for one in root.iter(f"{NS}g") if "scale" in one.get("transform", "")]
    path = group.find(f"{NS}path")
    box = group.find(f"{NS}rect")
    assert path is not None and box is not None
    size = int(box.get("width", "0"))
    image = Image.new("L", (8 * size, 8 * size), 255)
    draw = ImageDraw.Draw(image)
    for x, y, length, back in re.findall(r"M(\d+) (\d+)h(\d+)v1h-(\d+)z", path.get("d", "")):
        assert length == back
        x0, y0 = 8 * int(x), 8 * int(y)
        draw.rectangle((x0, y0, x0 + 8 * int(length) - 1, y0 + 7), fill=0)
    return [found.text for found in zxingcpp.read_barcodes(np.array(image), formats=QR)]


def test_the_code_is_number_id_and_digest() -> None:
    (text,) = decoded(label_svg(LABEL))
    assert text.lower() == PROOF.line == f"{PROOF.number} {PROOF.ident} {PROOF.digest}"


@settings(max_examples=40)
@given(st.from_regex("[a-z0-9]{1,8}-20[0-9][0-9]-[0-9]{4,6}", fullmatch=True), RAW)
def test_any_proof_fits_a_small_code_and_comes_back(number: str, raw: bytes) -> None:
    """Version 5 has 37 modules and holds 122 letters and digits at level M, version 6 has 41: ISO/IEC 18004,
    from memory."""
    ident = f"{raw[:4].hex()}-{raw[4:6].hex()}-{raw[6:8].hex()}-{raw[8:10].hex()}-{raw[10:16].hex()}"
    proof = Proof(number, ident, raw[16:].hex(), True)
    assert len(code(proof.code_text)) == (37 if len(proof.line) <= 122 else 41)
    image = np.kron(~np.pad(np.array(code(proof.code_text)), 4), np.ones((3, 3))).astype(np.uint8) * 255
    (found,) = zxingcpp.read_barcodes(image, formats=QR)
    assert found.text.lower() == proof.line


def test_a_label_says_what_the_book_says(book: Book) -> None:
    (label,) = labels_of(book, [book.find("2")])
    head = book.find("2")
    words = "".join(one.text or "" for one in ET.fromstring(label_svg(label)).iter(f"{NS}text"))
    assert head.number in words and "120 turns" in words and head.started[:10] in words
    assert head.dcr_20c_ohm is not None and f"{head.dcr_20c_ohm:.2f} ±" in words
    assert "SIMULATED" in words


def test_a_coil_that_was_measured_since_shows_what_it_is_known_to_be_now(book: Book) -> None:
    one, two = labels_of(book, [book.find("1"), book.find("2")])
    head = book.find("1")
    assert one.cold is not None and two.cold is not None
    assert head.dcr_u95_ohm is not None and one.cold[1] < head.dcr_u95_ohm
    assert two.cold == (book.find("2").dcr_20c_ohm, book.find("2").dcr_u95_ohm)


@settings(max_examples=30)
@given(st.text(min_size=1, max_size=200), st.floats(1, 1e6))
def test_words_stay_clear_of_the_code(recipe: str, turns: float) -> None:
    """By the widest of the fonts that may stand in, DejaVu Sans: digits are 0.64 of their size wide, bold
    ones 0.70, from memory."""
    label = Label(PROOF, recipe, turns, (turns, 1.0), "2026-05-04", "not finished")
    root = ET.fromstring(label_svg(label))
    (group,) = [one for one in root.iter(f"{NS}g") if "scale" in one.get("transform", "")]
    begins = float(group.get("transform", "").split("(")[1].split(" ")[0])
    for one in root.iter(f"{NS}text"):
        wide = (0.72 if one.get("font-weight") else 0.64) * float(one.get("font-size", "0"))
        assert float(one.get("x", "0")) + wide * len(one.text or "") <= begins


def test_sheets_begin_where_they_are_asked_to_and_go_on(book: Book) -> None:
    labels = [LABEL] * 30
    sheet = Sheet("a4", 3, start=5)
    root = page(label_sheets(labels, sheet))
    stands_alone(root)
    first, second = [one for one in root.all("div") if one.attributes.get("class") == "sheet"]
    places = [one.attributes["class"] for one in first.all("div")]
    assert places == ["used"] * 4 + ["label"] * (sheet.places - 4)
    assert [one.attributes["class"] for one in second.all("div")] == ["label"] * (30 - (sheet.places - 4))
    assert [
        node.attributes["content"]
        for node in root.all("meta")
        if node.attributes.get("name") == "windctl-record"
    ] == [PROOF.line] * 30


@pytest.mark.parametrize("paper", ["a4", "letter"])
@pytest.mark.parametrize("columns", range(1, 7))
def test_labels_stay_on_the_paper(paper: str, columns: int) -> None:
    """A4 is 210 x 297 mm (ISO 216), Letter 215.9 x 279.4 mm (ANSI/ASME Y14.1)."""
    wide, tall = {"a4": (210.0, 297.0), "letter": (215.9, 279.4)}[paper]
    sheet = Sheet(paper, columns)
    width, height = sheet.label_mm
    assert width == 2 * height
    assert columns * width <= wide - 17 and sheet.rows * height <= tall - 17
    assert (sheet.rows + 1) * height > tall - 19
    assert sheet.places == columns * sheet.rows


def test_a_batch_has_its_labels_in_order(book: Book) -> None:
    labels = labels_of(book, batch_coils(book, BATCH))
    assert [label.proof.number[-4:] for label in labels] == ["0001", "0002", "0003"]
    assert {label.recipe for label in labels} == {RECIPE}
