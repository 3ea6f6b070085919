"""The conversation's tables against the message definition and against the board's own table."""

from __future__ import annotations

from windctl.machine.twin.rules import LEGAL
from windctl.protocol.messages import Refusal, State
from windctl.protocol.rules import BEAT_S, HOLD_AGAIN_S, REACTIONS, RETRY_S, SILENCE_S, TAKEN_IN, TRIES


def test_every_refusal_has_a_reaction() -> None:
    assert set(REACTIONS) == set(Refusal)


def test_commands_are_sent_exactly_in_the_states_in_which_the_board_takes_them() -> None:
    ours = {kind.CODE: states for kind, states in TAKEN_IN.items()}
    boards = {code: {state for state in State if bits >> state & 1} for code, bits in LEGAL.items()}
    assert ours == boards


def test_times_fit_to_each_other() -> None:
    board_silence_s = 2.0  # after which a turning board stops by itself
    assert board_silence_s > BEAT_S * 3  # three beats may be lost
    assert HOLD_AGAIN_S < RETRY_S
    assert TRIES * RETRY_S == SILENCE_S
