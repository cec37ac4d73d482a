"""The JSON Schema of a scene file, for editors."""

from typing import Any

from pydantic.json_schema import GenerateJsonSchema, JsonSchemaValue

from lumentrace.scene.forms import SceneForm


class _Generator(GenerateJsonSchema):
    """As pydantic's, but without null: TOML has none, a key is left out instead."""

    def nullable_schema(self, schema: Any) -> JsonSchemaValue:
        return self.generate_inner(schema["schema"])

    def default_schema(self, schema: Any) -> JsonSchemaValue:
        if schema.get("default") is None:
            return self.generate_inner(schema["schema"])
        return super().default_schema(schema)


def json_schema() -> dict[str, Any]:
    """The schema (draft 2020-12) of the study's own file, made from what the reader checks."""
    schema = SceneForm.model_json_schema(schema_generator=_Generator)
    return {"$schema": _Generator.schema_dialect, **schema, "title": "lumentrace scene file"}
