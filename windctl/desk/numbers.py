"""How the faces write numbers: as paper and every other room does, by `windctl.numbers`."""

from windctl.numbers import counted, duration, grouped, ohm, short_digest, turns, with_uncertainty

__all__ = ["counted", "duration", "grouped", "ohm", "short_digest", "turns", "with_uncertainty"]
