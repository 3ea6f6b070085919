"""Every trip that a board can have is told in the words of the bench."""

from __future__ import annotations

import pytest

from windctl.protocol.messages import TRIPS, Trip
from windctl.run.trips import look_to, trip_name


@pytest.mark.parametrize("trip", list(TRIPS))
def test_a_trip_says_what_to_look_to(trip: int) -> None:
    assert len(look_to(trip).split()) >= 4
    assert trip_name(trip).replace(" ", "_").upper() == Trip(trip).name
