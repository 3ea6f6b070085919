"""`windctl pair` on a small stock of demo coils."""

from __future__ import annotations

import itertools
import json
import math
import shutil
import xml.etree.ElementTree as ET
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest

from tests.book.samples import ENDED
from tests.cli.pairable import NORTH, SOUTH, Demo, stocked
from windctl.book.open import open_book
from windctl.cli.main import run
from windctl.desk import stock as stock_room
from windctl.record.addenda import CoilMeasured, CoilWithdrawn, MagnetTold, magnet, paired

Printed = pytest.CaptureFixture[str]
WHO = "Demo Winder"
# North and south to the strings; the first reads a little more than its turns should.
SIX = (
    Demo(NORTH, off=0.002), Demo(SOUTH, turns=5121), Demo(NORTH, turns=5060),
    Demo(SOUTH, turns=5001, batch="lot 2"), Demo(SOUTH, turns=5058), Demo(NORTH, turns=5120, batch="lot 2"),
)  # fmt: skip
BASS = "bass-single-scatter.toml"  # south to the strings, on a longer bobbin


def number(n: int) -> str:
    return f"b1-2026-{n:04d}"


def make(path: Path, *demos: Demo) -> Path:
    with open_book(path) as book:
        stocked(book, *demos)
    return path


@pytest.fixture(scope="session")
def _six(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return make(tmp_path_factory.mktemp("six") / "shop.book", *SIX)


@pytest.fixture
def six(_six: Path, tmp_path: Path) -> Path:
    """A book of three coils with north and three with south to the strings, one like the other."""
    return shutil.copyfile(_six, tmp_path / "shop.book")


def asked(capsys: Printed, book: Path, *arguments: str) -> Any:
    """The JSON that a call of `pair` answers with."""
    assert run(["pair", "--book", str(book), "--json", *arguments]) == 0
    answer = json.loads(capsys.readouterr().out)
    assert answer["format"] == 1
    return answer


def told(capsys: Printed, book: Path, *arguments: str) -> str:
    """What a call of `pair` says, on either stream."""
    assert run(["pair", "--book", str(book), *arguments]) == 0
    return "".join(capsys.readouterr())


def numbers(answer: Any) -> list[tuple[str, str]]:
    return [(pair["north"]["coil"], pair["south"]["coil"]) for pair in answer["pairs"]]


def test_coils_that_are_alike_go_together(six: Path, capsys: Printed) -> None:
    answer = asked(capsys, six)
    assert numbers(answer) == [(number(1), number(4)), (number(3), number(5)), (number(6), number(2))]
    assert answer["alone"] == answer["left_out"] == []
    assert answer["taken"] is False
    for pair in answer["pairs"]:
        for coil in (pair["north"], pair["south"]):
            assert coil["hum_v_per_ut_50hz"] == pytest.approx(100 * math.pi * 1e-6 * coil["turns_area_m2"])
            assert 3.0 < coil["turns_area_m2"] < 3.6
        areas = [pair[side]["turns_area_m2"] for side in ("north", "south")]
        mean = 2 * (areas[0] - areas[1]) / sum(areas)
        assert pair["mismatch"] == pytest.approx(mean, abs=1e-9)
        square = (mean / 2) ** 2 + (pair["mismatch_sd"] / 2) ** 2
        assert pair["hum_left"]["db"] == pytest.approx(10 * math.log10(square))
        assert pair["hum_left"]["low_db"] < pair["hum_left"]["db"] < pair["hum_left"]["high_db"]
        assert pair["source_1_m"]["spacing_mm"] == 22.0  # core width 5, flange depth 8.5
        assert -31 < pair["source_1_m"]["db"] < -25


def test_no_other_pairs_leave_less_in_all(six: Path, capsys: Printed) -> None:
    """Every way to pair six coils, each asked for pair by pair."""

    def square(left: Any) -> float:
        return float(10 ** (left["db"] / 10))

    best = sum(square(pair["hum_left"]) for pair in asked(capsys, six)["pairs"])
    each = {}
    for north, south in itertools.product((1, 3, 6), (2, 4, 5)):
        pair = asked(capsys, six, f"coil:{number(north)},{number(south)}")["pairs"][0]
        each[north, south] = square(pair["hum_left"])
    totals = [
        sum(each[pair] for pair in zip((1, 3, 6), souths, strict=True))
        for souths in itertools.permutations((2, 4, 5))
    ]
    assert best == pytest.approx(min(totals), rel=0.05)
    assert sorted(totals)[1] > 1.01 * min(totals)


def test_for_people_hum_joining_and_what_the_figures_mean(six: Path, capsys: Printed) -> None:
    assert run(["pair", "--book", str(six)]) == 0
    printed = capsys.readouterr()
    assert "hum at 50 Hz" in printed.out
    assert "uniform field, without steel" in printed.out
    assert "source 1 m away" in printed.out
    assert "join the finish of the north coil to the start of the south coil" in printed.out
    assert "finish o===* start" in printed.out
    assert "--take makes them part of the records" in printed.err
    assert all(len(line) <= 100 for line in printed.out.splitlines())
    assert all(number(n) in printed.out for n in range(1, 7))


def test_one_pair_is_told_by_the_coils_numbers(six: Path, capsys: Printed) -> None:
    text = told(capsys, six, "coil:b1-2026-0001,b1-2026-0004")
    assert "join the finish of b1-2026-0001 to the start of b1-2026-0004" in " ".join(text.split())


def test_wires_that_run_alike_are_joined_otherwise(tmp_path: Path, capsys: Printed) -> None:
    """Two coils of one recipe, one of them magnetised the other way: finish to finish."""
    book = make(tmp_path / "shop.book", Demo(NORTH), Demo(NORTH, magnet=False))
    answer = asked(capsys, book, "--south", "2", "--dry-run")
    joined = answer["pairs"][0]["joined"]
    assert joined["joint"] == [{"coil": number(1), "lead": "finish"}, {"coil": number(2), "lead": "finish"}]
    assert joined["ends"] == [{"coil": number(1), "lead": "start"}, {"coil": number(2), "lead": "start"}]


def test_a_batch_is_looked_at_alone(six: Path, capsys: Printed) -> None:
    assert numbers(asked(capsys, six, "--batch", "lot 2")) == [(number(6), number(4))]
    assert numbers(asked(capsys, six, 'batch:"lot 2"')) == [(number(6), number(4))]


def test_taken_pairs_stand_in_both_records_and_are_in_stock_no_more(six: Path, capsys: Printed) -> None:
    answer = asked(capsys, six, "--take", "--by", WHO)
    assert answer["taken"] is True
    with open_book(six) as book:
        for north, south in numbers(answer):
            for one, other in ((north, south), (south, north)):
                made = paired(book.addenda(one))
                assert made is not None
                assert (made.partner_number, made.by) == (other, WHO)
                assert made.partner == book.find(other).id
        assert not book.verify().broken
    assert asked(capsys, six)["pairs"] == []
    left = asked(capsys, six, "coil:b1-2026-0001")["left_out"]
    assert left == [{"coil": number(1), "why": f"goes with {number(4)}"}]


def test_show_says_the_partner_and_the_hum(six: Path, capsys: Printed) -> None:
    before = run(["coils", "show", "1", "--book", str(six), "--json"])
    shown = json.loads(capsys.readouterr().out)
    assert before == 0
    assert shown["goes_with"] is None
    alone = shown["hum"]["turns_area_m2"]
    answer = asked(capsys, six, "--take", "--by", WHO)
    together = answer["pairs"][0]["north"]
    assert alone == pytest.approx(together["turns_area_m2"], abs=together["turns_area_sd_m2"])
    assert run(["coils", "show", "1", "--book", str(six)]) == 0
    text = capsys.readouterr().out
    assert f"goes with   {number(4)}" in text
    assert "mV at 50 Hz and" in text
    assert f"{WHO}: Paired with {number(4)}: " in text


def test_a_dry_run_keeps_nothing(six: Path, capsys: Printed) -> None:
    before = six.read_bytes()
    assert asked(capsys, six, "--take", "--dry-run")["taken"] is False
    assert "nothing was recorded" in told(capsys, six, "--take", "--dry-run")
    assert six.read_bytes() == before


def test_unpair_lets_both_into_stock_again(six: Path, capsys: Printed) -> None:
    pairs = numbers(asked(capsys, six, "--take"))
    assert run(["coils", "unpair", "4", "--reason", "one was sold alone", "--book", str(six)]) == 0
    assert capsys.readouterr().out == f"{number(4)} and {number(1)} go together no longer\n"
    assert numbers(asked(capsys, six)) == [pairs[0]]
    assert run(["coils", "unpair", "4", "--reason", "again", "--book", str(six)]) == 1
    assert "goes with no other" in capsys.readouterr().err
    assert run(["coils", "unpair", "2", "--reason", " ", "--book", str(six)]) == 2
    capsys.readouterr()
    assert run(["coils", "list", "--json", 'note:"sold alone"', "--book", str(six)]) == 0
    found = json.loads(capsys.readouterr().out)["coils"]
    assert len(found) == 2 and number(4) in [coil["coil"] for coil in found]


def test_halves_of_a_pair_that_differ_are_no_whole_book(six: Path, capsys: Printed) -> None:
    """Said of one coil alone, past what windctl lets people do."""
    asked(capsys, six, "--take")
    with open_book(six) as book:
        made = paired(book.addenda(number(1)))
        assert made is not None
        book.amend(number(1), replace(made, joined="finish to finish"))
    assert run(["coils", "verify", "--book", str(six)]) == 7
    said = capsys.readouterr()
    other = f"it goes with {made.partner_number}, and joined is 'finish to finish' here, "
    assert other in said.out + said.err


def test_coils_whose_magnet_nobody_told_are_left_out_and_named(tmp_path: Path, capsys: Printed) -> None:
    book = make(tmp_path / "shop.book", Demo(NORTH), Demo(SOUTH, magnet=False))
    answer = asked(capsys, book, "--no-input")
    assert answer["pairs"] == []
    assert answer["left_out"][0]["coil"] == number(2)
    assert "which pole is towards the strings" in answer["left_out"][0]["why"]
    text = told(capsys, book)
    assert "no pairs: 1 coil with north" in text
    assert f"left out: {number(2)}" in text


def test_what_is_said_of_a_magnet_is_kept_with_the_name(tmp_path: Path, capsys: Printed) -> None:
    book = make(tmp_path / "shop.book", Demo(NORTH), Demo(SOUTH, magnet=False))
    assert numbers(asked(capsys, book, "--south", "2", "--dry-run")) == [(number(1), number(2))]
    assert asked(capsys, book)["pairs"] == []
    text = told(capsys, book, "--south", "2", "--by", WHO)
    assert f"kept: {number(2)} has south towards the strings" in text
    with open_book(book) as opened:
        fact = magnet(opened.addenda("2"))
        assert fact is not None
        assert (fact.pole, fact.by) == ("south", WHO)
    assert numbers(asked(capsys, book)) == [(number(1), number(2))]


def test_somebody_at_the_terminal_is_asked(
    tmp_path: Path, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    book = make(
        tmp_path / "shop.book", Demo(NORTH), Demo(SOUTH, magnet=False), Demo(SOUTH, magnet=False, turns=4900)
    )
    questions = []

    def prompt(text: str, **_: Any) -> str:
        questions.append(text)
        return ["south", "skip"][len(questions) - 1]

    monkeypatch.setattr("windctl.cli.typed.may_ask", lambda no_input: not no_input)
    monkeypatch.setattr("click.prompt", prompt)
    assert numbers(asked(capsys, book)) == [(number(1), number(2))]
    assert [question[:12] for question in questions] == [number(2), number(3)]
    assert "which pole is towards the strings?" in questions[0]
    with open_book(book) as opened:
        assert magnet(opened.addenda("2")) is not None
        assert magnet(opened.addenda("3")) is None


def test_what_is_said_later_of_a_magnet_beats_the_recipe(six: Path, capsys: Printed) -> None:
    with open_book(six) as book:
        book.amend("1", MagnetTold(ENDED, WHO, "south"))
    answer = asked(capsys, six)
    assert {pair["north"]["coil"] for pair in answer["pairs"]} == {number(3), number(6)}
    assert len(answer["alone"]) == 2


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (["--north", "1", "--south", "1"], "cannot have both poles"),
        (["--north", "1", "--south", "b1-2026-0001"], "cannot have both poles"),
        (["recipe:south", "--north", "1"], "it is not asked for"),
        (["colour:red"], "colour"),
        (["--at-most", "3"], "--at-most"),
        (["--svg", "/nowhere/at/all.svg"], "cannot be written"),
    ],
)
def test_what_cannot_be_is_refused(six: Path, capsys: Printed, arguments: list[str], said: str) -> None:
    before = six.read_bytes()
    assert run(["pair", "--book", str(six), *arguments]) in (1, 2)
    assert said in capsys.readouterr().err
    assert six.read_bytes() == before


