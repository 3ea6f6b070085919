"""Whole coils on the virtual machine inside the test's own process, with a real book."""

from __future__ import annotations

import json
import random
import re
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

from windctl.book.open import open_book
from windctl.machine.plant.faults import Faults
from windctl.machine.plant.plant import PlantTruth
from windctl.machine.ports import Port
from windctl.machine.virtual.bench import Bench, virtual_bench
from windctl.machine.virtual.port import VirtualPort
from windctl.plan.make import make_plan
from windctl.profile.builtin import VIRTUAL
from windctl.profile.model import MachineProfile
from windctl.recipe.load import parse_recipe
from windctl.recipe.model import Recipe
from windctl.run.outcome import Outcome
from windctl.run.requests import Hold
from windctl.run.runner import Ended
from windctl.run.wind import Here, Order, Winding, begin

ROOT = Path(__file__).resolve().parents[2]
SHIPPED = (ROOT / "recipes/bridge-single-to-resistance.toml").read_text(encoding="utf-8")


def with_stop(text: str, **stop: float | int) -> str:
    """A recipe's text with another [stop] table."""
    head, _, _ = text.partition("[stop]")
    return head + "[stop]\n" + "\n".join(f"{key} = {value}" for key, value in stop.items()) + "\n"


def with_key(text: str, key: str, value: object) -> str:
    """A recipe's text with another value for a key that it has."""
    changed, n = re.subn(rf"^{key} = .*$", f"{key} = {json.dumps(value)}", text, flags=re.MULTILINE)
    assert n == 1, f"{key} stands {n} times in the recipe"
    return changed


# The shipped coil cut short: the same bobbin, wire and lay, a sixth of the turns.
SHORT = with_stop(SHIPPED, dcr_20c_ohm=800, tolerance_pct=3, min_turns=1000, max_turns=1400)
SHORT_TURNS = with_stop(SHIPPED, turns=400, tolerance_pct=0.5)


@dataclass(frozen=True)
class Wound:
    """A coil and what only the simulation knows of it."""

    outcome: Outcome
    truth: PlantTruth
    ended: Ended
    bench: Bench


def here(seed: int = 1) -> Here:
    """A fixed clock, and chance from a seed."""
    chance = random.Random(seed)
    return Here(
        wall_time=lambda: "2026-03-02T10:00:00+01:00",
        year=2026,
        coil_id=f"00000000-0000-4000-8000-{chance.getrandbits(48):012x}",
        nonces=lambda: chance.getrandbits(32),
        operator="a test",
    )


def order(text: str, profile: MachineProfile = VIRTUAL, seed: int = 1) -> tuple[Recipe, Order]:
    """A recipe's text as an order for a machine."""
    recipe = parse_recipe(text, "test.toml")
    plan = make_plan(recipe, profile)
    return recipe, Order(recipe, text, plan, profile, f"{profile.name}, plant seed {seed}")


def wind(
    text: str,
    book: Path,
    *,
    plant_seed: int = 1,
    profile: MachineProfile = VIRTUAL,
    chance: int | None = None,
    faults: Faults | None = None,
    port_around: Callable[[VirtualPort], Port] = lambda port: port,
    during: Callable[[Winding, Bench], None] = lambda winding, bench: None,
) -> Wound:
    """Wind one coil as fast as possible into `book`; `during` may interfere once it has started."""
    recipe, wanted = order(text, profile, plant_seed)
    bench = virtual_bench(recipe, profile, plant_seed, faults=faults)
    port = VirtualPort(bench)
    with open_book(book) as opened:
        winding = begin(wanted, opened, port_around(port), here(plant_seed if chance is None else chance))
        winding.start()
        try:
            during(winding, bench)
        except BaseException:
            winding.request(Hold("a test", "it went wrong", leave=True))
            raise
        ended = winding.wait(280.0)
        outcome = winding.close()
    assert ended is not None
    return Wound(outcome, port.truth(), ended, bench)
