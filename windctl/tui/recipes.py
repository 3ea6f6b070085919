"""Recipes within reach, each with what is wrong with it; and what one of them will be on this machine."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass
from pathlib import Path

from windctl.desk import places
from windctl.errors import FileInvalid, RecipeError, WindctlError
from windctl.forms.source import read_text
from windctl.plan.experience.supply import Supply
from windctl.plan.growth import Growth, growth_of
from windctl.plan.make import make_plan
from windctl.plan.model import Plan
from windctl.profile.model import MachineProfile
from windctl.recipe.load import parse_recipe
from windctl.recipe.model import Recipe
from windctl.run.outlook import Ahead, foreseen


@dataclass(frozen=True, slots=True)
class Listed:
    """One recipe file. `recipe` is None where it has problems."""

    path: Path
    name: str
    text: str
    recipe: Recipe | None
    problems: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Preview:
    """What a valid recipe will be. `ahead`: the forecast over the whole coil, before the first turn."""

    listed: Listed
    recipe: Recipe
    supply: Supply  # the spool it is planned for, and what coils have taught
    plan: Plan
    growth: Growth
    ahead: tuple[Ahead, ...]


def folders() -> list[Path]:
    """Where recipes are looked for: beside the user, and in the user's own folder."""
    return [Path.cwd() / "recipes", Path.cwd(), places.config_folder() / "recipes"]


def listed(where: Iterable[Path]) -> list[Listed]:
    """All recipe files, by name; other files that happen to end in .toml are passed over."""
    found: dict[Path, Listed] = {}
    for folder in where:
        for path in sorted(folder.glob("*.toml")):
            one = _read(path)
            if one is not None:
                found.setdefault(path.resolve(), one)
    return sorted(found.values(), key=lambda one: one.name.lower())


def _read(path: Path) -> Listed | None:
    try:
        text = read_text(path, RecipeError)
    except FileInvalid as error:
        return Listed(path, path.stem, "", None, tuple(str(one) for one in error.problems))
    if "[bobbin]" not in text:
        return None
    try:
        recipe = parse_recipe(text, path.name)
    except FileInvalid as error:
        return Listed(path, path.stem, text, None, tuple(str(one) for one in error.problems))
    return Listed(path, recipe.name, text, recipe, ())


def preview(one: Listed, profile: MachineProfile, supply_for: Callable[[Recipe], Supply]) -> Preview | str:
    """What the recipe will be on this machine with this wire, or why it cannot be."""
    if one.recipe is None:
        return "\n".join(one.problems)
    try:
        supply = supply_for(one.recipe)
        plan = make_plan(one.recipe, profile, supply=supply)
        growth = growth_of(one.recipe, profile, plan)
    except WindctlError as error:
        return str(error)
    return Preview(one, one.recipe, supply, plan, growth, foreseen(plan.prior, float(plan.turns)))