def test_what_is_not_in_stock_is_named_where_it_was_asked_for(tmp_path: Path, capsys: Printed) -> None:
    demos = [Demo(NORTH), Demo(SOUTH), Demo(NORTH, outcome="stopped"), Demo(NORTH), Demo(NORTH), Demo(NORTH)]
    book = make(tmp_path / "shop.book", *demos)
    with open_book(book) as opened:
        opened.amend("4", CoilWithdrawn(ENDED, WHO, "scratched"))
        for coil, stage in (("5", "returned"), ("6", "assembled")):
            opened.amend(coil, CoilMeasured(ENDED, WHO, ohm=4000.0, celsius=20.0, stage=stage))
    answer = asked(capsys, book)
    assert numbers(answer) == [(number(1), number(2))]
    assert answer["left_out"] == []
    why = {one["coil"]: one["why"] for one in asked(capsys, book, "recipe:hum")["left_out"]}
    assert why == {
        number(3): "was stopped",
        number(4): "is withdrawn: scratched",
        number(5): "was returned",
        number(6): "is built in",
    }


def test_a_coil_with_a_shorted_turn_is_left_out(tmp_path: Path, capsys: Printed) -> None:
    lot = [Demo(NORTH if n % 2 else SOUTH, off=0.001 * (n % 3)) for n in range(6)]
    book = make(tmp_path / "shop.book", *lot, Demo(NORTH, off=-0.3))
    answer = asked(capsys, book)
    assert len(answer["pairs"]) == 3
    assert [(one["coil"], "shorted turn" in one["why"]) for one in answer["left_out"]] == [(number(7), True)]


