"""`windctl coils measure` and `budget` on a small coil that was wound on the simulated machine."""

from __future__ import annotations

import json
import math
import re
import shutil
from pathlib import Path
from typing import Any

import pytest

from tests.cli import recipes
from windctl.book.open import open_book
from windctl.cli.main import run
from windctl.paper.told import said_since

Printed = pytest.CaptureFixture[str]

COPPER = 0.00393  # 1/K at 20 degrees C, IEC 60028


@pytest.fixture(scope="module")
def wound(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("measured")
    recipe, book = recipes.to_resistance(folder), folder / "shop.book"
    assert run(["wind", str(recipe), "--machine", "virtual", "-q", "--book", str(book)]) in (0, 6)
    return book


@pytest.fixture
def book(wound: Path, tmp_path: Path) -> str:
    return str(shutil.copy(wound, tmp_path / "shop.book"))


def asked(capsys: Printed, *arguments: str) -> Any:
    capsys.readouterr()
    assert run([*arguments, "--json"]) == 0
    return json.loads(capsys.readouterr().out)


def refused(capsys: Printed, *arguments: str) -> str:
    capsys.readouterr()
    assert run([*arguments]) == 2
    return capsys.readouterr().err


def measure(book: str, *more: str) -> tuple[str, ...]:
    return ("coils", "measure", "1", "--machine", "virtual", "--book", book, *more)


def test_a_reading_keeps_what_it_was_taken_with(book: str, capsys: Printed) -> None:
    """0.5 ohm of leads, 0.7 K over air of which exp(-2/3) is left two minutes after winding."""
    kept = asked(
        capsys,
        *measure(book, "--ohm", "0,2021k", "--celsius", "21,5", "--minutes", "2", "--stage", "on-machine"),
    )
    assert (kept["ohm"], kept["celsius"], kept["minutes"], kept["stage"]) == (202.1, 21.5, 2.0, "on-machine")
    warm = 1.5 + 0.7 * math.exp(-2 / 3)
    assert kept["dcr_20c_ohm"] == pytest.approx(201.6 / (1 + COPPER * warm), rel=1e-9)
    assert (kept["meter"], kept["gain_rel"]) == ("virtual (v1)", 0.003)
    again = asked(capsys, "coils", "show", "1", "--book", book)["addenda"]
    assert again[-1].items() >= {"kind": "coil_measured", "stage": "on-machine", "minutes": 2.0}.items()


def test_still_reads_the_same_only_where_that_can_be_told(book: str, capsys: Printed) -> None:
    first = asked(capsys, *measure(book, "--ohm", "200.5", "--celsius", "20", "--stage", "leads-on"))
    assert first["still_reads"]["against"] == "the record"
    later = asked(capsys, *measure(book, "--ohm", "200.9", "--celsius", "20", "--stage", "potted"))[
        "still_reads"
    ]
    assert later["against"].startswith("leads-on")
    assert later["statement"] == "same"
    assert later["difference_ohm"] == pytest.approx(0.4)
    gain = next(one for one in later["shared"] if one["source"].startswith("gain"))
    assert gain["before_ohm"] == pytest.approx(0.003 * 200, rel=0.01)
    assert gain["in_difference_ohm"] == pytest.approx(0.0, abs=0.01)
    strange = asked(
        capsys, *measure(book, "--ohm", "200.9", "--celsius", "20", "--meter", "pocket", "--gain-sd", "0,5")
    )
    assert strange["still_reads"]["statement"] == "cannot be told"
    shorted = asked(capsys, *measure(book, "--ohm", "190", "--celsius", "20", "--stage", "returned"))
    assert shorted["still_reads"]["statement"] == "changed"
    assert run([*measure(book, "--ohm", "190.2", "--celsius", "20", "--stage", "returned")]) == 0
    told = capsys.readouterr().out
    assert "it has changed" in told
    assert "common to both, and so not in the difference: gain of virtual (v1)" in told


def test_the_budget_shows_every_source_and_both_values(book: str, capsys: Printed) -> None:
    for ohm, stage in (("200.5", "leads-on"), ("190", "returned")):
        assert run([*measure(book, "--ohm", ohm, "--celsius", "20", "--stage", stage)]) == 0
    answer = asked(capsys, "coils", "budget", "1", "--book", book)
    assert [one["stage"] for one in answer["readings"]] == ["on-machine", "leads-on", "returned"]
    made, now = answer["made"], answer["now"]
    assert now["dcr_20c_ohm"] == pytest.approx(189.5)
    for value in (made, now):
        assert math.hypot(*(line["ohm"] for line in value["budget"])) == pytest.approx(value["dcr_sd_ohm"])
    assert sum(one["weight"] for one in made["readings"]) == pytest.approx(1.0)
    assert run(["coils", "budget", "1", "--book", book]) == 0
    told = capsys.readouterr().out
    assert "as it was made: " in told
    assert "from readings 1, 2" in told
    assert "now: 189.5 ± 1.6 ohm at 20 °C, from reading 3" in told
    assert "scatter of reading 3" in told


def test_inductance_and_resonance_are_kept_with_their_conditions(book: str, capsys: Printed) -> None:
    kept = asked(
        capsys,
        *measure(book, "--inductance", "2,31", "--quality", "3.1", "--at-hz", "1k", "--resonance", "6,2k"),
        *("--load-pf", "470", "--load-ohm", "1000k"),
    )
    assert (kept["henry"], kept["quality"], kept["test_hz"]) == (2.31, 3.1, 1000.0)
    assert (kept["resonance_hz"], kept["load_pf"], kept["load_ohm"]) == (6200.0, 470.0, 1e6)
    assert kept["ohm"] is None
    with open_book(Path(book), create=False, readonly=True) as opened:
        said = said_since(opened.addenda("1")[-1])
    assert said is not None
    assert "inductance 2.31 H at 1 000 Hz" in said[2]
    assert "resonance at 6 200 Hz with 470 pF and 1000 kohm across it" in said[2]
    assert run(["coils", "verify", "--book", book]) == 0


def test_what_does_not_go_together_is_refused(book: str, capsys: Printed) -> None:
    assert "go together" in refused(capsys, *measure(book, "--ohm", "200"))
    assert "belong to --ohm" in refused(capsys, *measure(book, "--mass", "1", "--minutes", "2"))
    assert "belongs to --inductance" in refused(capsys, *measure(book, "--mass", "1", "--at-hz", "1k"))
    assert "belong to --resonance" in refused(capsys, *measure(book, "--inductance", "2", "--load-pf", "9"))
    assert "nothing was measured" in refused(capsys, *measure(book, "--stage", "potted"))


def test_what_left_the_bench_teaches_no_resistance(book: str, capsys: Printed) -> None:
    def taught() -> int:
        with open_book(Path(book), create=False, readonly=True) as opened:
            return len(opened.lessons()[0].lesson.measured)

    before = taught()
    assert run([*measure(book, "--ohm", "200.5", "--celsius", "20", "--stage", "returned")]) == 0
    assert taught() == before
    assert run([*measure(book, "--ohm", "200.5", "--celsius", "20", "--stage", "potted")]) == 0
    assert taught() == before + 1


def test_mass_and_build_are_told_beside_the_plans_and_a_slip_shows(
    book: str, tmp_path: Path, capsys: Printed
) -> None:
    """The plan's figures at as many turns; a coil weighed with its bobbin is far off."""
    turns = asked(capsys, "coils", "show", "1", "--book", book)["turns"]
    recipe = str(recipes.to_resistance(tmp_path))
    plan = asked(capsys, "plan", recipe, "--turns", f"{turns:.0f}", "--machine", "virtual")
    grams, build = plan["wire_mass_g"], plan["build_mm"]
    assert (
        run(["coils", "measure", "1", "--book", book, "--mass", f"{grams:.3f}", "--build", f"{build:.3f}"])
        == 0
    )
    told = capsys.readouterr().out
    figures = re.findall(r"(wire|build) ([\d.]+) (?:g|mm), where the plan has ([\d.]+)", told)
    assert [(name, ours == theirs) for name, ours, theirs in figures] == [("wire", True), ("build", True)]
    assert "slip" not in told
    assert run(["coils", "measure", "1", "--book", book, "--mass", f"{4 * grams:.2f}"]) == 0
    assert "is the bobbin taken off?" in capsys.readouterr().out
