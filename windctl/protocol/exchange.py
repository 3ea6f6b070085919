"""Stop and wait: one numbered command outstanding, the same bytes again until it is answered."""

from __future__ import annotations

from dataclasses import dataclass

from windctl.protocol.frames import encode
from windctl.protocol.messages import Accepted, HostMessage, Refused
from windctl.protocol.rules import RETRY_S, TRIES


@dataclass(slots=True)
class Outstanding:
    """A command that waits for its answer. `given_up`: not to be sent again, but still answerable."""

    command: HostMessage
    sequence: int
    frame: bytes
    sent_at: float
    tries: int = 1
    given_up: bool = False


class Exchange:
    """The numbering, and the one outstanding command."""

    __slots__ = ("outstanding", "sequence")

    def __init__(self, sequence: int) -> None:
        self.sequence = sequence  # the last one used, u8
        self.outstanding: Outstanding | None = None

    def send(self, command: HostMessage, now: float, leap: int = 1) -> bytes:
        """The frame of the next command. There must be none outstanding."""
        if self.outstanding is not None:
            raise RuntimeError(f"{self.outstanding.command.NAME} is still outstanding")
        self.sequence = (self.sequence + leap) & 0xFF
        frame = encode(command.CODE, self.sequence, command.encode_body())
        self.outstanding = Outstanding(command, self.sequence, frame, now)
        return frame

    def answered(self, sequence: int, answer: Accepted | Refused) -> HostMessage | None:
        """The command that this answers, which then is not outstanding any more; None: it answers nothing."""
        waiting = self.outstanding
        if waiting is None or waiting.sequence != sequence or answer.command != waiting.command.CODE:
            return None
        self.outstanding = None
        return waiting.command

    def again(self, now: float) -> bytes:
        """The outstanding frame once more if it is time for it, else nothing."""
        waiting = self.outstanding
        if waiting is None or waiting.given_up or waiting.tries >= TRIES or now < waiting.sent_at + RETRY_S:
            return b""
        waiting.tries += 1
        waiting.sent_at = now
        return waiting.frame

    def unanswered(self, now: float) -> bool:
        """Whether the last try has had its time, too."""
        waiting = self.outstanding
        if waiting is None or now < waiting.sent_at + RETRY_S:
            return False
        return waiting.given_up or waiting.tries >= TRIES
