"""The contact and its meter: what a ratio converter with a constant current sees of a growing, turning coil.

Per sample: gain, leads, the wire between coil and contact, mains hum picked up by the turns, the turning
coil's own voltage where its axis is off, noise, and a contact that bounces. All but what follows the
spindle's angle is drawn for a block of ticks at a time, so that a sample costs one look-up.
"""

from __future__ import annotations

import math

from windctl.machine.plant.draws import Draws, normals, sine_table
from windctl.machine.plant.fate import Fate
from windctl.machine.plant.spec import PlantSpec

BLOCK = 250  # ticks
_CURRENT_A = 1e-4  # through the coil: 2 V at 20 kilohm
_EARTH_T = 50e-6
_TABLE = 1024
_FAR = 1e9  # units: beyond either end of the scale
_CORRELATION = 0.5  # of the slow wander, from one block to the next
_LONGEST_BOUNCE = 40  # ticks


class Meter:
    """Turns ohm at the coil into units of the contact input."""

    __slots__ = (
        "_bounce_draws",
        "_constant_ohm",
        "_fate",
        "_hum_per_m2",
        "_phase",
        "_phase_step",
        "_pool",
        "_sine",
        "_spec",
        "_wander",
        "_wander_draws",
        "gain",
        "per_ohm",
    )

    def __init__(self, spec: PlantSpec, fate: Fate, seed: int) -> None:
        self._spec = spec
        self._fate = fate
        self.gain = fate.gain
        self.per_ohm = 1000.0 / spec.milliohm_per_unit
        self._constant_ohm = fate.offset_ohm
        self._hum_per_m2 = 2.0 * math.pi * fate.mains_hz * fate.hum_field_ut * 1e-6 / _CURRENT_A
        self._phase = Draws(seed, "mains phase").unit() * _TABLE
        self._phase_step = fate.mains_hz / 1000.0 * _TABLE
        self._sine = sine_table(_TABLE)
        self._pool = normals(seed, "sample noise pool", 4096 + BLOCK)
        self._bounce_draws = Draws(seed, "bounces and blocks")
        self._wander_draws = Draws(seed, "wander")
        self._wander = 0.0

    def units(self, coil_ohm: float, contact_wire_ohm: float) -> float:
        """Units shown for a coil of `coil_ohm` at its temperature, without noise; and a half, to cut."""
        return self.gain * (coil_ohm + contact_wire_ohm + self._constant_ohm) * self.per_ohm + 0.5

    def axis_units(self, turns: float, rpm: float) -> float:
        """Amplitude, in units, of the voltage of a coil turning askew in the earth's field, once a turn.

        Faraday: 5 m2 of turns, one degree, 1000 rpm, 50 uT give 0.46 mV.
        """
        area_m2 = turns * self._spec.core_area_mm2 * 1e-6
        volt = _EARTH_T * self._fate.tilt_degrees * (math.pi / 180.0) * area_m2 * rpm * (2.0 * math.pi / 60.0)
        return volt / _CURRENT_A * self.per_ohm

    def block(self, coil_ohm: float, turns: float, *, turning: bool) -> list[float]:
        """Deviations, in units, for the next BLOCK ticks: hum, noise, wander, and bounces.

        A contact that is open, or at zero, deviates far beyond that end of the scale.
        """
        spec, fate, per_ohm = self._spec, self._fate, self.per_ohm
        reading_sd = math.sqrt((spec.noise_pct / 100.0 * coil_ohm) ** 2 + spec.floor_ohm**2) * per_ohm
        if fate.reading_noise:
            fresh = self._wander_draws.normal(0.0, math.sqrt(1.0 - _CORRELATION**2))
            self._wander = _CORRELATION * self._wander + fresh
        wander = self._wander * fate.reading_noise * reading_sd
        white = fate.sample_noise * reading_sd
        hum = self._hum_per_m2 * turns * spec.core_area_mm2 * 1e-6 * per_ohm
        draws = self._bounce_draws
        if not (hum or white):
            values = [wander] * BLOCK
        else:
            sine, phase, step = self._sine, self._phase, self._phase_step
            start = draws.whole(4096)
            values = [
                wander + hum * sine[int(phase + step * i) & 1023] + white * noise
                for i, noise in enumerate(self._pool[start : start + BLOCK])
            ]
        self._phase = (self._phase + self._phase_step * BLOCK) % _TABLE
        if turning and draws.unit() < fate.bounces_per_s * BLOCK / 1000.0:
            self._bounce(values, coil_ohm * per_ohm)
        return values

    def _bounce(self, values: list[float], coil_units: float) -> None:
        draws = self._bounce_draws
        start = draws.whole(BLOCK)
        end = min(BLOCK, start + 1 + int(_LONGEST_BOUNCE * draws.unit() ** 2))
        kind = draws.unit()
        if kind < 0.4:  # lifted off
            by = _FAR
        elif kind < 0.6:  # touches bare metal of the machine
            by = -_FAR
        elif kind < 0.8:  # dirt under the contact
            by = coil_units * draws.uniform(0.01, 0.30)
        else:  # finds a deeper turn through thin enamel
            by = -coil_units * draws.uniform(0.005, 0.10)
        for i in range(start, end):
            values[i] += by
