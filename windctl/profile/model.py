"""A machine profile: what is fitted, its limits, its sensors and how far they can be trusted."""

from __future__ import annotations

import json
from collections.abc import Iterator
from typing import Annotated, Literal

from pydantic import Field

from windctl.forms.faults import Fault, KeyPath
from windctl.forms.form import Form, FormatOne, Line, about, check, quantity

MAX_STEP_HZ = 15_000  # steps/s that the board can issue to one motor
_MAX_STEPS_PER_S2 = 65_535  # the board holds accelerations in 16 bits

# The finest pitch worth a guide motor: about the overall diameter of the finest wire in the metric table.
_FINEST_PITCH_MM = 0.05


class Port(Form):
    """The serial line to the board."""

    url: Annotated[Line | None, about("Any pyserial URL: a device name, or socket://host:port.")] = None
    baud: Annotated[int, quantity("bit/s", "line speed", ge=1200, le=4_000_000)] = 115_200
    resets_on_open: Annotated[bool, about("The board restarts when the port is opened.")] = False
    vendor: Annotated[
        int | None, quantity("", "USB vendor number of the board, such as 0x1209", ge=0, le=0xFFFF)
    ] = None
    product: Annotated[
        int | None,
        quantity("", "its USB product number; `windctl machine ports` shows both", ge=0, le=0xFFFF),
    ] = None
    serial_number: Annotated[Line | None, about("Its USB serial number, where it has one.")] = None

    @check
    def _usb_numbers_come_together(self) -> Iterator[Fault]:
        if self.vendor is not None and self.product is None:
            yield Fault(("vendor",), f"is {self.vendor:#06x}, and port.product is missing: both find a board")
        if self.product is not None and self.vendor is None:
            yield Fault(
                ("product",), f"is {self.product:#06x}, and port.vendor is missing: both find a board"
            )
        if self.serial_number is not None and self.vendor is None:
            yield Fault(
                ("serial_number",), f"is {self.serial_number!r}, and port.vendor and port.product are missing"
            )


class BoardTable(Form):
    """The microcontroller board."""

    queue_segments: Annotated[
        int | None,
        quantity(
            "segments", "length of its program queue; else asked of the board, 128 offline", ge=8, le=65_535
        ),
    ] = None


class SpindleTable(Form):
    """The motor that turns the bobbin, and what counts its turns."""

    drive: Annotated[
        Literal["step", "none"], about("none: counts only; windctl cannot start, slow or stop the machine.")
    ] = "none"
    counter: Annotated[
        Literal["board", "read"],
        about(
            "board: the board counts. read: there is no board; the turns are read off a counter by eye, and "
            "typed."
        ),
    ] = "board"
    counts_per_turn: Annotated[int, quantity("counts", "encoder counts per turn", ge=1, le=400)] = 1
    steps_per_turn: Annotated[int, quantity("steps", "motor steps per turn", ge=1, le=800)] = 400
    index: Annotated[bool, about("One pulse per turn at a fixed angle, apart from the counts.")] = False
    max_rpm: Annotated[float, quantity("rpm", "highest speed", gt=0, le=100_000)] = 1000.0
    accel_rpm_per_s: Annotated[float, quantity("rpm/s", "acceleration", gt=0, le=1e6)] = 300.0
    decel_rpm_per_s: Annotated[float, quantity("rpm/s", "braking", gt=0, le=1e6)] = 500.0

    @check
    def _board_is_fast_enough(self) -> Iterator[Fault]:
        per_turn, what = (
            (self.steps_per_turn, "steps") if self.drive == "step" else (self.counts_per_turn, "counts")
        )
        rate = self.max_rpm / 60 * per_turn
        if rate > MAX_STEP_HZ:
            yield Fault(
                ("max_rpm",),
                f"is {self.max_rpm:g} rpm, which at {per_turn} {what} per turn is {rate:.0f} {what}/s, "
                f"more than the board's {MAX_STEP_HZ} {what}/s; at most {MAX_STEP_HZ * 60 / per_turn:g} rpm",
            )

    @check
    def _ramps_fit_the_board(self) -> Iterator[Fault]:
        if self.drive != "step":
            return
        for key in ("accel_rpm_per_s", "decel_rpm_per_s"):
            ramp = self.__dict__.get(key)
            if ramp is not None and ramp / 60 * self.steps_per_turn > _MAX_STEPS_PER_S2:
                yield Fault(
                    (key,),
                    f"is {ramp:g} rpm/s, more than the board's {_MAX_STEPS_PER_S2} steps/s2; at most "
                    f"{_MAX_STEPS_PER_S2 * 60 / self.steps_per_turn:g} rpm/s at {self.steps_per_turn} steps "
                    "per turn",
                )


