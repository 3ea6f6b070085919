"""The conformance kit against the boards that are here: each holds every clause, and a broken one does not.

What the clauses are is firmware_protocol/README.md, section by section: the outside reference here.
"""

from __future__ import annotations

import re
import sys
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import Any, cast

import pytest

from tests.firmware.chip_bench import ChipBench
from tests.firmware.conformance.__main__ import main
from tests.firmware.conformance.bench_hands import PlantHands
from tests.firmware.conformance.benches import rig_of, spec, twin
from tests.firmware.conformance.clause import NOT_ON_THE_LINE, Clause
from tests.firmware.conformance.machine import Machine
from tests.firmware.conformance.rig import Rig
from tests.firmware.conformance.run import Finding, Verdict, clauses, judge_all
from tests.firmware.host_board import HostBoard
from windctl.machine.plant.plant import Plant
from windctl.machine.twin import commands, motion
from windctl.machine.twin.board import Board
from windctl.machine.virtual.port import VirtualPort
from windctl.protocol import messages as m
from windctl.protocol.messages import Capability

README = Path(__file__).parents[2] / "firmware_protocol" / "README.md"
BEHAVIOUR = range(3, 12)  # the sections that say how a board behaves


def not_holding(findings: list[Finding]) -> list[str]:
    return [
        f"{one.clause.section} {one.clause.title}: {one.clause.says}: {one.verdict.value} {one.detail}"
        for one in findings
        if one.verdict is not Verdict.HOLDS
    ]


def titles() -> Iterator[tuple[int, str]]:
    """Every paragraph and point of the specification that has a title, with its section."""
    section = 0
    for line in README.read_text(encoding="utf-8").splitlines():
        if heading := re.match(r"## (\d+)\. ", line):
            section = int(heading[1])
        elif section in BEHAVIOUR and (title := re.match(r"(?:- )?\*\*([^*]+)\*\*", line)):
            yield section, title[1].removesuffix(".")


def test_every_titled_paragraph_of_the_specification_has_a_clause_or_a_reason() -> None:
    written = set(titles())
    assert len(written) >= 25
    covered = {(one.section, one.title) for one in clauses() if one.title}
    assert covered <= written
    assert written == covered | set(NOT_ON_THE_LINE)
    assert {one.section for one in clauses()} == set(BEHAVIOUR)


def test_the_twin_holds_every_clause() -> None:
    assert not_holding(judge_all(twin(), clauses())) == []


def test_the_core_in_c_holds_every_clause(cc: str) -> None:
    assert not_holding(judge_all(rig_of(HostBoard()), clauses())) == []


def on_one_chip(elf: Path, chosen: list[Clause]) -> list[Finding]:
    """All on the same chip, which starts anew only where a clause asks for it."""
    bench = ChipBench(elf, Plant(spec(), 1))
    rig = Rig(VirtualPort(cast("Any", bench)), Machine(), PlantHands(bench.plant, bench.brown_out))
    findings = judge_all(rig, chosen)
    assert bench.chip.overruns == bench.chip.peek("line_overruns") == 0
    return findings


def test_the_emulated_chip_holds_the_clauses_of_frames_and_trips(chip: Callable[..., Path]) -> None:
    chosen = [one for one in clauses() if one.section == 3 or (one.section == 9 and one.hand)]
    assert len(chosen) >= 10
    assert not_holding(on_one_chip(chip(), chosen)) == []


@pytest.mark.long
def test_the_emulated_chip_holds_every_clause(chip: Callable[..., Path]) -> None:
    assert not_holding(on_one_chip(chip(), clauses())) == []


def test_a_board_that_only_counts_is_judged_by_what_it_has() -> None:
    findings = judge_all(twin(int(Capability.THERMOMETER)), clauses())
    assert [one for one in not_holding(findings) if ": not fitted" not in one] == []
    assert sum(one.verdict is Verdict.HOLDS for one in findings) >= 40


def test_a_clause_that_needs_a_hand_is_not_judged_without_one() -> None:
    rig = twin()
    rig._hands = type("Nobody", (), {"please": lambda self, act: False})()
    hand = [one for one in clauses() if one.hand]
    assert {one.verdict for one in judge_all(rig, hand)} == {Verdict.NOT_JUDGED}


def test_a_board_that_starts_again_once_a_trip_is_cleared_fails(monkeypatch: pytest.MonkeyPatch) -> None:
    def starts(board: Board, state: int, cause: int) -> None:
        was = board.state
        enter(board, state, cause)
        if was == m.State.TRIPPED and state == m.State.DRIVES_OFF:
            enter(board, m.State.READY, m.Cause.ARM)

    enter = motion.enter
    monkeypatch.setattr(motion, "enter", starts)
    findings = judge_all(twin(), [one for one in clauses() if one.moves])
    assert any(one.verdict is Verdict.FAILS and one.clause.title == "ClearTrip" for one in findings)


def test_a_board_that_takes_an_old_permission_fails(monkeypatch: pytest.MonkeyPatch) -> None:
    def judge(board: Board, code: int, body: bytes) -> commands.Verdict:
        command = m.decode(code, body) if code in m.MESSAGES else None
        if command is not None and command.MOVES and board.state == m.State.HELD:
            return commands.HANDLERS[code](board, command)
        return right(board, code, body)

    right = commands.judge
    monkeypatch.setattr("windctl.machine.twin.dialogue.judge", judge)
    found = judge_all(twin(), [one for one in clauses() if one.section == 4])
    assert any(one.verdict is Verdict.FAILS and "a Go said again" in one.clause.says for one in found)


def test_the_list_needs_no_board(capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["--list"]) == 0
    out = capsys.readouterr().out
    assert out.count("\n") == len(clauses()) + len(NOT_ON_THE_LINE)


def test_nothing_is_opened_where_nobody_can_consent(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.setattr(sys.stdin, "isatty", lambda: False, raising=False)
    assert main(["--port", "socket://127.0.0.1:1", "--machine", str(tmp_path / "no.toml")]) == 2
    said = capsys.readouterr().err
    assert "hardware stop" in said
    assert "refused" in said
