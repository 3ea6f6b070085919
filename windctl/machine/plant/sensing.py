"""What contact, tension sensor and thermometer show, tick by tick.

Both analogue inputs are straight lines over the angle of the turn being laid, a wave that follows the angle,
and a block of drawn deviations: worked out per turn and per block, looked up per tick.
"""

from __future__ import annotations

from windctl.machine.plant.coil_growing import Coil
from windctl.machine.plant.contact import BLOCK, Meter
from windctl.machine.plant.draws import sine_table
from windctl.machine.plant.fate import Fate
from windctl.machine.plant.spec import LAST_UNIT, OPEN, PlantSpec
from windctl.machine.plant.tensioner import Tensioner
from windctl.machine.plant.weather import Weather
from windctl.machine.twin.signals import Inputs
from windctl.material.copper import ALPHA_20C

_SECONDS = BLOCK / 1000.0


class Sensing:
    """The instruments of one bench: `sample` each tick, `look` each turn, `new_block` every BLOCK ticks."""

    __slots__ = (
        "_at",
        "_celsius",
        "_connected",
        "_contact",
        "_lead_mm",
        "_line",
        "_meter",
        "_pull",
        "_pull_mean",
        "_pull_pulse",
        "_slope",
        "_spec",
        "_table",
        "_tensioner",
        "_touching",
        "_twice",
        "_wobble",
        "weather",
    )

    def __init__(self, spec: PlantSpec, fate: Fate, seed: int) -> None:
        self._spec = spec
        self.weather = Weather(fate, seed)
        self._meter = Meter(spec, fate, seed)
        self._tensioner = Tensioner(spec, fate, seed)
        self._lead_mm = fate.contact_length_mm
        self._table = sine_table(spec.steps_per_turn)
        self._twice = sine_table(spec.steps_per_turn, cycles=2)
        self._touching = spec.readings == "live"
        self._connected: float | None = None  # ohm of a resistor in the coil's place
        self._contact = [0.0] * BLOCK
        self._pull = [0.0] * BLOCK
        self._at = 0
        self._celsius = self.weather.shown_centi
        self._line = self._slope = self._wobble = 0.0
        self._pull_mean = self._pull_pulse = 0.0

    def sample(self, angle: int, inputs: Inputs) -> None:
        """One tick, with the spindle `angle` steps into the turn being laid."""
        at = self._at
        self._at = at + 1
        seen = self._line + self._slope * angle + self._wobble * self._table[angle] + self._contact[at]
        inputs.contact = OPEN if seen > LAST_UNIT else int(seen) if seen > 0.0 else 0
        pull = self._pull_mean + self._pull_pulse * self._twice[angle] + self._pull[at]
        inputs.tension = OPEN if pull > LAST_UNIT else int(pull) if pull > 0.0 else 0
        inputs.celsius_centi = self._celsius

    def connect(self, ohm: float | None) -> None:
        """The contact's leads on a resistor (0: together, infinite: on nothing); None: on the wire again."""
        self._connected = ohm

    def new_coil(self, fate: Fate) -> None:
        """Another bobbin: instruments and room stay as they are."""
        self.weather.new_coil(fate)
        self._lead_mm = fate.contact_length_mm

    def new_block(self, coil: Coil, pace: float, *, drives_off: bool) -> None:
        """Draws the next BLOCK ticks. `pace`: mean speed of the last block over the recipe's cruise."""
        self.weather.pass_time(_SECONDS, pace)
        self._celsius = self.weather.shown_centi
        turning = pace > 0.0
        if self._spec.readings == "checks":
            # the winder bares the wire and touches the contact once the machine stands with its drives off
            self._touching = drives_off and not turning
        if self._connected is not None:
            still = self._connected if self._connected < float("inf") else 0.0
            self._contact = self._meter.block(still, 0.0, turning=False)
        else:
            self._contact = self._meter.block(coil.ohm, coil.turns, turning=turning)
        self._pull = self._tensioner.block()
        self._at = 0

    def look(self, coil: Coil, rpm: float, *, wire_whole: bool) -> None:
        """Sets the lines that contact and tension follow until the next turn or block."""
        spec, meter, weather = self._spec, self._meter, self.weather
        if self._connected is not None:
            self._line = meter.units(min(self._connected, 1e9), 0.0)
            self._slope = self._wobble = 0.0
        elif wire_whole and self._touching:
            warm = 1.0 + ALPHA_20C * (weather.coil_c - 20.0)
            lead = self._lead_mm * 0.001 * coil.ohm_per_m * (1.0 + ALPHA_20C * (weather.air_c - 20.0))
            self._line = meter.units(coil.ohm * warm, lead)
            self._slope = meter.gain * coil.next_ohm * warm * meter.per_ohm / spec.steps_per_turn
            self._wobble = meter.axis_units(coil.turns, rpm)
        else:
            self._line = 1e6 * OPEN
            self._slope = self._wobble = 0.0
        if wire_whole and spec.tension_sensor:
            self._pull_mean = self._tensioner.mean_units(turning=rpm > 0.0)
            self._pull_pulse = self._tensioner.pulse_units(rpm)
        else:
            self._pull_mean = self._pull_pulse = -1e9
