"""The conversation's rules as tables: times, which state takes which command, and what a refusal leads to."""

from __future__ import annotations

from enum import Enum
from typing import Final

from windctl.protocol.messages import (
    Arm,
    ClearTrip,
    Disarm,
    Go,
    GuideTo,
    HostMessage,
    Lay,
    Measure,
    Pace,
    Refusal,
    SetDatum,
    Setup,
    State,
    StopAt,
)

RETRY_S: Final = 0.25  # an unanswered command goes out again, the same bytes
TRIES: Final = 12  # so often in all: 3 s
SILENCE_S: Final = (
    3.0  # a board that was heard and then is not for so long is gone; it speaks 20 times a second
)
HOLD_AGAIN_S: Final = 0.05
BEAT_S: Final = 0.5  # the board stops by itself after 2 s without
MISMATCH_S: Final = 1.0  # the board's sum over the program may be late, but not for so long

NO_STOP_POINT: Final = 0xFFFFFFFF
NO_BOARD_QUEUE: Final = 1  # segments of the twin that stands where there is no board; every board has more

# Greet's sequence number is so far from the last one used that nothing still on its way can be taken for new.
SEQUENCE_LEAP: Final = 101


class Reaction(Enum):
    """What a refusal leads to. Every refusal is also returned to the caller, as a fact."""

    GREET = "greet"  # the two sides do not agree on the numbering: begin anew
    LOOK_AGAIN = "look again"  # the picture was old: decide anew with the next Status
    KEEP = "keep"  # not again until the situation or the want has changed


REACTIONS: Final[dict[int, Reaction]] = {
    Refusal.SEQUENCE: Reaction.GREET,
    Refusal.UNKNOWN_TYPE: Reaction.KEEP,
    Refusal.NOT_GREETED: Reaction.GREET,
    Refusal.STALE: Reaction.LOOK_AGAIN,
    Refusal.STATE: Reaction.KEEP,
    Refusal.MOVING: Reaction.KEEP,
    Refusal.NO_SETUP: Reaction.KEEP,
    Refusal.RANGE: Reaction.KEEP,
    Refusal.QUEUE_FULL: Reaction.LOOK_AGAIN,
    Refusal.GAP: Reaction.LOOK_AGAIN,
    Refusal.PROGRAM: Reaction.KEEP,
    Refusal.SEGMENT: Reaction.KEEP,
    Refusal.PEDAL_DOWN: Reaction.KEEP,
    Refusal.PEDAL_UP: Reaction.KEEP,
    Refusal.INPUT_OPEN: Reaction.KEEP,
    Refusal.NOT_FITTED: Reaction.KEEP,
    Refusal.NO_DATUM: Reaction.KEEP,
}

ANY_STATE: Final = frozenset(State)

# Which states the conversation sends a command in. The board judges for itself; this only spares refusals.
TAKEN_IN: Final[dict[type[HostMessage], frozenset[State]]] = {
    Setup: frozenset({State.DRIVES_OFF}),
    SetDatum: frozenset({State.DRIVES_OFF, State.READY, State.HELD, State.TRIPPED}),
    Lay: frozenset({State.DRIVES_OFF, State.READY, State.TURNING, State.HELD}),
    Arm: frozenset({State.DRIVES_OFF}),
    Disarm: frozenset({State.READY, State.HELD}),
    Pace: frozenset({State.READY, State.TURNING, State.HELD}),
    StopAt: frozenset({State.READY, State.TURNING, State.HELD}),
    Go: frozenset({State.READY, State.HELD}),
    GuideTo: frozenset({State.READY, State.HELD}),
    Measure: ANY_STATE,
    ClearTrip: frozenset({State.TRIPPED}),
}

# With these the spindle and the guide have to be at rest.
AT_REST: Final[frozenset[type[HostMessage]]] = frozenset(
    {Setup, SetDatum, Arm, Disarm, Go, GuideTo, ClearTrip}
)

# While a hold is wanted nothing of this kind goes out: they move something, or say how.
NOT_WHILE_HOLDING: Final[frozenset[type[HostMessage]]] = frozenset({Arm, Pace, StopAt, Go, GuideTo})
