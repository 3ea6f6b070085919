"""The report of one coil: true to the record, whole by itself, and closed to whatever a record holds."""

from __future__ import annotations

import re
from dataclasses import replace
from math import pi, sqrt

import pytest

from tests.book import samples
from tests.paper.conftest import BATCH, BY, NOTE, RECIPE
from tests.paper.reading import Node, page, rows, stands_alone, table
from windctl.book.book import Book
from windctl.desk.papers import coil_facts, report_text
from windctl.paper.report import coil_report
from windctl.record.addenda import CoilWithdrawn, MagnetTold
from windctl.shop.life import Life


@pytest.fixture(scope="module")
def text(book: Book) -> str:
    return report_text(book, book.find("1"))


@pytest.fixture(scope="module")
def report(text: str) -> Node:
    return page(text)


def test_it_is_whole_and_accessible(report: Node) -> None:
    stands_alone(report)
    assert len(report.all("h1")) == 1
    headings = [node.text for node in report.all("h2")]
    assert headings == [
        "Resistance",
        "Measurements and their uncertainty",
        "Speed and tension",
        "Section",
        "What happened",
        "Since then",
        "Proof",
        "Settings",
    ]


def test_it_names_its_record_for_machines_and_people(book: Book, report: Node) -> None:
    head = book.find("1")
    metas = {node.attributes.get("name"): node.attributes.get("content", "") for node in report.all("meta")}
    assert metas["windctl-record"] == f"{head.number} {head.id} {head.record_digest}"
    proof = dict(rows(table(report, "What this page stands on")))
    assert proof["number"] == head.number and proof["id"] == head.id
    assert proof["digest of the record"] == head.record_digest
    assert proof["record"].startswith("closed")


def test_what_a_record_holds_stays_text(report: Node) -> None:
    assert re.fullmatch(r"v1-\d{4}-0001", report.all("h1")[0].text)
    assert RECIPE in report.all("header")[0].text
    assert f"batch {BATCH}, of 3" in report.all("header")[0].text
    (since,) = [row for row in rows(table(report, "Said after")) if row[2].startswith("Note")]
    assert since[1:] == [BY, f"Note: {NOTE}"]


def test_the_same_record_gives_the_same_page(book: Book, text: str) -> None:
    assert report_text(book, book.find("1")) == text


def test_a_simulated_coil_says_so(report: Node) -> None:
    assert "There is no such coil" in report.all("header")[0].text


def test_the_curve_ends_at_the_recorded_resistance(book: Book, report: Node) -> None:
    """The last mark of the chart, read back through the axes' own ticks."""
    head = book.find("1")
    chart = next(one for one in report.all("svg") if one.all("title")[0].text == "Resistance over turns")
    (frame,) = [node for node in chart.all("g") if "clip-path" in node.attributes]
    mark = frame.all("circle")[-1].attributes
    ticks = [node for node in chart.all("text") if re.fullmatch(r"[\d .]+", node.text)]
    across = [node for node in ticks if node.attributes.get("text-anchor") == "middle"]
    up = [node for node in ticks if node.attributes.get("text-anchor") == "end"]

    def value(nodes: list[Node], axis: str, at: float, shift: float) -> float:
        first, last = nodes[0], nodes[-1]
        places = [float(node.attributes[axis]) - shift for node in (first, last)]
        values = [float(node.text.replace(" ", "")) for node in (first, last)]
        return values[0] + (at - places[0]) / (places[1] - places[0]) * (values[1] - values[0])

    assert head.turns is not None and head.dcr_20c_ohm is not None
    assert value(across, "x", float(mark["cx"]), 0.0) == pytest.approx(head.turns, rel=2e-3)
    assert value(up, "y", float(mark["cy"]), 4.0) == pytest.approx(head.dcr_20c_ohm, rel=5e-3)


def test_the_forecast_closes_in_on_what_the_record_says(book: Book) -> None:
    facts = coil_facts(book, book.find("1"))
    first, last = facts.curve[0], facts.curve[-1]
    assert first.turn == 0.0 and first.ohm_20c == 0.0
    assert last.final_sd < first.final_sd / 3
    assert facts.final is not None
    assert last.final_ohm == pytest.approx(facts.final[0], rel=1e-9)
    assert 1.959963984540054 * last.final_sd == pytest.approx(facts.final[1], rel=1e-9)