class Guide(Form):
    """What moves the wire along the gap between the flanges."""

    kind: Annotated[Literal["step", "hand"], about("hand: the operator guides the wire.")] = "hand"
    steps_per_mm: Annotated[
        float, quantity("steps/mm", "guide motor steps per millimetre", gt=0, le=10_000)
    ] = 200.0
    max_mm_per_s: Annotated[float, quantity("mm/s", "highest speed", gt=0, le=10_000)] = 40.0
    start_stop_mm_per_s: Annotated[
        float, quantity("mm/s", "the jump of speed it takes without losing steps", gt=0, le=10_000)
    ] = 10.0
    backlash_mm: Annotated[float, quantity("mm", "lost motion at each turn-round", ge=0, le=100)] = 0.0
    travel_mm: Annotated[float, quantity("mm", "how far it can go", gt=0, le=1000)] = 60.0
    distance_mm: Annotated[float, quantity("mm", "from the guide to the bobbin", gt=0, le=10_000)] = 100.0

    @check
    def _board_is_fast_enough(self) -> Iterator[Fault]:
        rate = self.max_mm_per_s * self.steps_per_mm
        if self.kind == "step" and rate > MAX_STEP_HZ:
            yield Fault(
                ("max_mm_per_s",),
                f"is {self.max_mm_per_s:g} mm/s, which at {self.steps_per_mm:g} steps/mm is {rate:.0f} "
                f"steps/s, more than the board's {MAX_STEP_HZ} steps/s; at most "
                f"{MAX_STEP_HZ / self.steps_per_mm:g} mm/s",
            )

    @check
    def _jump_is_within_the_speed(self) -> Iterator[Fault]:
        if self.start_stop_mm_per_s > self.max_mm_per_s:
            yield Fault(
                ("start_stop_mm_per_s",),
                f"is {self.start_stop_mm_per_s:g} mm/s, more than guide.max_mm_per_s of "
                f"{self.max_mm_per_s:g} mm/s",
            )

    @check
    def _backlash_leaves_travel(self) -> Iterator[Fault]:
        if self.backlash_mm >= self.travel_mm:
            yield Fault(
                ("backlash_mm",),
                f"is {self.backlash_mm:g} mm, not less than guide.travel_mm of {self.travel_mm:g} mm",
            )


class TensionTable(Form):
    """What brakes the wire."""

    kind: Annotated[Line, about("The kind of tensioner, such as felt.")] = "felt"
    sensor: Annotated[
        bool, about("The pull is measured. Without it a broken wire shows only in the reading.")
    ] = False
    unit_cn: Annotated[
        float,
        quantity("cN", "pull per unit of the board's tension input, as the board reports it", ge=1e-4, le=6),
    ] = 0.001

    @property
    def unit(self) -> int:
        """Pull per unit of the sensor as the board says it, 0.0001 cN."""
        return round(self.unit_cn * 10_000)


class Readings(Form):
    """How resistance is read while the coil grows, and the meter's qualities as standard deviations."""

    mode: Annotated[
        Literal["live", "checks", "none"],
        about(
            "live: a contact follows the wire, several readings a second. checks: the machine stops at turns "
            "that windctl proposes. none: counted turns only."
        ),
    ] = "none"
    contact: Annotated[
        bool,
        about(
            "The board has a contact for the wire. live needs one; without it, checks are readings by hand "
            "that are typed."
        ),
    ] = True
    lead_ohm: Annotated[float, quantity("ohm", "leads and contact, subtracted", ge=0, le=1e6)] = 0.5
    lead_sd_ohm: Annotated[float, quantity("ohm", "uncertainty of lead_ohm", ge=0, le=1e6)] = 0.3
    gain_sd_pct: Annotated[float, quantity("%", "the meter's gain error", ge=0, le=100)] = 0.3
    noise_pct: Annotated[float, quantity("%", "scatter of each reading, relative", ge=0, le=100)] = 0.1
    floor_ohm: Annotated[
        float, quantity("ohm", "scatter of each reading: resolution and contact", ge=0, le=1e6)
    ] = 0.2
    celsius_sd: Annotated[float, quantity("K", "the thermometer's error", ge=0, le=50)] = 0.5
    coil_over_air_k: Annotated[
        float, quantity("K", "how much warmer the coil is than its place", ge=0, le=100)
    ] = 0.7
    coil_over_air_sd_k: Annotated[float, quantity("K", "uncertainty of coil_over_air_k", ge=0, le=100)] = 0.7
    contact_length_mm: Annotated[
        float, quantity("mm", "wire between the coil and the contact, subtracted", ge=0, le=100_000)
    ] = 150.0

    @property
    def by_contact(self) -> bool:
        """The board's own contact reads the coil."""
        return self.mode != "none" and self.contact

    @check
    def _live_needs_a_contact(self) -> Iterator[Fault]:
        if self.mode == "live" and not self.contact:
            yield Fault(
                ("contact",), 'is false, and readings.mode is "live": only a contact follows the wire'
            )


