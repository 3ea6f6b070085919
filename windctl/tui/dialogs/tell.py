"""What happened at the wire, typed in the words that the command line knows too."""

from __future__ import annotations

from windctl.desk.words import request_of
from windctl.tui.dialogs.typed import Typed


class Tell(Typed):
    """A line that is understood."""

    def will_do(self, line: str) -> bool:
        """Only what means something."""
        return request_of(line) is not None
