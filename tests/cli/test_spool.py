"""`windctl spool`, and planning and winding with what the coils of a spool have taught."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest

from tests.cli import recipes
from windctl.cli.main import run

Printed = pytest.CaptureFixture[str]


@pytest.fixture
def book(tmp_path: Path) -> str:
    return str(tmp_path / "shop.book")


@pytest.fixture
def recipe(tmp_path: Path) -> str:
    return str(recipes.to_turns(tmp_path, 400))


def asked(capsys: Printed, *arguments: str) -> Any:
    """The JSON that a call answers with."""
    capsys.readouterr()
    assert run([*arguments, "--json"]) == 0
    return json.loads(capsys.readouterr().out)


def refused(capsys: Printed, *arguments: str) -> str:
    """What a call says that ends as wrong usage."""
    capsys.readouterr()
    assert run(list(arguments)) == 2
    return capsys.readouterr().err


NEW = ("spool", "add", "--gauge", "AWG 42", "--enamel", "grade 1")


def test_a_new_spool_and_what_is_on_it(book: str, capsys: Printed) -> None:
    """250 g of AWG 42: by its copper's and enamel's area (1/58 ohm mm2/m, densities from memory) 8.55 km."""
    made = asked(capsys, *NEW, "--net", "250", "--ohm-per-m", "5.5", "--book", book)
    assert (made["spool"], made["coils"], made["pieces"]) == ("s1", 0, 1)
    assert made["left_m"] == pytest.approx(8550, rel=0.02)
    assert made["ohm_per_m"] == pytest.approx(5.5, rel=0.002)
    assert made["ohm_per_m_sd"] == pytest.approx(0.005 * 5.5, rel=0.05)
    assert asked(capsys, *NEW, "--book", book)["spool"] == "s2"
    assert (
        asked(capsys, "spool", "add", "attic-7", "--diameter", "0.063", "--overall", "0.072", "--book", book)[
            "wire"
        ]
        == "0.063 mm, 0.072 mm overall"
    )
    listed = asked(capsys, "spool", "list", "--book", book)["spools"]
    assert [each["spool"] for each in listed] == ["attic-7", "s1", "s2"]
    assert listed[2]["left_m"] is None
    assert run(["spool", "list", "--book", book]) == 0
    assert "AWG 42, grade 1" in capsys.readouterr().out


def test_without_a_book_there_are_no_spools(book: str, capsys: Printed, recipe: str) -> None:
    assert asked(capsys, "spool", "list")["spools"] == []
    capsys.readouterr()
    assert run(["plan", recipe, "--spool", "s1"]) == 1
    assert "there is no spool 's1'" in capsys.readouterr().err
    assert run(["spool", "show", "s1", "--book", book]) == 1


def test_what_is_no_wire_is_refused(book: str, capsys: Printed) -> None:
    for arguments, words in (
        (("--gauge", "AWG 42"), "how thick is its enamel?"),
        (("--gauge", "AWG 99", "--enamel", "grade 1"), "there is no such wire"),
        (("--enamel", "grade 1"), "which wire is it?"),
        (("--gauge", "AWG 42", "--overall", "0.05"), "less than the bare"),
        (("--gauge", "AWG 42", "--enamel", "grade 1", "--ohm-per-m", "9"), "about 5.47 ohm per metre"),
        (("--gauge", "AWG 42", "--enamel", "grade 1", "--ohm-per-m-sd", "1"), "stands alone"),
        (("a b", "--gauge", "AWG 42", "--enamel", "grade 1"), "cannot be a spool's name"),
    ):
        assert words in refused(capsys, "spool", "add", *arguments, "--book", book)
    assert run([*NEW, "--net", "nan", "--book", book]) == 2


def test_a_spool_is_weighed_and_measured(book: str, capsys: Printed) -> None:
    assert run([*NEW, "--book", book]) == 0
    weighed = asked(capsys, "spool", "weigh", "s1", "100", "--book", book)
    assert weighed["left_m"] == pytest.approx(3420, rel=0.02)
    # two metres of 5.58 ohm/m at 20 C read 0.39 % a degree more at 25 C (IEC 60028)
    ohm = str(2 * 5.58 * (1 + 0.00393 * 5))
    piece = ("spool", "measure", "s1", "--length", "2", "--ohm", ohm, "--celsius", "25", "--book", book)
    measured = asked(capsys, *piece)
    assert measured["ohm_per_m"] == pytest.approx(5.58, rel=0.002)
    assert [fact["kind"] for fact in measured["facts"]] == ["spool_added", "spool_weighed", "spool_measured"]
    assert "no wire of this size" in refused(
        capsys, "spool", "measure", "s1", "--length", "2", "--ohm", "20", "--celsius", "20", "--book", book
    )
    assert run(["spool", "weigh", "s9", "100", "--book", book]) == 1


def test_more_wire_than_there_was_is_told_at_once(book: str, capsys: Printed) -> None:
    assert run([*NEW, "--book", book]) == 0
    for grams, slip in (("100", False), ("101", False), ("60", False), ("160", True)):
        capsys.readouterr()
        assert run(["spool", "weigh", "s1", grams, "--book", book]) == 0
        assert ("was the empty spool taken off?" in capsys.readouterr().err) is slip, grams


def test_all_that_a_new_spool_lacks_is_asked_for_at_once(book: str, capsys: Printed) -> None:
    told = refused(capsys, "spool", "add", "--book", book)
    assert "which wire" in told
    assert "how thick is its enamel" in told


def wind(capsys: Printed, recipe: str, book: str, *more: str) -> Any:
    return asked(capsys, "wind", recipe, "--machine", "virtual", "--book", book, "-q", *more)


def test_each_coil_teaches_the_next_and_withdrawing_it_restores_the_prior(
    book: str, recipe: str, capsys: Printed
) -> None:
    """Three coils wound from a spool: the plan closes in on its wire, and without its last coil it is what it
    was before, to the last bit."""
    assert run([*NEW, "--net", "250", "--book", book]) == 0
    plans, truths = [], []
    for _ in range(3):
        plans.append(asked(capsys, "plan", recipe, "--spool", "s1", "--book", book))
        truths.append(wind(capsys, recipe, book, "--spool", "s1")["plant"]["true_dcr_20c_ohm"])
    last = asked(capsys, "plan", recipe, "--spool", "s1", "--book", book)
    assert [each["learnt_from"]["spool_coils"] for each in plans] == [0, 1, 2]
    assert plans[1]["dcr_sd_ohm"] < 0.5 * plans[0]["dcr_sd_ohm"]
    assert len(set(truths)) == 3  # other coils from the same spool
    for plan, truth in zip(plans[1:], truths[1:], strict=True):
        assert abs(plan["dcr_20c_ohm"] - truth) < 3.0 * plan["dcr_sd_ohm"]

    withdraw = ("coils", "withdraw", "3", "--reason", "the core was warped", "--book", book)
    assert asked(capsys, *withdraw)["reason"] == "the core was warped"
    assert asked(capsys, "plan", recipe, "--spool", "s1", "--book", book) == plans[2]
    assert "withdrawn already" in refused(capsys, *withdraw)
    shown = asked(capsys, "spool", "show", "s1", "--book", book)
    (gone,) = shown["withdrawn"]
    assert gone["reason"] == "the core was warped"
    assert gone["coil"].startswith("v1-") and gone["coil"].endswith("-0003")
    assert (shown["coils"], shown["taught_by"]) == (3, 2)  # its wire is gone all the same
    assert run([*withdraw, "--undo"]) == 0
    assert asked(capsys, "plan", recipe, "--spool", "s1", "--book", book) == last
    assert "is not withdrawn" in refused(capsys, *withdraw, "--undo")
    assert run(["coils", "verify", "--book", book]) == 0


def test_a_spool_says_for_how_many_coils_it_is_enough(book: str, recipe: str, capsys: Printed) -> None:
    """From what its last coil took; a spool that nothing was wound from, from the last coil of such wire."""
    assert run([*NEW, "--net", "25", "--book", book]) == 0
    planned = asked(capsys, "plan", recipe, "--spool", "s1", "--book", book)["wire_length_m"]
    assert asked(capsys, "spool", "show", "s1", "--book", book)["coils_left"] is None
    wind(capsys, recipe, book, "--spool", "s1")
    assert run([*NEW, "--net", "25", "--book", book]) == 0
    assert (
        run(["spool", "add", "--gauge", "AWG 43", "--enamel", "grade 1", "--net", "25", "--book", book]) == 0
    )
    for name in ("s1", "s2"):
        seen = asked(capsys, "spool", "show", name, "--book", book)
        assert seen["metres_each"] == pytest.approx(planned, rel=0.01)
        least = seen["left_m"] - 1.645 * (850.0 * 0.04)  # 4 % is how little the table knows of the wire
        assert seen["coils_left"] == pytest.approx(least / planned, abs=1.5)
        assert seen["coil_each"].endswith("-0001")
    assert asked(capsys, "spool", "show", "s3", "--book", book)["coils_left"] is None  # no coil of AWG 43
    capsys.readouterr()
    assert run(["plan", recipe, "--spool", "s2", "--book", book]) == 0
    assert "such coils" in capsys.readouterr().out


def test_spools_listed_one_by_one_are_told_as_those_learnt_at_once(
    book: str, recipe: str, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    """As in a book of so many coils that none is learnt from all of them."""
    for name in ("s1", "s2"):
        asked(capsys, "spool", "add", name, "--gauge", "AWG 42", "--enamel", "grade 1", "--book", book)
    for name, seed in (("s1", "3"), ("s2", "4"), ("s1", "5")):
        wind(capsys, recipe, book, "--spool", name, "--plant-seed", seed)
    at_once = asked(capsys, "spool", "list", "--book", book)["spools"]
    monkeypatch.setattr("windctl.desk.spools._BY_ITSELF", 0)
    one_by_one = asked(capsys, "spool", "list", "--book", book)["spools"]
    assert [one.pop("spool") for one in one_by_one] == [one.pop("spool") for one in at_once] == ["s1", "s2"]
    for one, all_ in zip(one_by_one, at_once, strict=True):
        assert one["taught_by"] == all_["taught_by"] > 0
        for key in ("ohm_per_m", "ohm_per_m_sd"):  # what later coils say of an older one's wire is left out
            assert one.pop(key) == pytest.approx(all_.pop(key), rel=1e-3)
        assert one == all_


def test_without_a_spool_a_simulated_coil_comes_out_the_same_again(
    book: str, recipe: str, capsys: Printed
) -> None:
    first, second = wind(capsys, recipe, book), wind(capsys, recipe, book)
    assert first["trace_digest"] == second["trace_digest"]
    assert first["dcr_20c_ohm"] == second["dcr_20c_ohm"]


def test_a_spool_with_another_wire_is_refused_before_anything_moves(
    book: str, recipe: str, capsys: Printed
) -> None:
    assert run(["spool", "add", "--gauge", "AWG 43", "--enamel", "grade 1", "--book", book]) == 0
    words = refused(capsys, "wind", recipe, "--machine", "virtual", "--spool", "s1", "--book", book)
    assert "the recipe asks for AWG 42, and spool s1 has AWG 43" in words
    assert asked(capsys, "coils", "list", "--book", book)["coils"] == []


def test_a_finished_coil_is_measured_and_noted(book: str, recipe: str, capsys: Printed) -> None:
    assert run([*NEW, "--book", book]) == 0
    wound = wind(capsys, recipe, book, "--spool", "s1", "--readings", "none")
    before = asked(capsys, "plan", recipe, "--spool", "s1", "--book", book)
    assert before["learnt_from"]["spool_coils"] == 0  # counted turns only: nothing was measured
    truth = wound["plant"]["true_dcr_20c_ohm"]
    measure = ("coils", "measure", "1", "--machine", "virtual", "--book", book, "--no-input")
    shown = truth * (1 + 0.00393 * 3) + 0.5  # at 23 C, through the profile's leads
    kept = asked(capsys, *measure, "--ohm", f"{shown:.4f}", "--celsius", "23", "--mass", "1.45")
    assert kept["dcr_20c_ohm"] == pytest.approx(truth, rel=1e-5)
    after = asked(capsys, "plan", recipe, "--spool", "s1", "--book", book)
    assert after["learnt_from"]["spool_coils"] == 1
    assert abs(after["dcr_20c_ohm"] - truth) < 3.0 * after["dcr_sd_ohm"] < 0.6 * 3.0 * before["dcr_sd_ohm"]
    assert "go together" in refused(capsys, *measure, "--ohm", "300")
    assert "nothing was measured" in refused(capsys, *measure)
    assert run(["coils", "note", "1", "for the demo", "--by", "Demo Winder", "--book", book]) == 0
    capsys.readouterr()
    assert run(["coils", "show", "1", "--book", book]) == 0
    told = capsys.readouterr().out
    assert "Demo Winder: Note: for the demo" in told
    assert "wire 1.450 ± 0.039 g" in told


def test_a_slip_by_a_thousand_is_not_kept(book: str, recipe: str, capsys: Printed) -> None:
    wind(capsys, recipe, book)
    words = refused(
        capsys, "coils", "measure", "1", "--ohm", "0.3", "--celsius", "20", "--no-input", "--book", book
    )
    assert "thousand times off" in words


def test_a_cold_reading_is_judged(book: str, tmp_path: Path, capsys: Printed) -> None:
    """By its whole interval: gain 0.3 %, thermometer 0.5 K at 0.393 % each, noise 0.1 %, leads 0.3 and floor
    0.2 ohm, in quadrature times 1.96: 0.83 % of 200 ohm."""
    recipe = str(recipes.to_resistance(tmp_path))  # 200 ohm, 2 %
    wind(capsys, recipe, book)
    measure = ("coils", "measure", "1", "--machine", "virtual", "--celsius", "20", "--book", book)
    for ohm, verdict in (("200.5", "within"), ("203.5", "not judged"), ("207", "outside")):
        kept = asked(capsys, *measure, "--ohm", ohm)
        assert kept["verdict"] == verdict
        assert kept["dcr_u95_ohm"] == pytest.approx(0.0083 * 200, rel=0.03)
    capsys.readouterr()
    assert run([*measure, "--ohm", "200.5"]) == 0
    assert "200.0 ± 1.6 ohm at 20 °C: within" in capsys.readouterr().out
