"""Holding: once a hold is wanted it is repeated until the board shows that it was obeyed."""

from __future__ import annotations

from windctl.protocol.messages import State
from windctl.protocol.picture import BoardPicture, newer
from windctl.protocol.rules import HOLD_AGAIN_S


class Holding:
    """The one thing that may always be said, in any state, without a number, over an outstanding command.

    A hold is obeyed when the board does not turn and its epoch has risen since: then whatever was said before
    is void. A hold once begun goes on to that point, even if it is not wanted any more.
    """

    __slots__ = ("_epoch", "_next", "_wanted", "active")

    def __init__(self) -> None:
        self.active = False  # begun, and not yet seen to be obeyed
        self._wanted = False
        self._epoch: int | None = None  # when it began
        self._next = 0.0

    def want(self, wanted: bool, picture: BoardPicture, now: float) -> bool:
        """Note what is wanted now. True when a hold begins."""
        again = wanted and not self.active and picture.state == State.TURNING
        begins = (wanted and not self._wanted) or again
        self._wanted = wanted
        if begins:
            self.active = True
            self._epoch = picture.epoch
            self._next = now
        elif self.active and self._obeyed(picture):
            self.active = False
        return begins

    def due(self, now: float) -> bool:
        """Whether to say it now; counts as said."""
        if not self.active or now < self._next:
            return False
        self._next = now + HOLD_AGAIN_S
        return True

    def next_due(self) -> float | None:
        """When it is to be said again."""
        return self._next if self.active else None

    def _obeyed(self, picture: BoardPicture) -> bool:
        if picture.epoch is None or picture.state in (None, State.TURNING):
            return False
        told = picture.status if picture.status is not None else picture.identity
        if told is None or told.epoch != picture.epoch:  # the state is older than the epoch
            return False
        return self._epoch is None or newer(picture.epoch, self._epoch, 16)
