"""Which coils share what: the keys of bobbins and lays."""

from __future__ import annotations

import hashlib
import json

from windctl.plan.experience.gaussian import Name
from windctl.recipe.model import Recipe


def bobbin_key(recipe: Recipe) -> str:
    """The same for recipes with the same core and flanges."""
    return _key(recipe.bobbin.model_dump(mode="json", exclude_none=True))


def lay_key(recipe: Recipe) -> str:
    """The same for recipes that pack alike: core, gap, wire, lay and tension.

    What belongs to one spool or one core (measured diameters, resistance, perimeter) is left out, and the
    scatter's seed: another seed is another scatter of the same kind.
    """
    bobbin, wire = recipe.bobbin, recipe.wire
    tension = None if recipe.tension is None else recipe.tension.set_cn
    return _key(
        {
            "core": [bobbin.core_length_mm, bobbin.core_width_mm, bobbin.corner_radius_mm],
            "gap": bobbin.flange_gap_mm,
            "wire": [wire.gauge, wire.diameter_mm, wire.enamel],
            "lay": recipe.lay.model_dump(mode="json", exclude_none=True, exclude={"seed"}),
            "tension": tension,
        }
    )


def asked_for(recipe: Recipe, spool: str, bench: str) -> set[Name]:
    """The unknowns that a plan of this recipe is made of; `spool` empty where none is meant."""
    lay = lay_key(recipe)
    of_spool = {(what, spool) for what in ("level", "slope", "area", "metal")} if spool else set()
    of_lay = {("lay", lay), ("jaws", lay), ("style", recipe.lay.style)}
    return of_spool | of_lay | {("core", bobbin_key(recipe)), ("meter", bench)}


def _key(content: object) -> str:
    text = json.dumps(content, sort_keys=True, separators=(",", ":"), allow_nan=False)
    return hashlib.sha256(text.encode()).hexdigest()[:16]
