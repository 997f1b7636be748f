"""Derive schemas/changes.json, the schema of a merge patch, from schemas/class.json.

A merge patch (RFC 7396) has the shape of what it patches, but nothing in it is required and
null may stand for every value that a key holds, since null removes the key. Lists are replaced
as a whole, so what stands inside a list keeps the rules of the class.

Run this file after a change of class.json or quantity.json; a test compares the result.
"""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

Schema = dict[str, Any]

SCHEMAS = Path(__file__).resolve().parent.parent / "schemas"
LOCAL = "#/$defs/"
OF_A_WHOLE_VALUE = ("items", "propertyNames")
REQUIREMENTS = ("required", "if", "then", "else")
ANNOTATIONS = ("title", "description", "examples")


class DerivationError(Exception):
    """The class schema uses something that the derivation does not know."""


def derived(class_schema: Schema) -> Schema:
    """Return the schema of a merge patch over the sections of a class.

    Raises:
        DerivationError: If two definitions that become one disagree.
    """
    changes: Schema = {
        "$schema": class_schema["$schema"],
        "$id": class_schema["$id"].replace("class.json", "changes.json"),
        "title": "Changes",
        "description": "A merge patch over the sections of a hull class: a given key replaces, null removes, "
        "a list replaces the whole list. This file is derived from class.json.",
        "type": "object",
        "properties": _patches_of(class_schema["properties"], class_schema),
        "additionalProperties": False,
    }
    changes["$defs"] = _definitions(changes, class_schema)
    return changes


def _definitions(changes: Schema, class_schema: Schema) -> Schema:
    """Return the patch form of every definition that is reached from the changes, by name."""
    found: Schema = {}
    waiting = _local_names(changes)
    while waiting:
        name = waiting.pop(0)
        if name not in found:
            found[name] = _patch_of(_definition(name, class_schema), class_schema)
            waiting += _local_names(found[name])
    return found


def _definition(name: str, class_schema: Schema) -> Schema:
    """Return a definition of the class schema or of the shared quantities."""
    own = class_schema["$defs"]
    shared = json.loads((SCHEMAS / "quantity.json").read_text(encoding="utf-8"))["$defs"]
    if (name in own) == (name in shared):
        raise DerivationError(f"{name} must be defined once, in class.json or in quantity.json")
    definition: Schema = own[name] if name in own else shared[name]
    return definition


def _local_names(schema: Any) -> list[str]:
    """Return the names of the definitions that a schema refers to in its own file, in order."""
    if isinstance(schema, list):
        return [name for part in schema for name in _local_names(part)]
    if not isinstance(schema, dict):
        return []
    names = [name for key, part in schema.items() if key != "examples" for name in _local_names(part)]
    return [schema["$ref"].removeprefix(LOCAL), *names] if _is_local(schema) else names


def _is_local(schema: Schema) -> bool:
    """Tell whether a schema refers to a definition of its own file."""
    return isinstance(schema.get("$ref"), str) and schema["$ref"].startswith(LOCAL)


def _patches_of(properties: Schema, class_schema: Schema) -> Schema:
    """Return the patch form of every property."""
    return {name: _patch_of(value, class_schema) for name, value in properties.items()}


def _patch_of(schema: Schema, class_schema: Schema) -> Schema:
    """Return the schema that also takes null and requires nothing."""
    if "then" in schema:
        schema = _union(schema, class_schema)
    patch: Schema = {}
    for key, value in schema.items():
        if key in REQUIREMENTS:
            continue
        if key == "$ref":
            patch[key] = LOCAL + value.split(LOCAL)[1]
        elif key == "properties":
            patch[key] = _patches_of(value, class_schema)
        elif key == "additionalProperties" and isinstance(value, dict):
            patch[key] = _patch_of(value, class_schema)
        elif key in OF_A_WHOLE_VALUE:
            patch[key] = _outside(value)
        else:
            patch[key] = value
    return _nullable(patch)


def _union(schema: Schema, class_schema: Schema) -> Schema:
    """Join both forms of an entity, since a patch does not tell which of them it changes."""
    forms = [class_schema["$defs"][schema[key]["$ref"].removeprefix(LOCAL)] for key in ("else", "then")]
    properties: Schema = {}
    for form in forms:
        for name, value in form["properties"].items():
            if _constraints(properties.setdefault(name, value)) != _constraints(value):
                raise DerivationError(f"the forms of {schema['title']} disagree about {name}")
    told = {key: schema[key] for key in ANNOTATIONS if key in schema}
    return {**told, "type": "object", "properties": properties, "additionalProperties": False}


def _constraints(schema: Schema) -> Schema:
    """Return a schema without what only readers see."""
    return {key: value for key, value in schema.items() if key not in ANNOTATIONS}


def _outside(schema: Any) -> Any:
    """Return a schema whose references lead to class.json, where null is not allowed."""
    if isinstance(schema, list):
        return [_outside(part) for part in schema]
    if not isinstance(schema, dict):
        return schema
    moved = {key: value if key == "examples" else _outside(value) for key, value in schema.items()}
    if _is_local(moved):
        moved["$ref"] = "class.json" + moved["$ref"]
    return moved


def _nullable(schema: Schema) -> Schema:
    """Let a schema take null; a reference needs nothing, since its target takes null."""
    if "$ref" in schema:
        return schema
    if "type" not in schema:
        raise DerivationError(f"{schema.get('title', 'a schema')} has no type")
    types = schema["type"] if isinstance(schema["type"], list) else [schema["type"]]
    nullable = {**schema, "type": [*types, "null"]}
    if "enum" in schema:
        nullable["enum"] = [*schema["enum"], None]
        nullable["enumDescriptions"] = [*schema["enumDescriptions"], "Removes the value."]
    return nullable


def text(schema: Schema) -> str:
    """Return a schema as the project writes it to a file."""
    return json.dumps(schema, indent=2, ensure_ascii=False) + "\n"


def main() -> None:
    """Write schemas/changes.json."""
    class_schema = json.loads((SCHEMAS / "class.json").read_text(encoding="utf-8"))
    (SCHEMAS / "changes.json").write_text(text(derived(class_schema)), encoding="utf-8", newline="\n")


if __name__ == "__main__":
    main()
