"""`windctl recipe`: recipe files."""

from __future__ import annotations

from pathlib import Path

import click

from windctl.cli import present
from windctl.cli.exit_codes import ExitCode
from windctl.cli.options import Shared, takes


@click.group()
def recipe() -> None:
    """Recipe files."""


@recipe.command(short_help="Everything that is wrong with recipe files.")
@click.argument("files", metavar="FILE...", type=click.Path(path_type=Path), nargs=-1, required=True)
@takes("json")
def check(shared: Shared, files: tuple[Path, ...]) -> ExitCode:
    """Say everything that is wrong with recipe files, each with its place; nothing else is done."""
    from windctl.errors import Problem, RecipeError
    from windctl.recipe.load import load_recipe

    sound: list[dict[str, str]] = []
    problems: list[Problem] = []
    for file in files:
        try:
            loaded = load_recipe(file)
        except RecipeError as error:
            problems.extend(error.problems)
            continue
        sound.append({"file": str(file), "name": loaded.name, "digest": loaded.digest})
    if shared.json:
        listed = [
            {"file": one.file, "line": one.line, "column": one.column, "text": one.text} for one in problems
        ]
        present.result_json({"recipes": sound, "problems": listed})
    else:
        for entry in sound:
            digest = present.short_digest(entry["digest"])
            present.result(f"{entry['file']}: good: {entry['name']}, {digest}")
        for problem in problems:
            present.message(str(problem))
    return ExitCode.FILE_INVALID if problems else ExitCode.DONE


@recipe.command(short_help="The JSON schema of recipe files, for editors.")
def schema() -> None:
    """The JSON schema of recipe files, for editors: they complete, explain and check while you write.

    Save it beside your recipes and put `#:schema recipe.schema.json` at the top of each.
    """
    import json

    from windctl.forms.schema import form_schema
    from windctl.recipe.model import Recipe

    click.echo(json.dumps(form_schema(Recipe), indent=2))


@recipe.command(short_help="Ask a few questions and write a recipe.")
@click.argument("file", type=click.Path(dir_okay=False, path_type=Path))
@takes("json", "no_input")
def new(shared: Shared, file: Path) -> None:
    """Ask a few questions and write FILE, a recipe with a comment on every line.

    Nothing is written over, and nothing before the last answer.
    """
    from windctl.cli.recipe_new import write_new

    write_new(shared, file)
