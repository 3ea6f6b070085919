"""What a trip means at the bench, and what to look to before it is cleared."""

from __future__ import annotations

from windctl.protocol.messages import Trip

_LOOK_TO: dict[int, str] = {
    Trip.NONE: "",
    Trip.STOP_INPUT: "the hardware stop was pressed: find out why, then release it",
    Trip.GUARD: "the guard was opened: close it",
    Trip.OVERSPEED: "the spindle turned faster than it was driven: look to drive and encoder",
    Trip.SLIP: "the spindle did not follow its motor: look to belt, jam and encoder",
    Trip.INDEX: "turns were lost or counted twice: look to the encoder, and count the turns",
    Trip.REVERSE: "the spindle went backwards: look to belt and drive",
    Trip.TENSION_LOW: "the wire broke, left its path or ran out",
    Trip.TENSION_HIGH: "the wire is caught: free it",
    Trip.GUIDE_LIMIT: "the guide ran into its limit: bring it back to its place",
    Trip.INTERNAL: "the board met a state that it does not know: switch it off and on",
}


def trip_name(trip: int) -> str:
    """The trip as people say it, such as "tension low"."""
    return Trip(trip).name.lower().replace("_", " ")


def look_to(trip: int) -> str:
    """What probably happened, and what to put right."""
    return _LOOK_TO[trip]
