"""The pieces of a drawing, read back by the standard library's XML parser."""

from __future__ import annotations

import math
import xml.etree.ElementTree as ET

import pytest
from hypothesis import given
from hypothesis import strategies as st

from windctl.paper import svg

# XML 1.0, fifth edition, production 2 (Char), besides tab and line ends.
XML_CHARS = ((0x20, 0xD7FF), (0xE000, 0xFFFD), (0x10000, 0x10FFFF))

NS = "{http://www.w3.org/2000/svg}"


def read(*parts: str) -> ET.Element:
    text = svg.document(100, 50, parts, title="T", desc="D", ident="one")
    return ET.fromstring(text)


@given(st.text())
def test_any_text_comes_back_as_it_was_or_marked_where_no_document_can_hold_it(words: str) -> None:
    (found,) = read(svg.text(1, 2, words)).iter(f"{NS}text")
    told = "".join(
        c if any(low <= ord(c) <= high for low, high in XML_CHARS) or c in "\t\n\r" else "�" for c in words
    )
    assert (found.text or "") == told.replace("\r\n", "\n").replace("\r", "\n")  # XML 1.0, 2.11: line ends


@given(st.text())
def test_any_text_may_stand_in_an_attribute(words: str) -> None:
    assert len(list(read(svg.element("g", "", class_=words)))) == 3


@given(st.floats(-1e6, 1e6))
def test_a_number_is_plain_and_right_to_its_decimals(value: float) -> None:
    text = svg.number(value)
    assert abs(float(text) - value) <= 0.005 + 1e-9
    assert "e" not in text and text != "-0" and not text.endswith(".")


def test_what_is_no_number_is_refused() -> None:
    for value in (math.nan, math.inf, -math.inf):
        with pytest.raises(ValueError, match="cannot be drawn"):
            svg.number(value)


def test_a_drawing_is_named_for_whoever_does_not_see_it() -> None:
    root = read(svg.line(0, 0, 1, 1))
    assert root.get("role") == "img"
    assert root.get("aria-labelledby") == "one-title one-desc"
    assert [root.findtext(f"{NS}{name}") for name in ("title", "desc")] == ["T", "D"]


def test_series_differ_without_colour() -> None:
    """Dash, weight and form alone tell any two of them apart."""
    looks = {(style.pen.width, style.pen.dash, style.form) for style in svg.STYLES}
    assert len(looks) == len(svg.STYLES)
    assert len({style.form for style in svg.STYLES}) == len(svg.STYLES)
    assert svg.style(len(svg.STYLES) + 1) == svg.style(1)


def test_every_form_can_be_drawn_and_no_two_are_the_same() -> None:
    drawn = {svg.mark(5, 5, style.form) for style in svg.STYLES}
    assert len(drawn) == len(svg.STYLES)
    read(*drawn)
    with pytest.raises(KeyError):
        svg.mark(5, 5, "star")


def test_a_line_needs_two_points_and_an_area_three() -> None:
    assert svg.polyline([(0, 0)]) == "" and svg.polygon([(0, 0), (1, 1)], "none") == ""
    assert svg.polyline([(0, 0), (1, 2.5)]).startswith('<polyline points="0,0 1,2.5"')
