"""The chip's receive buffer, which the emulator (yasimavr 0.1.6) does not keep apart from what is sent.

Data sheet of the ATmega328P, USART, register UDR0: transmit and receive buffer share one address; what is
written goes to the one, what is read comes from the other, which holds two bytes. The emulator has one value
at that address. It puts a received byte there when it is complete, and

- a byte that is sent between that moment and the program's read takes its place: the program reads what it
  has just sent. Recorded with the real program: a byte is complete at cycle 299 377 612; the interrupt that
  sends is under way already and writes UDR0 21 cycles later; the interrupt that receives reads 69 cycles
  after the byte was complete, and gets what was written. Line and program keep step, so it went on for the
  rest of the frame, and the board heard the end of its own Status in place of a command;
- of two bytes that wait the first is read twice, because a read stores what it returned over the second;
- of bytes that are handed over whole, as here, it holds any number, so that none is ever too many.

`test_chip_receive.py` shows it with a program of a dozen lines. So the bytes are kept here as well, and what
the program reads is taken from here.
"""

from __future__ import annotations

from collections import deque
from typing import Any, Final

UDR0: Final = 0xA6  # counted from the first register behind the general ones
WAITING_MOST: Final = 2


def receive_buffer(core: Any, device: Any) -> Any:
    """The buffer, in force at once. `coming`: the bytes on the line; `overruns`: those that found no room."""

    class ReceiveBuffer(core.Peripheral):  # type: ignore[misc]  # the emulator has no types
        """Between the register and the program."""

        def __init__(self) -> None:
            super().__init__(core.IOCTL_UART("R"))
            self.coming: deque[int] = deque()
            self.waiting: deque[int] = deque()
            self.overruns = 0

        def reset(self, _kind: int) -> None:
            """The chip is reset."""
            self.coming.clear()
            self.waiting.clear()

        def complete(self, *, taken: bool) -> None:
            """The next byte's stop bit is over; not `taken` by a receiver that is off or was reset."""
            if not self.coming:
                return
            byte = self.coming.popleft()
            if not taken:
                return
            if len(self.waiting) >= WAITING_MOST:
                self.overruns += 1
            else:
                self.waiting.append(byte)

        def ioreg_read_handler(self, _address: int, value: int) -> int:
            """What the program reads."""
            return self.waiting.popleft() if self.waiting else value

        def ioreg_peek_handler(self, _address: int, value: int) -> int:
            """What a debugger reads."""
            return value

        def ioreg_write_handler(self, _address: int, _data: Any) -> None:
            """What the program sends is the emulator's affair."""

    buffer = ReceiveBuffer()
    device.attach_peripheral(buffer)
    device.add_ioreg_handler(UDR0, buffer, core.bitmask_t(0xFF), core.IORegister.BitMode.RW)
    return buffer
