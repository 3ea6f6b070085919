"""What happened at the wire, typed in the words that the command line knows too."""

from __future__ import annotations

from windctl.desk.words import request_of
from windctl.tui.dialogs.typed import Typed

# What has no key of its own, in few enough words for the smallest screen.
SAID = (
    ("broke [TURN]", "the wire broke, at that turn"),
    ("splice [TURN]", "it is joined again"),
    ("new wire [TURN] [NAME]", "another spool is joined on"),
    ("unwind [TURNS]", "drives off; turn the spindle back by hand"),
    ("turn TURN", "so many turns lie on the bobbin"),
    ("read OHM [CELSIUS]", "what the meter shows, such as 5.93k 22.5"),
    ("undo", "takes the reading typed last back"),
    ("skip", "passes the check over"),
    ("off", "drives off, so that hands may go in"),
)


def said() -> str:
    """The words, one a line."""
    return "\n".join(f"{usage:<24}{means}" for usage, means in SAID)


class Tell(Typed):
    """A line that is understood."""

    def will_do(self, line: str) -> bool:
        """Only what means something."""
        return request_of(line) is not None
