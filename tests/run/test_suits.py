"""A board that does not suit the coil is refused by name before anything is sent to it."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest

from tests.run.winding import SHORT_TURNS, here, order
from windctl.book.open import open_book
from windctl.errors import MachineError
from windctl.machine.virtual.bench import virtual_bench
from windctl.machine.virtual.port import VirtualPort
from windctl.profile.builtin import VIRTUAL
from windctl.protocol.messages import Capability
from windctl.run.wind import begin


def ended_with(tmp_path: Path, **board: int) -> Exception | None:
    recipe, wanted = order(SHORT_TURNS)
    bench = virtual_bench(recipe, VIRTUAL, 1)
    for name, value in board.items():
        setattr(bench.board, name, value)
    with open_book(tmp_path / "coils.book") as book:
        winding = begin(wanted, book, VirtualPort(bench), here())
        winding.start()
        ended = winding.wait(60.0)
        assert ended is not None
        winding.close()
        assert book.verify().broken == ()
    assert bench.plant.truth().true_turns == 0.0
    return ended.error


def test_a_board_without_what_the_profile_says_is_refused(tmp_path: Path) -> None:
    everything = 0xFF & ~int(Capability.INDEX | Capability.CONTACT)
    with pytest.raises(MachineError, match="none of them: index, contact"):
        raise ended_with(tmp_path, capabilities=everything) or AssertionError("it was wound")


def test_a_board_with_another_tension_scale_is_refused(tmp_path: Path) -> None:
    with pytest.raises(MachineError, match=r"0\.01 cN per unit, the profile's tension\.unit_cn is 0\.001 cN"):
        raise ended_with(tmp_path, tension_scale=100) or AssertionError("it was wound")


def test_a_board_that_refuses_the_limits_is_not_asked_again(tmp_path: Path) -> None:
    recipe, wanted = order(SHORT_TURNS)
    bench = virtual_bench(recipe, VIRTUAL, 1)
    with open_book(tmp_path / "coils.book") as book:
        winding = begin(wanted, book, VirtualPort(bench), here())
        started = winding._writer.started
        winding._runner._state = replace(
            winding._runner._state,
            started=replace(started, setup=replace(started.setup, decel=0)),
        )
        winding.start()
        ended = winding.wait(60.0)
    assert ended is not None
    assert isinstance(ended.error, MachineError) and "refuses the limits" in str(ended.error)
