"""Does the board that answered suit the coil? Asked once, before anything of the coil is sent to it."""

from __future__ import annotations

from windctl.errors import MachineError
from windctl.profile.model import MachineProfile
from windctl.protocol.messages import Capability, Identity, Refusal, Refused
from windctl.protocol.messages import Setup as SetupMessage
from windctl.record.events import CoilStarted


def check_board(started: CoilStarted, identity: Identity) -> None:
    """Nothing where the board has all that the profile says is fitted, on the scale that it says.

    Raises MachineError, naming what differs.
    """
    missing = Capability(started.setup.fitted & ~identity.capabilities)
    if missing:
        names = ", ".join(part.name.lower().replace("_", " ") for part in missing if part.name)
        raise MachineError(
            f"the profile says that these are fitted, and the board has none of them: {names}; "
            "correct the profile, or take the board that it describes"
        )
    if started.setup.fitted & Capability.TENSION:
        profile = MachineProfile.model_validate_json(started.profile_json)
        if identity.tension_scale != profile.tension.unit:
            raise MachineError(
                f"the board's tension input has {identity.tension_scale / 10_000:g} cN per unit, "
                f"the profile's tension.unit_cn is {profile.tension.unit_cn:g} cN: "
                "set it to what the board has"
            )


def check_refusal(refused: Refused) -> None:
    """A refused setup cannot be met by waiting.

    Raises MachineError, naming the board's reason and limit.
    """
    if refused.command == SetupMessage.CODE and refused.why in (Refusal.RANGE, Refusal.NOT_FITTED):
        why = Refusal(refused.why).name.lower().replace("_", " ")
        raise MachineError(f"the board refuses the limits of this coil: {why}, its limit is {refused.limit}")
