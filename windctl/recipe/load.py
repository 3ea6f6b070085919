"""Recipe files."""

from __future__ import annotations

from pathlib import Path

from windctl.errors import RecipeError
from windctl.forms.source import read_text
from windctl.forms.toml_form import load_form
from windctl.recipe.model import Recipe


def load_recipe(path: Path) -> Recipe:
    """The recipe in a file. Raises RecipeError with every problem, also when there is no readable file."""
    return parse_recipe(read_text(path, RecipeError), str(path))


def parse_recipe(text: str, file: str = "recipe") -> Recipe:
    """The recipe in a text; `file` names it in messages. Raises RecipeError with every problem."""
    return load_form(text, file, Recipe, RecipeError)
