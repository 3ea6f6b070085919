"""Temperatures: the room's drift, the coil's friction warmth over it, and a thermometer with a bias."""

from __future__ import annotations

import math

from windctl.machine.plant.draws import Draws
from windctl.machine.plant.fate import Fate

_RESOLUTION_CENTI = 6  # a common digital thermometer resolves a sixteenth of a degree


class Weather:
    """Air and coil in degrees C, moved on by `pass_time`."""

    __slots__ = ("_bias", "_draws", "_slope", "_walk", "_warmth", "_warmth_k", "_warmth_time", "air_c")

    def __init__(self, fate: Fate, seed: int) -> None:
        self._draws = Draws(seed, "room steps")
        self._slope = fate.room_slope_k_per_h / 3600.0
        self._walk = fate.room_walk_k_per_root_h / 60.0
        self._bias = fate.thermometer_k
        self.air_c = fate.room_c
        self.new_coil(fate)

    def new_coil(self, fate: Fate) -> None:
        """An empty bobbin: its wire is as warm as the shelf the spool came from."""
        self._warmth = fate.shelf_k
        self._warmth_k = fate.warmth_k
        self._warmth_time = fate.warmth_time_s

    @property
    def coil_c(self) -> float:
        """Temperature of the wound wire."""
        return self.air_c + self._warmth

    @property
    def shown_centi(self) -> int:
        """What the thermometer shows, hundredths of a degree."""
        centi = round((self.air_c + self._bias) * 100.0)
        return round(centi / _RESOLUTION_CENTI) * _RESOLUTION_CENTI if self._bias else centi

    def pass_time(self, seconds: float, pace: float) -> None:
        """`pace`: spindle speed over the recipe's cruise. Friction warms in proportion, rest cools."""
        self.air_c += self._slope * seconds
        if self._walk:
            self.air_c += self._draws.normal(0.0, self._walk * math.sqrt(seconds))
        self._warmth += (self._warmth_k * min(pace, 2.0) - self._warmth) * seconds / self._warmth_time
