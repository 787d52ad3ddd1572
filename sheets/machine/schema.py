"""JSON Schema of the machine and site files, for editors: ``python -m sheets.machine.schema`` writes them.

The schemas are written from the models, and say what the reader accepts: quantities are texts with a unit.
What must fit together over the whole file stands in ``checks`` and in no schema.
"""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any, Final

from pydantic.json_schema import GenerateJsonSchema, JsonSchemaValue
from pydantic_core import core_schema

from sheets.machine.fields import Entry
from sheets.machine.model import Machine
from sheets.machine.site import Site
from sheets.quantities import number
from sheets.resources import resource_folder

SCHEMAS: Final[dict[str, type[Entry]]] = {"machine.schema.json": Machine, "site.schema.json": Site}
"""File name in schemas/ to what it describes."""

DIALECT: Final = "https://json-schema.org/draft/2020-12/schema"


class _ForFiles(GenerateJsonSchema):
    """Leaves null out: a key that isn't needed is left out of a file, never written as null."""

    def nullable_schema(self, schema: core_schema.NullableSchema) -> JsonSchemaValue:
        return self.generate_inner(schema["schema"])

    def field_title_should_be_set(self, schema: object) -> bool:  # noqa: ARG002  # a title would repeat the key
        return False


def schema_text(model: type[Entry]) -> str:
    """The JSON Schema of a file, as it stands in schemas/."""
    schema = model.model_json_schema(by_alias=True, schema_generator=_ForFiles)
    finished = {"$schema": DIALECT, **_finished(schema)}
    return json.dumps(finished, indent=2, ensure_ascii=False) + "\n"


def _finished(schema: Any) -> Any:
    """The same schema with defaults and descriptions as a user writes them."""
    if isinstance(schema, list):
        return [_finished(each) for each in schema]
    if not isinstance(schema, dict):
        return schema
    result = {key: _finished(value) for key, value in schema.items() if key != "unit"}
    if "patternProperties" in schema:
        result["additionalProperties"] = False
    if "default" in schema:
        default = schema["default"]
        if "unit" in schema and default is not None:
            result["default"] = f"{number(default)} {schema['unit']}".strip()
        elif isinstance(default, bool):
            result["default"] = "yes" if default else "no"
        elif default in (None, "") or isinstance(default, dict):
            del result["default"]
    if "unit" in schema:
        said, examples = schema["description"], " or ".join(schema["examples"])
        result["description"] = f"{said.rstrip()} Written such as {examples}."
    return result


def main() -> None:
    """Write all schemas into schemas/."""
    folder: Path = resource_folder("schemas")
    for name, model in SCHEMAS.items():
        (folder / name).write_text(schema_text(model), encoding="utf-8")


if __name__ == "__main__":
    main()
