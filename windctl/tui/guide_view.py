"""What of a dry pass is drawn: from the run's snapshot and how the bobbin sits. Pure."""

from __future__ import annotations

from typing import TYPE_CHECKING

from windctl.tui.keymap import COARSE_MM, FINE_MM
from windctl.tui.pictures.flanges import Flanges

if TYPE_CHECKING:
    from windctl.recipe.orientation import Side
    from windctl.run.snapshot import Snapshot


def flanges(snapshot: Snapshot, start_side: Side) -> Flanges | None:
    """None where no guide is shown."""
    look = snapshot.guide_look
    if look is None:
        return None
    known = snapshot.guide_mm is not None and look.way_mm > 0
    return Flanges(
        start_left=start_side == "motor",
        place=(snapshot.guide_mm or 0.0) / look.way_mm if known else None,
        end=look.end if look.near else "",
        shift_mm=look.shift_mm,
        fine_mm=FINE_MM,
        coarse_mm=COARSE_MM,
    )
