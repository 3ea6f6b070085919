"""The host's side of the conversation: wants minus what the board reports becomes frames.

Sans-I/O: bytes in (`receive`), bytes out (`advance`), time handed in. Here and nowhere else live sequence
numbers, retries, time limits and the spending of consents.

What it holds to:
- A Hold overtakes everything, goes out in the very call that first wants it, and is repeated until the board
  shows that it was obeyed. From then on nothing that was meant for the time before it goes out any more.
- What can move something carries the board's boot number and epoch as last heard, and is sent once per
  consent; again only as the same bytes with the same number, which the board does not execute twice.
- When the two sides disagree about the numbering, they greet anew. A greeting stops a board that turns.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace
from typing import cast

from windctl.errors import LinkLost, MachineError, ProgramMismatch
from windctl.protocol.consents import Consents
from windctl.protocol.differences import differences, fitted
from windctl.protocol.exchange import Exchange
from windctl.protocol.feeding import Feed
from windctl.protocol.frames import DELIMITER, Frame, FrameReader, encode
from windctl.protocol.holding import Holding
from windctl.protocol.messages import (
    SCHEMA,
    Accepted,
    Arm,
    Beat,
    BoardMessage,
    Capability,
    ClearTrip,
    Go,
    Greet,
    GuideTo,
    Hold,
    HostMessage,
    Identity,
    Notice,
    Pace,
    Reading,
    Refused,
    SetDatum,
    State,
    Status,
    StopAt,
    decode,
)
from windctl.protocol.picture import (
    BoardPicture,
    accepted,
    heard_identity,
    heard_reading,
    heard_status,
    refused,
)
from windctl.protocol.rules import (
    BEAT_S,
    MISMATCH_S,
    REACTIONS,
    RETRY_S,
    SEQUENCE_LEAP,
    SILENCE_S,
    TRIES,
    Reaction,
)
from windctl.protocol.wants import Wants

_HOLD = encode(Hold.CODE, 0, b"")
_BEAT = encode(Beat.CODE, 0, b"")


@dataclass(slots=True)
class Counters:
    """What a diagnosis of the line asks for."""

    sent: int = 0  # frames, all kinds, repetitions included
    retries: int = 0
    heard: int = 0  # good frames
    bad: int = 0  # stretches that were no good frame
    dropped: int = 0  # good frames that were late, repeated, or an answer to nothing
    refused: int = 0
    greetings: int = 0


class Conversation:
    """One host talking to one board over one opened line. `nonces` gives u32 numbers, another one each time.

    Not thread-safe: the thread that owns the port owns its conversation.
    """

    def __init__(self, nonces: Callable[[], int] | Iterator[int]) -> None:
        self._nonce_source = nonces if callable(nonces) else nonces.__next__
        self.board = BoardPicture()
        self.counters = Counters()
        self._reader = FrameReader()
        self._holding = Holding()
        self._consents = Consents()
        self._feed = Feed()
        self._exchange: Exchange | None = None
        self._nonce: int | None = None  # of the greeting that waits for its answer
        self._refusals: dict[type[HostMessage], tuple[HostMessage, tuple[object, ...]]] = {}
        self._look_again: dict[type[HostMessage], Status | None] = {}
        self._heard_at: float | None = None
        self._beat_at = 0.0
        self._beating = False
        self._mismatch_since: float | None = None
        self._lost: LinkLost | None = None
        self._foreign: MachineError | None = None

    # ---------------------------------------------------------------- from the board

    def receive(self, data: bytes, now: float) -> list[BoardMessage]:
        """The good messages in `data`, in order, after they have changed the picture.

        Late and repeated ones are left out, and so are answers to anything but the outstanding command or the
        latest greeting. Never raises on what a line can do to bytes.
        """
        messages: list[BoardMessage] = []
        for frame in self._reader.feed(data):
            if frame.code not in _FROM_BOARD:  # an echo of our own, or of another protocol
                self._reader.bad += 1
                continue
            message = cast("BoardMessage", decode(frame.code, frame.body))
            self.counters.heard += 1
            self._heard_at = now
            if self._take(frame, message):
                messages.append(message)
            else:
                self.counters.dropped += 1
        self.counters.bad = self._reader.bad
        return messages

    def _take(self, frame: Frame, message: BoardMessage) -> bool:
        """Put one message into the picture. False if it is to be dropped."""
        match message:
            case Identity():
                return self._greeted(message)
            case Accepted() | Refused():
                return self._answered(frame.sequence, message)
            case Status():
                return self._status(message)
            case Reading():
                picture = heard_reading(self.board, message)
                self.board = picture or self.board
                return picture is not None
            case Notice():
                return self.board.greeted

    def _greeted(self, identity: Identity) -> bool:
        if self._nonce is None or identity.nonce != self._nonce:
            return False
        if identity.schema != SCHEMA:
            self._foreign = MachineError(
                f"the board speaks another protocol: its message schema is {identity.schema:08x}, "
                f"windctl's is {SCHEMA:08x}; use the firmware that belongs to this version of windctl"
            )
            return False
        self._nonce = None
        if self._exchange is not None:
            self._exchange.outstanding = None
        self._forget()
        self.board = heard_identity(self.board, identity)
        self.counters.greetings += 1
        return True

    def _answered(self, sequence: int, answer: Accepted | Refused) -> bool:
        command = self._exchange.answered(sequence, answer) if self._exchange is not None else None
        if command is None:
            return False
        kind = type(command)
        if isinstance(answer, Accepted):
            self.board = accepted(self.board, command, answer)
            return True
        self.counters.refused += 1
        self._consents.refused(kind)
        self.board = refused(self.board, answer)
        match REACTIONS.get(answer.why, Reaction.KEEP):
            case Reaction.GREET:
                self._begin_anew()
            case Reaction.LOOK_AGAIN:
                self._look_again[kind] = self.board.status
            case Reaction.KEEP:
                self._refusals[kind] = (command, self.board.situation)
        return True

    def _status(self, status: Status) -> bool:
        picture = heard_status(self.board, status)
        if picture is None:
            return False
        if picture.boot != self.board.boot:
            self._begin_anew()
            if self._exchange is not None:
                self._exchange.outstanding = None
        self.board = picture
        return True

    def _begin_anew(self) -> None:
        self.board = replace(self.board, greeted=False)
        self._nonce = None
        self._forget()

    def _forget(self) -> None:
        self._refusals.clear()
        self._look_again.clear()

    # ---------------------------------------------------------------- to the board

    def advance(self, wants: Wants, now: float) -> bytes:
        """What to write now so that the board becomes what is wanted; b"" if there is nothing to say.

        Raises MachineError if nobody answers the first greeting, or one of another protocol does; LinkLost
        if a board that answered does so no more; ProgramMismatch if the board holds another program than the
        one to be wound. After the last two, a hold can still be said.
        """
        if self._foreign is not None:
            raise self._foreign
        out = bytearray()
        if self._holding.want(wants.hold, self.board, now):
            self._give_up_moves()
        if self._holding.due(now):
            out += _HOLD
            self.counters.sent += 1
        if self._lost is None:
            self._lost = self._line_lost(now)
        if self._lost is not None:
            if out:
                return bytes(out)
            raise LinkLost(str(self._lost))
        self._beating = wants.beat
        self._note(wants)
        self._look_for_mismatch(wants, now)
        numbered = self._numbered(wants, now)
        if wants.beat and (now >= self._beat_at or (numbered and self._sets_moving())):
            self._beat_at = now + BEAT_S
            out += _BEAT
            self.counters.sent += 1
        return bytes(out) + numbered

    def _sets_moving(self) -> bool:
        """Whether it lets a motor turn. The board counts its silence from there, too: a beat goes with it, so
        that nothing turns for more than two seconds after the last beat."""
        waiting = self._exchange.outstanding if self._exchange is not None else None
        return waiting is not None and isinstance(waiting.command, Go | GuideTo)

    def paused(self, seconds: float) -> None:
        """The caller did not run for so long: what it did not hear or send in that time says nothing."""
        if self._heard_at is not None:
            self._heard_at += seconds
        if self._exchange is not None and self._exchange.outstanding is not None:
            self._exchange.outstanding.sent_at += seconds

    def next_due(self, now: float) -> float:
        """When `advance` has something to do at the latest, if nothing is heard and wants stay."""
        due = [now + BEAT_S]
        if self._beating:
            due.append(self._beat_at)
        holding = self._holding.next_due()
        if holding is not None:
            due.append(holding)
        waiting = self._exchange.outstanding if self._exchange is not None else None
        if waiting is not None:
            due.append(waiting.sent_at + RETRY_S)
        elif not self.board.greeted:
            due.append(now)
        return max(now, min(due))

    def _note(self, wants: Wants) -> None:
        # Only a board that drives the guide is fed; where a hand guides, the datum alone names the program.
        guided = fitted(self.board, wants) & Capability.GUIDE_STEP
        self._feed.want(wants.program if guided else None)
        laid_all = self._feed.all_laid(self.board)
        if laid_all != self.board.laid_all:
            self.board = replace(self.board, laid_all=laid_all)
        for kind, consent in (
            (Arm, wants.armed),
            (Go, wants.go),
            (ClearTrip, wants.clear_trip),
            (SetDatum, wants.datum),
            (GuideTo, wants.guide),
        ):
            if self._consents.wanted(kind, consent):
                self._refusals.pop(kind, None)

    def _numbered(self, wants: Wants, now: float) -> bytes:
        """The outstanding command once more, or the next one."""
        if self._exchange is None:
            self._exchange = Exchange(self._nonce_source() & 0xFF)
        exchange = self._exchange
        if exchange.outstanding is not None:
            self._give_up_stale()
            if not exchange.unanswered(now):
                frame = exchange.again(now)
                if frame:
                    self.counters.sent += 1
                    self.counters.retries += 1
                return frame
            exchange.outstanding = None  # given up: whether the board took it, and its number, nobody knows
            self._begin_anew()
        if not self.board.greeted:
            self._nonce = self._nonce_source()
            self.counters.sent += 1
            # The delimiter in front closes whatever rests of a frame stand on the line.
            return DELIMITER + exchange.send(Greet(self._nonce, SCHEMA), now, SEQUENCE_LEAP)
        if self._holding.active:
            return b""
        for command in differences(self.board, wants, self._feed, self._consents):
            if self._refused_before(command):
                continue
            self._spend(command, wants)
            self.counters.sent += 1
            return exchange.send(command, now)
        return b""

    def _spend(self, command: HostMessage, wants: Wants) -> None:
        match command:
            case Arm() | Go() | ClearTrip():
                self._consents.use(type(command), self.board.permission)
            case SetDatum():
                self._consents.use(SetDatum, wants.datum)
            case GuideTo():
                self._consents.use(GuideTo, wants.guide)
            case _:
                pass

    def _refused_before(self, command: HostMessage) -> bool:
        kind = type(command)
        if kind in self._look_again:
            if self._look_again[kind] is self.board.status:
                return True
            del self._look_again[kind]
        return self._refusals.get(kind) == (command, self.board.situation)

    def _give_up_moves(self) -> None:
        waiting = self._exchange.outstanding if self._exchange is not None else None
        if waiting is not None and waiting.command.MOVES:
            waiting.given_up = True

    def _give_up_stale(self) -> None:
        """A command for an epoch that is over is not repeated."""
        waiting = self._exchange.outstanding if self._exchange is not None else None
        if waiting is None:
            return
        match waiting.command:
            case Arm(boot, epoch) | Go(boot, epoch) | ClearTrip(boot, epoch):
                meant_for = (boot, epoch)
            case Pace(boot, epoch) | StopAt(boot, epoch) | SetDatum(boot, epoch) | GuideTo(boot, epoch):
                meant_for = (boot, epoch)
            case _:
                return
        if meant_for != (self.board.boot, self.board.epoch):
            waiting.given_up = True

    # ---------------------------------------------------------------- what ends it

    def _line_lost(self, now: float) -> LinkLost | None:
        exchange = self._exchange
        waiting = exchange.outstanding if exchange is not None else None
        if exchange is not None and waiting is not None and not waiting.given_up and exchange.unanswered(now):
            limit = TRIES * RETRY_S
            if self.counters.greetings == 0:
                self._foreign = MachineError(self._nobody_there(limit))
                raise self._foreign
            return LinkLost(
                f"the board did not answer {waiting.command.NAME} within {limit:.0f} s; "
                "check line and power, then go on with `windctl resume`"
            )
        if self._heard_at is not None and now - self._heard_at > SILENCE_S:
            return LinkLost(
                f"nothing was heard from the board for {SILENCE_S:.0f} s; "
                "check line and power, then go on with `windctl resume`"
            )
        return None

    def _nobody_there(self, limit: float) -> str:
        heard = self.counters.heard + self.counters.bad
        what = (
            f"what was heard was no answer ({self.counters.bad} damaged or unknown frames): "
            "another baud rate, or the firmware of another version"
            if heard
            else "nothing was heard: check power, cable and the port's name (`windctl machine ports`)"
        )
        return f"no board answered within {limit:.0f} s; {what}"

    def _look_for_mismatch(self, wants: Wants, now: float) -> None:
        """Another program on the board than the wanted one matters where it turns or is about to."""
        board, datum = self.board, wants.datum
        turns = board.state == State.TURNING
        starts = wants.go is not None and wants.go == board.permission and datum is None
        if wants.hold or not (turns or starts) or self._feed.agrees(board) is not False:
            self._mismatch_since = None
            return
        if self._mismatch_since is None:
            self._mismatch_since = now
        if now - self._mismatch_since >= MISMATCH_S:
            program = self._feed.program.id32 if self._feed.program is not None else 0
            raise ProgramMismatch(
                f"the board's program is not the coil's: {board.program:08x} up to segment {board.next}, "
                f"wanted {program:08x}, or segments of it were damaged; "
                "hold, then go on with `windctl resume --at-turn`"
            )


_FROM_BOARD = frozenset(kind.CODE for kind in (Identity, Accepted, Refused, Status, Reading, Notice))
