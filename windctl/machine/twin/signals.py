"""What passes between the board and the machine each millisecond: the two sides of `tick`.

Both objects are made once and written anew every tick, as the firmware's structs are; nobody keeps one.
All values are integers. This file is the Python form of the C core's `struct inputs` and `struct outputs`.
"""

from __future__ import annotations

STOP_OK = 0x01  # stop input closed (normally closed: a broken wire counts as open)
GUARD_OK = 0x02  # guard input closed
PEDAL_DOWN = 0x04  # hold-to-run pedal pressed
GUIDE_LOW_OK = 0x08  # guide's limit switch at the low end closed
GUIDE_HIGH_OK = 0x10  # guide's limit switch at the high end closed
ALL_OK = STOP_OK | GUARD_OK | GUIDE_LOW_OK | GUIDE_HIGH_OK


class Inputs:
    """One tick's worth of the world, as the port hands it to the core."""

    __slots__ = (
        "celsius_centi",
        "contact",
        "count_delta",
        "index",
        "pins",
        "received",
        "steps_issued",
        "tension",
    )

    def __init__(self) -> None:
        self.received = b""  # bytes from the host since the last tick
        self.count_delta = 0  # signed encoder counts since the last tick, winding counts up
        self.index = 0  # 1 if the index pulse was seen since the last tick, in the direction of winding
        self.steps_issued = 0  # spindle steps the port has put out since the last tick
        self.contact = 0  # u16: oversampled contact reading, 0xFFFF is open
        self.tension = 0  # u16: oversampled tension sensor
        self.celsius_centi = 0  # i16: thermometer, hundredths of a degree
        self.pins = ALL_OK


class Outputs:
    """What the core asks of the port until the next tick."""

    __slots__ = ("drive_enable", "guide_enable", "guide_steps", "rate", "rotation", "sent")

    def __init__(self) -> None:
        self.sent = b""  # bytes to the host
        self.rate = 0  # spindle steps per second, 0 stands
        self.guide_steps = 0  # signed guide steps to issue within this tick
        self.rotation = 0  # Setup.rotation: the way the port drives the spindle, and counts up
        self.drive_enable = 0
        self.guide_enable = 0
