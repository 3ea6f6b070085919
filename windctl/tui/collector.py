"""When the collector of reference cycles may look through everything that lives.

It stops every thread meanwhile, the hold key's and the run's among them: with the interface loaded for some
100 ms, and for a second where the computer is busy. So everything that is there when a coil begins is set
aside; while it is wound only what came since is looked through, and what was set aside comes back at the end.
"""

from __future__ import annotations

import gc


def set_aside() -> None:
    """Collect now, while nothing turns, and pass over what is left from now on. Again: anew."""
    gc.unfreeze()
    gc.collect()
    gc.freeze()


def take_back() -> None:
    """Nothing turns any more: look through everything."""
    gc.unfreeze()
    gc.collect()