class MachineProfile(Form):
    """A machine profile, format 1. Every table is optional: absent means not fitted, or the default."""

    format: FormatOne
    name: Annotated[Line, about("What the machine is called.")] = "virtual"
    bench: Annotated[
        str, Field(pattern=r"^[a-z0-9]{1,8}$", description="Prefix of coil numbers: 1 to 8 of a-z, 0-9.")
    ] = "v1"
    port: Port = Port()
    board: BoardTable = BoardTable()
    spindle: SpindleTable = SpindleTable()
    guide: Guide = Guide()
    tension: TensionTable = TensionTable()
    pedal: Annotated[bool, about("A hold-to-run pedal is fitted.")] = False
    readings: Readings = Readings()

    @property
    def by_eye(self) -> bool:
        """No board and no port: the turns are read off a counter by eye, and typed."""
        return self.spindle.counter == "read"

    def canonical_json(self) -> str:
        """Sorted, compact, complete: what the record keeps of the machine. Read by model_validate_json."""
        content = self.model_dump(mode="json")
        return json.dumps(content, sort_keys=True, separators=(",", ":"), ensure_ascii=False, allow_nan=False)

    @check
    def _guide_has_counts_to_follow(self) -> Iterator[Fault]:
        """The guide moves at most one step per spindle count, so counts per turn limit the pitch."""
        if self.guide.kind != "step":
            return
        pitch = self.spindle.counts_per_turn / self.guide.steps_per_mm
        if pitch < _FINEST_PITCH_MM:
            needed = -(-_FINEST_PITCH_MM * self.guide.steps_per_mm // 1)
            yield Fault(
                ("guide", "kind"),
                f'is "step", and the guide follows the spindle\'s counts, one step per count at most: '
                f"{self.spindle.counts_per_turn} counts per turn and {self.guide.steps_per_mm:g} steps/mm "
                f"allow a pitch of {pitch:.3g} mm, less than the {_FINEST_PITCH_MM:g} mm of the finest wire; "
                f"spindle.counts_per_turn of at least {needed:.0f} is needed",
            )

    @check
    def _what_is_read_by_eye_has_no_board(self) -> Iterator[Fault]:
        """Where the counter is read by eye, whatever needs a board cannot be fitted."""
        if not self.by_eye:
            return
        spindle, port = self.spindle, self.port
        out = "leave it out"
        needing: tuple[tuple[bool, KeyPath, str, str], ...] = (
            (spindle.drive != "none", ("spindle", "drive"), '"step"', 'say "none"'),
            (spindle.counts_per_turn != 1, ("spindle", "counts_per_turn"), f"{spindle.counts_per_turn}", out),
            (spindle.index, ("spindle", "index"), "true", out),
            (self.guide.kind != "hand", ("guide", "kind"), '"step"', 'say "hand"'),
            (self.tension.sensor, ("tension", "sensor"), "true", out),
            (self.pedal, ("pedal",), "true", out),
            (
                self.readings.mode == "live",
                ("readings", "mode"),
                '"live"',
                'say "checks", whose readings are typed, or "none"',
            ),
            (
                self.readings.mode == "checks" and self.readings.contact,
                ("readings", "contact"),
                "true",
                "say false, and type what the meter shows",
            ),
            (port.url is not None, ("port", "url"), f"{port.url!r}", out),
            (port.vendor is not None, ("port", "vendor"), f"{port.vendor}", out),
        )
        for is_so, path, value, instead in needing:
            if is_so:
                text = f'is {value}, which needs a board, and spindle.counter is "read": {instead}'
                yield Fault(path, text)
