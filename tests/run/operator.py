"""Somebody who stands by a run inside the test's own process and answers it, step by step."""

from __future__ import annotations

import time
from collections.abc import Callable
from dataclasses import dataclass

from windctl.machine.virtual.bench import Bench
from windctl.run.requests import Request
from windctl.run.snapshot import Snapshot
from windctl.run.wind import Winding

PATIENCE_S = 60.0


@dataclass(frozen=True, slots=True)
class Step:
    """Once `when` is true of the latest snapshot and the bench, a request, or a hand at the machine."""

    when: Callable[[Snapshot, Bench], bool]
    does: Request | Callable[[Bench], Request | None]


def asked(what: str, also: Callable[[Snapshot], bool] = lambda _: True) -> Callable[[Snapshot, Bench], bool]:
    """The run asks for `what`, and `also` is true."""
    return lambda seen, _bench: seen.asks == what and also(seen)


def answering(*steps: Step) -> Callable[[Winding, Bench], None]:
    """For `winding.wind(during=...)`: takes the steps in order, each as soon as it can be taken."""

    def stand_by(winding: Winding, bench: Bench) -> None:
        for number, step in enumerate(steps):
            end = time.monotonic() + PATIENCE_S
            while not step.when(winding.look(), bench):
                ended = winding.wait(0.0)
                assert ended is None, f"the run ended before step {number}: {ended}"
                assert time.monotonic() < end, f"step {number} could not be taken: {winding.look()}"
                time.sleep(0.002)
            request = step.does(bench) if callable(step.does) else step.does
            if request is not None:
                winding.request(request)

    return stand_by
