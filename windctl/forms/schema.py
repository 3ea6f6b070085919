"""The JSON schema of a form as it is written in TOML, for editors and for a reader."""

from __future__ import annotations

from typing import Any

from pydantic.json_schema import GenerateJsonSchema, JsonSchemaValue
from pydantic_core import core_schema

from windctl.forms.form import Form


class _TomlSchema(GenerateJsonSchema):
    """TOML has no null: an optional key is absent. Titles made up from key names say nothing new."""

    def nullable_schema(self, schema: core_schema.NullableSchema) -> JsonSchemaValue:
        return self.generate_inner(schema["schema"])

    def default_schema(self, schema: core_schema.WithDefaultSchema) -> JsonSchemaValue:
        made = super().default_schema(schema)
        if made.get("default") is None or isinstance(made["default"], dict):
            made.pop("default", None)  # an absent table has its own keys' defaults
        return made

    def field_title_should_be_set(self, schema: Any) -> bool:  # noqa: ARG002 - the base class's signature
        return False


def form_schema(model: type[Form]) -> dict[str, Any]:
    """JSON schema (2020-12) of the form. Every key has a description; numbers have their unit under `unit`.

    What only holds between keys, such as "exactly one of", is in the descriptions and in the checks alone.
    """
    return {"$schema": "https://json-schema.org/draft/2020-12/schema"} | model.model_json_schema(
        schema_generator=_TomlSchema
    )
