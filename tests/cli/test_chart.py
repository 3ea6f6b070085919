"""`windctl chart` on a book of demo coils whose resistances are given."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any
from xml.etree import ElementTree

import pytest

from tests.book.samples import finished, packed, seal, started, wound
from windctl.book.open import open_book
from windctl.cli.main import run
from windctl.record.addenda import CoilMeasured, CoilWithdrawn
from windctl.record.events import Target

Printed = pytest.CaptureFixture[str]

# NIST/SEMATECH e-Handbook 6.3.2.2, flow rates of ten batches (from memory; they give its limits).
FLOW = (49.6, 47.6, 49.9, 51.3, 47.8, 51.2, 52.6, 52.4, 53.6, 52.1)


def lot(folder: Path, values: tuple[float, ...], **changes: Any) -> str:
    """A book with coils of two turns that came out so, all of batch "demo"."""
    path = folder / "lot.book"
    with open_book(path) as book:
        for n, ohm in enumerate(values, 1):
            when = f"2026-05-{n:02d}T08:00:00+02:00"
            first = started(n, wall_time=when, batch="demo", **changes)
            with book.begin_coil("b1", 2026, first) as writer:
                writer.commit(packed(wound(writer.started, 2)))
                writer.commit(packed([finished(2, dcr_20c_ohm=ohm)]))
                seal(book, writer)
    return str(path)


def asked(capsys: Printed, *arguments: str) -> Any:
    capsys.readouterr()
    assert run([*arguments, "--json"]) == 0
    return json.loads(capsys.readouterr().out)


def told(capsys: Printed, *arguments: str) -> str:
    capsys.readouterr()
    assert run([*arguments]) == 0
    return capsys.readouterr().out


def refused(capsys: Printed, *arguments: str) -> str:
    capsys.readouterr()
    assert run([*arguments]) == 2
    return capsys.readouterr().err


def test_the_handbooks_limits_through_the_book(tmp_path: Path, capsys: Printed) -> None:
    """NIST/SEMATECH e-Handbook 6.3.2.2: 45.8159 and 55.8041."""
    book = lot(tmp_path, FLOW)
    answer = asked(capsys, "chart", "--batch", "demo", "--quantity", "resistance", "--book", book)
    assert answer["limits"]["low"] == pytest.approx(45.8159, abs=5e-5)
    assert answer["limits"]["high"] == pytest.approx(55.8041, abs=5e-5)
    assert [coil["value"] for coil in answer["coils"]] == list(FLOW)
    assert answer["says"][0] == "nothing is out by the Western Electric rules"
    words = told(capsys, "chart", "--batch", "demo", "--quantity", "resistance", "--book", book)
    assert "mean 50.8 ohm, limits 45.8 to 55.8 (three sigma)" in words
    assert words.count("o") > 20  # every coil is drawn, twice


def test_what_the_target_left_free_is_charted(tmp_path: Path, capsys: Printed) -> None:
    turns = Target("turns", 2.0, 1.0, 2, 2)
    book = lot(tmp_path, FLOW[:4], target=turns)
    answer = asked(capsys, "chart", "--batch", "demo", "--book", book)
    assert answer["quantity"] == "resistance"
    per_turn = asked(capsys, "chart", "--batch", "demo", "--book", book, "--quantity", "ohm-per-turn")
    assert per_turn["coils"][0]["value"] == pytest.approx(FLOW[0] / 2)
    assert "all coils have 2 turns" in told(capsys, "chart", "--batch", "demo", "--book", book)
    (tmp_path / "more").mkdir()
    other = lot(tmp_path / "more", FLOW[:4], target=Target("dcr_20c_ohm", 50.0, 10.0, 1, 4))
    answer = asked(capsys, "chart", "--batch", "demo", "--book", other)
    assert answer["quantity"] == "turns"
    assert answer["capability"]["of"] == "resistance"
    assert (answer["capability"]["low"], answer["capability"]["high"]) == (45.0, 55.0)


def test_since_when_something_is_out_is_said_and_drawn(tmp_path: Path, capsys: Printed) -> None:
    values = (50.1, 49.9) * 6 + (51.0, 51.1, 51.0)
    book = lot(tmp_path, values, target=Target("turns", 2.0, 1.0, 2, 2))
    drawing = tmp_path / "lot.svg"
    chart = ("chart", "--batch", "demo", "--book", book, "--baseline", "12")
    words = told(capsys, *chart, "--svg", str(drawing))
    assert "since b1-2026-0013: beyond the three-sigma limit, above (Western Electric rule 1)" in words
    assert "from b1-2026-0012 to b1-2026-0013: a step of +1.10 ohm, more than the limit of 0.65 ohm" in words
    assert "from the first 12 coils" in words
    texts = {element.text for element in ElementTree.parse(drawing).iter() if element.text}
    assert "limit 50.53 ohm" in texts
    assert any("since b1-2026-0013" in text for text in texts)  # for whoever does not see it
    answer = asked(capsys, *chart, "--low", "49", "--high", "52")
    assert {signal["first"] for signal in answer["signals"]} == {"b1-2026-0013"}
    assert answer["wide_ranges"] == ["b1-2026-0013"]
    assert answer["capability"]["cpk"]["low"] < answer["capability"]["cpk"]["value"]


def test_coils_that_do_not_count_are_named(tmp_path: Path, capsys: Printed) -> None:
    book = lot(tmp_path, FLOW, target=Target("turns", 2.0, 1.0, 2, 2))
    with open_book(Path(book)) as opened:
        opened.amend("b1-2026-0003", CoilWithdrawn("2026-06-01T08:00:00+02:00", "Demo Winder", "bent core"))
        opened.amend("b1-2026-0004", CoilMeasured("2026-06-01T08:00:00+02:00", "Demo Winder", grams=1.0))
    capsys.readouterr()
    assert run(["chart", "--batch", "demo", "--book", book]) == 0
    printed = capsys.readouterr()
    assert "not counted: b1-2026-0003 (withdrawn)" in printed.err
    assert "resistance of 9 coils" in printed.out


def test_what_is_no_chart_is_refused(tmp_path: Path, capsys: Printed) -> None:
    book = lot(tmp_path, FLOW[:2])
    assert "which coils?" in refused(capsys, "chart", "--book", book)
    assert "no such coils" in refused(capsys, "chart", "--batch", "other", "--book", book)
    assert "no such coils" in refused(capsys, "chart", "--spool", "s9", "--book", book)
    assert "at least 2" in refused(capsys, "chart", "coil:*-0001", "--book", book)
    assert "is not below" in refused(
        capsys, "chart", "--batch", "demo", "--low", "9", "--high", "8", "--book", book
    )
    with (
        open_book(Path(book)) as opened,
        opened.begin_coil("b1", 2026, started(7, recipe_name="other", batch="demo")) as writer,
    ):
        writer.commit(packed(wound(writer.started, 2)))
        writer.commit(packed([finished(2)]))
        seal(opened, writer)
    assert "a chart is of one recipe" in refused(capsys, "chart", "--batch", "demo", "--book", book)
    assert "2 coils" in told(capsys, "chart", "recipe:bridge", "--batch", "demo", "--book", book)
