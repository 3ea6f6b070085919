"""The board's side of the conversation: greeting, sequence, the stored answer, and frames going out."""

from __future__ import annotations

from binascii import crc_hqx
from typing import TYPE_CHECKING, Final

from windctl.machine.twin import motion, reports
from windctl.machine.twin.commands import judge
from windctl.machine.twin.rules import SENT_MAX
from windctl.protocol import messages as m
from windctl.protocol.frames import CRC_START, Frame, FrameReader, encode
from windctl.protocol.messages import BoardMessage, Cause, Refusal

if TYPE_CHECKING:
    from windctl.machine.twin.board import Board

NOTHING_HEARD: Final = -1


class Dialogue:
    """Takes bytes in, has commands judged and done, collects what goes out with the tick."""

    __slots__ = ("_answer", "_heard_crc", "_nonce", "_sequence", "_unasked", "greeted", "out", "reader")

    def __init__(self) -> None:
        self.reader = FrameReader()
        self.greeted = False
        self.out = b""  # frames of this tick, at most SENT_MAX bytes
        self._nonce = 0  # u32, of the greeting
        self._sequence = 0  # u8, of the last numbered command
        self._heard_crc = NOTHING_HEARD  # u16, its CRC: what tells an exact repeat from another command
        self._answer: tuple[int, bytes] = (0, b"")  # code and body
        self._unasked = 0  # u8, sequence of what is sent unasked

    def hear(self, board: Board, data: bytes) -> None:
        """Take bytes from the host, as they come."""
        for frame in self.reader.feed(data):
            code = frame.code
            if code == m.Hold.CODE:
                motion.hold(board, Cause.HOLD)
            elif code == m.Beat.CODE:
                motion.beat(board)
            elif code == m.Greet.CODE:
                self._greet(board, frame.sequence, m.Greet.decode_body(frame.body))
            else:
                self._numbered(board, frame)

    def tell(self, message: BoardMessage) -> None:
        """Send something that is no answer."""
        self._unasked = (self._unasked + 1) & 0xFF
        self._send(self._unasked, message.CODE, message.encode_body())

    def _greet(self, board: Board, sequence: int, greet: m.Greet) -> None:
        if not (self.greeted and greet.nonce == self._nonce):
            motion.hold(board, Cause.GREET)
            self.greeted = greet.schema == m.SCHEMA
            self._nonce = greet.nonce
            self._sequence = sequence
            self._heard_crc = NOTHING_HEARD
        identity = reports.identity(board, greet.nonce)
        self._send(sequence, identity.CODE, identity.encode_body())

    def _numbered(self, board: Board, frame: Frame) -> None:
        code, sequence, body = frame
        if not self.greeted:
            self._refuse(board, sequence, code, Refusal.NOT_GREETED, 0)
            return
        crc = crc_hqx(bytes((code, sequence)) + body, CRC_START)
        if sequence == self._sequence and crc == self._heard_crc:
            self._send(sequence, *self._answer)
            return
        due = (self._sequence + 1) & 0xFF
        if sequence != due:
            self._refuse(board, sequence, code, Refusal.SEQUENCE, due)
            return
        self._sequence = sequence
        self._heard_crc = crc
        why, value = judge(board, code, body)
        if why:
            refused = m.Refused(command=code, why=why, epoch=board.epoch, limit=value)
            self._answer = (refused.CODE, refused.encode_body())
        else:
            accepted = m.Accepted(command=code, epoch=board.epoch, value=value)
            self._answer = (accepted.CODE, accepted.encode_body())
        self._send(sequence, *self._answer)

    def _refuse(self, board: Board, sequence: int, code: int, why: int, limit: int) -> None:
        """Refuse without touching the sequence or the stored answer."""
        refused = m.Refused(command=code, why=why, epoch=board.epoch, limit=limit)
        self._send(sequence, refused.CODE, refused.encode_body())

    def _send(self, sequence: int, code: int, body: bytes) -> None:
        frame = encode(code, sequence, body)
        if len(self.out) + len(frame) <= SENT_MAX:  # what does not fit into the tick is dropped whole
            self.out += frame