def test_the_lines_of_a_budget_make_up_its_sum(report: Node) -> None:
    """Independent inputs add as variances: JCGM 100:2008, 5.1.2."""
    budget = table(report, "Cold resistance")
    lines = rows(budget)[1:-1]
    parts = [float(row[2].removesuffix(" ohm")) for row in lines]
    whole = float(rows(budget)[-1][2].removesuffix(" ohm"))
    assert sqrt(sum(part**2 for part in parts)) == pytest.approx(whole, rel=0.06)  # two digits each
    percents = [float(row[3].removesuffix(" %")) for row in lines]
    assert sum(percents) == pytest.approx(100.0, abs=0.1 * len(lines))


def test_the_readings_since_are_told_with_what_they_say(report: Node) -> None:
    found = rows(table(report, "Resistance of the finished coil"))
    assert [row[0][:2] for row in found[1:]] == ["1:", "2:"]
    assert found[2][4] in ("same", "changed", "cannot be told")
    (besides,) = rows(table(report, "Measured besides"))[1:]
    assert besides[1:] == ["inductance", "0.0021 H", "at 1 000 Hz"]


def test_hum_is_the_induced_voltage_of_turns_times_area(report: Node) -> None:
    """Faraday: V = 2*pi*f*B*N*A in a uniform field. The area by the core's own measures: a rectangle of 50 by
    6 mm with half circles at its ends, and what 120 turns add to it, which is less than a tenth."""
    hum = table(report, "Hum")
    area = float(hum.all("caption")[0].text.split(" area of ")[1].split(" ")[0])
    bare = 120 * (50 * 6 + pi * 3**2) * 1e-6
    assert bare < area < 1.1 * bare
    for (hz, volt), mains in zip(rows(hum)[1:], (50.0, 60.0), strict=True):
        assert hz == f"{mains:g} Hz"
        assert float(volt.split(" ")[0]) == pytest.approx(2 * pi * mains * area, rel=0.01)


def test_every_setting_of_the_recipe_is_shown(report: Node) -> None:
    shown = [dict(rows(one)) for one in report.all("table") if one.attributes.get("class") == "pairs"]
    told = {name: value for pairs in shown for name, value in pairs.items()}
    assert told["core length"] == "56 mm" and told["flange gap"] == "11 mm"
    assert told["way of the wire, from the strings"] == "clockwise"
    assert told["pole towards the strings"] == "north"
    assert told["seed"] == "1947" and told["pitch"] == "0.22 mm"
    assert told["cruising speed"] == "1000 rpm" and told["turns"] == "120"


def test_an_open_coil_says_that_its_digest_will_change(tmp_path_factory: pytest.TempPathFactory) -> None:
    from windctl.book.open import open_book

    path = tmp_path_factory.mktemp("open") / "shop.book"
    with open_book(path) as opened:
        with opened.begin_coil("b1", 2026, samples.started(2)) as writer:
            writer.commit(samples.packed(samples.wound(writer.started, 1)))
        root = page(report_text(opened, opened.find("b1-2026-0001")))
    stands_alone(root)
    assert "still open" in root.all("header")[0].text
    assert dict(rows(table(root, "What this page stands on")))["record"].startswith("still open")


def test_a_recipe_that_cannot_be_read_any_more_leaves_out_what_needs_it(book: Book) -> None:
    facts = coil_facts(book, book.find("2"))
    started = replace(facts.started, recipe_text="not = [a recipe", profile_json="{", basis=None)
    root = page(coil_report(replace(facts, started=started)))
    stands_alone(root)
    assert "Section" not in [node.text for node in root.all("h2")]
    assert "Proof" in [node.text for node in root.all("h2")]


def test_a_coil_without_a_reading_says_that_nothing_was_measured(book: Book) -> None:
    facts = coil_facts(book, book.find("2"))
    blind = replace(
        facts,
        head=replace(facts.head, dcr_20c_ohm=None, dcr_u95_ohm=None),
        life=Life((), (), None, None),
        curve=(),
        addenda=(),
    )
    root = page(coil_report(blind))
    stands_alone(root)
    assert "not known" in root.all("header")[0].text
    assert "No resistance of the finished coil was read" in root.text


def test_a_withdrawn_coil_says_so_and_a_magnet_told_of_beats_the_recipe(book: Book) -> None:
    facts = coil_facts(book, book.find("2"))
    since = (
        CoilWithdrawn("2026-05-04T10:00", BY, "wrong <wire>"),
        MagnetTold("2026-05-04T10:00", BY, "south"),
    )
    root = page(coil_report(replace(facts, addenda=(*facts.addenda, *since))))
    stands_alone(root)
    assert f"Withdrawn by {BY}: wrong <wire>" in root.all("header")[0].text
    assert "The south pole faces the strings" in root.all("header")[0].text