def test_only_coils_on_like_bobbins_are_paired_unless_let(tmp_path: Path, capsys: Printed) -> None:
    book = make(tmp_path / "shop.book", Demo(NORTH), Demo(BASS, turns=5200))
    answer = asked(capsys, book)
    assert answer["pairs"] == []
    assert answer["alone"] == [number(1), number(2)]
    forced = asked(capsys, book, "--any-bobbin")["pairs"][0]
    assert abs(forced["mismatch"]) > 0.2
    assert forced["source_1_m"]["spacing_mm"] == pytest.approx(22 / 2 + (8 / 2 + 7))


def test_simulated_coils_never_go_with_real_ones(tmp_path: Path, capsys: Printed) -> None:
    demos = [Demo(NORTH), Demo(SOUTH, simulated=True), Demo(SOUTH), Demo(NORTH, simulated=True)]
    book = make(tmp_path / "shop.book", *demos)
    assert numbers(asked(capsys, book)) == [(number(1), number(3)), (number(4), number(2))]


def test_pairs_that_leave_too_much_are_none(six: Path, capsys: Printed) -> None:
    levels = [pair["hum_left"]["db"] for pair in asked(capsys, six)["pairs"]]
    limit = (min(levels) + max(levels)) / 2
    answer = asked(capsys, six, "--at-most", f"{limit:.3f}")
    assert 0 < len(answer["pairs"]) < 3
    assert all(pair["hum_left"]["db"] <= limit for pair in answer["pairs"])
    assert asked(capsys, six, "--at-most", "-120")["pairs"] == []


