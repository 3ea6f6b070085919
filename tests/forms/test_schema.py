"""The JSON schema describes a form as it is written: every key explained, no null, numbers with units."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import pytest

from windctl.forms.form import Form
from windctl.forms.schema import form_schema
from windctl.profile.model import MachineProfile
from windctl.recipe.model import Recipe


def _keys(schema: dict[str, Any]) -> Iterator[tuple[str, dict[str, Any]]]:
    for table in (schema, *schema["$defs"].values()):
        yield from table["properties"].items()


@pytest.mark.parametrize("model", [Recipe, MachineProfile])
def test_every_key_is_explained_and_every_measure_has_its_unit(model: type[Form]) -> None:
    schema = form_schema(model)
    described = 0
    for name, key in _keys(schema):
        if "$ref" in key:
            assert schema["$defs"][key["$ref"].rpartition("/")[2]]["description"]
            continue
        described += 1
        assert key["description"], name
        assert "anyOf" not in key, name
        if name.endswith(("_mm", "_rpm", "_ohm", "_cn", "_pct", "_k", "_s")):
            assert key["unit"], name
    assert described > 20


@pytest.mark.parametrize("model", [Recipe, MachineProfile])
def test_unknown_keys_are_refused_in_every_table(model: type[Form]) -> None:
    schema = form_schema(model)
    assert all(table["additionalProperties"] is False for table in (schema, *schema["$defs"].values()))


def test_limits_are_those_of_the_model() -> None:
    defs = form_schema(Recipe)["$defs"]
    assert defs["Lay"]["properties"]["packing"] == {
        "description": "Enamelled wire area over window area; else learnt.",
        "exclusiveMinimum": 0,
        "maximum": 0.91,
        "type": "number",
        "unit": "",
    }
