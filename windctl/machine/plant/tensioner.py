"""The pull on the wire as its sensor shows it: the felt's set value, pulsing twice a turn."""

from __future__ import annotations

from windctl.machine.plant.contact import BLOCK
from windctl.machine.plant.draws import Draws, normals
from windctl.machine.plant.fate import Fate
from windctl.machine.plant.spec import PlantSpec

_AT_REST = 0.97  # felt lets the wire relax a little when it stands
_POOL = 2048


class Tensioner:
    """Mean and pulse in sensor units, and noise for a block of ticks."""

    __slots__ = ("_draws", "_fate", "_noise", "_pool", "_units")

    def __init__(self, spec: PlantSpec, fate: Fate, seed: int) -> None:
        self._fate = fate
        self._units = fate.tension_cn * 10_000.0 / spec.tension_unit
        self._pool = normals(seed, "tension noise pool", _POOL + BLOCK)
        self._draws = Draws(seed, "tension blocks")
        self._noise = fate.tension_noise * self._units

    def mean_units(self, *, turning: bool) -> float:
        """Sensor units without pulse and noise. Rounds when cut to whole units."""
        return self._units * (1.0 if turning else _AT_REST) + 0.5

    def pulse_units(self, rpm: float) -> float:
        """Amplitude of the pulse, in sensor units: wire and felt have inertia, so it grows with speed."""
        return self._units * self._fate.tension_pulse * rpm / 1000.0

    def block(self) -> list[float]:
        """Noise in sensor units for the next BLOCK ticks."""
        if not self._noise:
            return [0.0] * BLOCK
        start, noise = self._draws.whole(_POOL), self._noise
        return [noise * z for z in self._pool[start : start + BLOCK]]