def test_how_the_coils_sit_changes_what_a_near_source_leaves(six: Path, capsys: Printed) -> None:
    def near(*arguments: str) -> Any:
        return asked(capsys, six, *arguments)["pairs"][0]["source_1_m"]

    assert near("--spacing", "44")["db"] > near()["db"] + 4
    stacked = near("--stacked")
    assert stacked["spacing_mm"] == pytest.approx(6.5 + 3.0)
    assert stacked["db"] < near()["db"]
    assert "one above the other, 9.5 mm" in " ".join(told(capsys, six, "--stacked").split())


def test_a_count_that_was_typed_is_less_sure(tmp_path: Path, capsys: Printed) -> None:
    plain = asked(capsys, make(tmp_path / "a.book", Demo(NORTH), Demo(SOUTH)))["pairs"][0]
    typed = asked(capsys, make(tmp_path / "b.book", Demo(NORTH, corrected=True), Demo(SOUTH)))["pairs"][0]
    assert typed["mismatch_sd"] > plain["mismatch_sd"]


def test_the_drawing_has_every_pair(six: Path, tmp_path: Path, capsys: Printed) -> None:
    file = tmp_path / "pairs.svg"
    told(capsys, six, "--svg", str(file))
    said = ["".join(each.itertext()) for each in ET.parse(file).iter() if each.tag.endswith("text")]
    for n in range(1, 7):
        assert any(text.startswith(number(n)) for text in said)


def test_without_a_book_there_are_no_pairs_and_none_is_made(home: Path, capsys: Printed) -> None:
    assert run(["pair"]) == 0
    assert "no pairs" in capsys.readouterr().err
    assert run(["coils", "unpair", "1", "--reason", "no book"]) == 1
    assert list(home.rglob("*.book")) == []


def test_a_stock_beyond_what_can_be_taken_at_once_is_refused_before_it_is_read(
    six: Path, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(stock_room, "MOST", 5)
    assert run(["pair", "--book", str(six)]) == 2
    assert "6 coils are in stock, more than the 5" in capsys.readouterr().err
    assert len(asked(capsys, six, "--batch", "lot 2")["pairs"]) == 1


def test_a_withdrawn_coil_still_has_its_partner_and_that_is_said(six: Path, capsys: Printed) -> None:
    asked(capsys, six, "--take")
    assert run(["coils", "withdraw", "1", "--reason", "scratched", "--book", str(six)]) == 0
    assert f"{number(4)} still goes with it" in capsys.readouterr().err
    assert run(["coils", "unpair", "1", "--reason", "the other is good", "--book", str(six)]) == 0
    capsys.readouterr()
    assert asked(capsys, six)["alone"] == [number(4)]
