"""A reading that somebody typed: whether it can be one, and what it says. Pure."""

from __future__ import annotations

from windctl.forecast.belief import look, moved
from windctl.forecast.estimator import update
from windctl.forecast.finish import so_far
from windctl.forecast.reading import Reading
from windctl.protocol.messages import Capability
from windctl.record.events import HandsAsked, ReadingTyped
from windctl.record.state import State
from windctl.run.requests import Read
from windctl.run.said import OFF, Answer

_COLDEST_C, _WARMEST_C = -40.0, 60.0
_SLIP = 5.0  # about a thousand times off: within this factor of it
_INSULATE = "Insulate the bared spot again before you wind on."


def typed(request: Read, state: State, at_ms: int) -> Answer:
    """The facts of a typed reading, and what it comes to; or why it cannot be taken."""
    estimate = state.estimate
    if estimate is None or state.turns <= 0:
        return Answer(says="there is no turn yet to be measured")
    if not state.drives_off:
        return Answer((HandsAsked(at_ms, request.by, "read the resistance"),), f"{OFF} Then say it again.")
    celsius = _celsius(request, state)
    if celsius is None:
        return Answer(says="how warm is it beside the coil? Say: read OHM CELSIUS")
    if not _COLDEST_C <= celsius <= _WARMEST_C:
        return Answer(says=f"{celsius:g} °C cannot be: it must be from {_COLDEST_C:g} to {_WARMEST_C:g} °C")
    turn = state.wire_ends_at
    seconds = None if state.status is None else state.status.ticks / 1000.0
    reading = Reading(turn, request.ohm, celsius, resting=True, seconds=seconds)
    expected = look(
        moved(estimate.belief, turn, estimate.walk), reading, estimate.prior.contact_length_ohm
    ).ohm
    for factor in (1000.0, 0.001):
        if expected / _SLIP < request.ohm * factor < expected * _SLIP:
            meant = request.ohm * factor
            return Answer(
                says=f"{request.ohm:g} ohm is about a thousand times off the expected {expected:.1f} ohm: "
                f"if {meant:g} ohm is meant, say that"
            )
    fact = ReadingTyped(at_ms, turn, request.ohm, celsius, request.by)
    after, used = update(estimate, reading)
    if not used:
        return Answer(
            (fact,),
            f"{request.ohm:g} ohm does not fit the expected {expected:.1f} ohm: look at contact and leads "
            "and read again; the same reading once more is believed",
        )
    now = so_far(after, turn)
    half = (now.high - now.low) / 2.0
    return Answer(
        (fact,), f"noted: {now.ohm:.1f} ± {half:.1f} ohm at 20 °C after {turn:.0f} turns. {_INSULATE}"
    )


def _celsius(request: Read, state: State) -> float | None:
    """The typed temperature, else the board's own."""
    if request.celsius is not None:
        return request.celsius
    identity, status = state.identity, state.status
    if identity is None or status is None or not identity.capabilities & Capability.THERMOMETER:
        return None
    return status.celsius / 100.0
