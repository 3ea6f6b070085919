"""Every fault of `tests.run.faults`, played out on a board behind a port: what is left, said and recorded.

All of them are begun when the first is looked at, a few at a time, because they mostly wait.
"""

from __future__ import annotations

import re
from collections.abc import Iterator
from concurrent.futures import Future, ThreadPoolExecutor

import pytest

pytest.importorskip("pty", reason="platform: pseudo-terminals and these signals are of POSIX")

from tests.run.faults import (
    FAULTS,
    MENDED,
    TOGETHER,
    Fault,
    Seen,
    expected,
    play_out,
)
from tests.run.winding import ROOT

Playing = dict[str, "Future[Seen]"]


@pytest.fixture(scope="module")
def playing(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory) -> Iterator[Playing]:
    """The chosen faults, being played out."""
    chosen = {
        item.callspec.params["fault"].name
        for item in request.session.items
        if item.path == request.path and hasattr(item, "callspec")
    }
    with ThreadPoolExecutor(TOGETHER) as pool:
        yield {
            fault.name: pool.submit(play_out, fault, tmp_path_factory.mktemp("fault"))
            for fault in FAULTS
            if fault.name in chosen
        }


@pytest.mark.timeout(300)
@pytest.mark.parametrize("fault", FAULTS, ids=lambda fault: fault.name)
def test_a_fault_leaves_the_spindle_held_the_record_true_and_the_next_coil_possible(
    fault: Fault, playing: Playing
) -> None:
    seen = playing[fault.name].result(250.0)
    told = f"{seen.ended.out}\n{seen.ended.err}"
    assert seen.ended.code == fault.code, told
    assert seen.board == fault.board, told
    assert seen.outcome == fault.outcome, told
    assert re.search(f"^{fault.why}", seen.why), seen.why
    assert re.search(fault.says, seen.ended.err), told
    assert "Traceback" not in told


def test_the_documented_table_is_the_one_that_is_played_out() -> None:
    developers = (ROOT / "DEVELOPERS.md").read_text(encoding="utf-8")
    assert expected() in developers, "print it anew: python -m tests.run.faults expected"


def test_every_fault_has_a_name_of_its_own_and_is_made_whole() -> None:
    assert len({fault.name for fault in FAULTS}) == len(FAULTS)
    assert {fault.mend for fault in FAULTS} == set(MENDED)
