"""Hold a document against the JSON Schema of its kind, in the yard's words.

The schemas are the files that editors use too. A validator's own sentence never reaches a
yard: every error is told again here, at the place a person would edit.
"""

from __future__ import annotations

import json
import pathlib
import re
from collections.abc import Iterable, Iterator
from functools import cache
from typing import Any

from checker.finding import Path, Span
from checker.reading.document import Document, Fault
from checker.reading.quantity import Dimension, QuantityError, read_number, read_size
from checker.reading.words import nearest, shown

KINDS = ("yard", "parts", "class", "option", "hull", "waivers", "limits", "sheet")
"""The kinds of document that a yard writes."""


def schema_folder() -> pathlib.Path:
    """Return where the schema files are: beside the package in a checkout, inside it in a wheel."""
    package = pathlib.Path(__file__).resolve().parent.parent
    inside = package / "_schemas"
    return inside if inside.is_dir() else package.parent / "schemas"


@cache
def load_schema(name: str) -> dict[str, Any]:
    """Read one schema file by its name without ending."""
    text = (schema_folder() / f"{name}.json").read_text(encoding="utf-8")
    schema: dict[str, Any] = json.loads(text)
    return schema


@cache
def self_contained(name: str) -> dict[str, Any]:
    """Return a schema with every `$ref` replaced by what it refers to.

    The words beside a reference win over those of its target. Following references while
    validating takes longer than all the rest; our schemas refer in no circle.
    """
    filled = _filled(load_schema(name), name, ())
    assert isinstance(filled, dict)
    return filled


def _filled(here: Any, file: str, trail: tuple[str, ...]) -> Any:
    if isinstance(here, list):
        return [_filled(item, file, trail) for item in here]
    if not isinstance(here, dict):
        return here
    rest = {key: _filled(value, file, trail) for key, value in here.items() if key not in ("$ref", "$defs")}
    if "$ref" not in here:
        return rest
    other, _, pointer = here["$ref"].partition("#")
    target = other.removesuffix(".json") or file
    step_key = f"{target}#{pointer}"
    if step_key in trail:
        raise ValueError(f"schema {file} refers to itself by {here['$ref']}")
    found = _pointed(target, pointer, (*trail, step_key))
    return {**found, **rest}


def _pointed(name: str, pointer: str, trail: tuple[str, ...]) -> Any:
    here: Any = load_schema(name)
    for step in filter(None, pointer.split("/")):
        here = here[step]
    return _filled(here, name, trail)


@cache
def _validator(kind: str) -> Any:
    # Imported here: it takes longer to load than the rest of the program together, and
    # `fairloom --version` must not wait for it.
    from jsonschema import Draft202012Validator, ValidationError
    from jsonschema.validators import extend

    def pattern(_: Any, wanted: str, text: Any, __: Any) -> Iterator[Any]:
        # In Python alone `$` lets a final line break pass; an editor refuses it.
        if isinstance(text, str) and (text.endswith("\n") or not re.search(wanted, text)):
            yield ValidationError("pattern")

    extended: Any = extend
    return extended(Draft202012Validator, {"pattern": pattern})(self_contained(kind))


def schema_faults(document: Document, kind: str) -> list[Fault]:
    """Return what a document's kind does not allow, one sentence a fault."""
    errors = list(_validator(kind).iter_errors(document.data))
    faults = [fault for error in errors for fault in _told(document, error, errors)]
    return sorted(set(faults), key=lambda fault: (fault.at, fault.check, fault.message))


def _told(document: Document, error: Any, errors: list[Any]) -> Iterator[Fault]:
    """Tell one validator error in the yard's words."""
    path: Path = tuple(error.absolute_path)
    if "propertyNames" in error.absolute_schema_path:
        yield _bad_name(document, path, error)
        return
    match error.validator:
        case "additionalProperties" | "unevaluatedProperties":
            yield from _unknown_fields(document, path, error, errors)
        case "required":
            yield from _missing_fields(document, path, error)
        case _:
            yield _bad_value(document, path, error)


def _unknown_fields(document: Document, path: Path, error: Any, errors: list[Any]) -> Iterator[Fault]:
    known = sorted(_known_fields(error.schema))
    strangers = [key for key in error.instance if repr(key) in error.message]
    other_faults = any(
        e is not error and tuple(e.absolute_path)[: len(path)] == path and e.validator != error.validator
        for e in errors
    )
    for key in strangers:
        if error.validator == "unevaluatedProperties" and key in known:
            # A field that some other kind of this thing has. Where the thing has another fault the
            # validator calls all its fields unevaluated; then this one says nothing.
            if not other_faults:
                at = _key_span(document, (*path, key))
                yield Fault("unknown-field", at, f"{_thing(path)} of this kind has no field “{shown(key)}”",
                            "remove it, or change the kind")  # fmt: skip
            continue
        meant = nearest(key, known)
        remedy = f"did you mean “{meant}”?" if meant else f"known here: {', '.join(known)}"
        message = f"{_thing(path)} has no field “{shown(key)}”"
        yield Fault("unknown-field", _key_span(document, (*path, key)), message, remedy)


def _known_fields(schema: Any) -> set[str]:
    """Gather the field names that an object schema mentions, through references and branches."""
    known: set[str] = set()
    waiting, seen = [schema], set()
    while waiting:
        here = waiting.pop()
        if not isinstance(here, dict) or id(here) in seen:
            continue
        seen.add(id(here))
        known |= set(here.get("properties", ()))
        waiting += [here.get(key) for key in ("then", "else")]
        waiting += [part for key in ("allOf", "anyOf", "oneOf") for part in here.get(key, ())]
    return known


def _missing_fields(document: Document, path: Path, error: Any) -> Iterator[Fault]:
    for name in error.validator_value:
        if name not in error.instance:
            remedy = f"add “{name}”" + _example_of(error.schema, name)
            message = f"{_thing(path)} has no “{name}”"
            yield Fault("missing-field", _key_span(document, path), message, remedy)


def _example_of(schema: Any, name: str) -> str:
    field = schema.get("properties", {}).get(name, {}) if isinstance(schema, dict) else {}
    examples = field.get("examples")
    return f", e.g. `{name}: {examples[0]}`" if examples and not isinstance(examples[0], (dict, list)) else ""


def _bad_name(document: Document, path: Path, error: Any) -> Fault:
    """Tell a field whose own name is no id or quantity, at the name."""
    key, at = error.instance, _key_span(document, (*path, error.instance))
    dimension = error.schema.get("x-quantity")
    fault = _bad_quantity(key, Dimension(dimension), shown(str(path[-1])), at) if dimension else None
    remedy = error.schema.get("patternErrorMessage", "")
    return fault or Fault("bad-value", at, f"“{shown(key)}” cannot be a name here", remedy)


def _bad_value(document: Document, path: Path, error: Any) -> Fault:
    """Tell a fault of a single value."""
    at = document.places.get(path, (Span(document.file, 1, 1),) * 2)[1]
    value, schema, rule = error.instance, error.schema, error.validator
    name = _named(path)
    written = document.raw.get(path, value if isinstance(value, str) else None)
    if written is not None and value is not None and "x-quantity" in schema:
        fault = _bad_quantity(written, Dimension(schema["x-quantity"]), shown(str(path[-1])), at)
        if fault is not None:
            return fault
    choices = [str(choice) for choice in schema.get("enum", ()) if choice is not None]
    if choices and written is not None and value is not None:
        meant = nearest(written, choices)
        remedy = f"did you mean “{meant}”?" if meant else f"one of: {', '.join(choices)}"
        return Fault("bad-value", at, f"{name} cannot be “{shown(written)}”", remedy)
    if value is None or rule == "type" or (written is None and rule in ("enum", "const")):
        wanted = error.validator_value if rule == "type" else schema.get("type", "string")
        return Fault("bad-value", at, *_wrong_type(name, value, written, wanted))
    if rule == "pattern":
        remedy = schema.get("patternErrorMessage", "")
        return Fault("bad-value", at, f"{name} cannot be “{shown(str(written))}”", remedy)
    return Fault("bad-value", at, f"{name} does not fit: {_rule_words(error)}")


def _named(path: Path) -> str:
    """Name a value by its field: “options”, entry 2 of “options”."""
    if not path:
        return "the file"
    step = path[-1]
    return f"entry {step + 1} of {_named(path[:-1])}" if isinstance(step, int) else f"“{shown(step)}”"


def _bad_quantity(written: str, dimension: Dimension, name: str, at: Span) -> Fault | None:
    try:
        read_size(written) if dimension is Dimension.SIZE else read_number(written, dimension)
    except QuantityError as error:
        return Fault("bad-value", at, f"{name}: {error}")
    return None


_TYPE_WORDS = {
    "string": "text", "integer": "a whole number", "number": "a number", "boolean": "true or false",
    "object": "fields (`name: value`)", "array": "a list", "null": "null",
}  # fmt: skip


def _wrong_type(name: str, value: Any, written: str | None, wanted: str | list[str]) -> tuple[str, str]:
    kinds = [wanted] if isinstance(wanted, str) else wanted
    words = " or ".join(_TYPE_WORDS[kind] for kind in kinds)
    if value is None:
        return f"{name} is removed by null here, where there is nothing to remove", f"write {words}"
    if "string" in kinds and written is not None:
        return f"{name} is text, but {shown(written)} reads as a number or as true/false", f'write "{shown(written)}"'
    if kinds == ["boolean"] and written is not None:
        return f"{name} is true or false, not “{shown(written)}”", "write true or false"
    return f"{name} must be {words}", ""


def _rule_words(error: Any) -> str:
    """Say a rarer rule without showing a whole object."""
    limit = error.validator_value
    words = {
        "minimum": f"at least {limit}", "maximum": f"at most {limit}", "minItems": f"at least {limit} in the list",
        "maxItems": f"at most {limit} in the list", "uniqueItems": "no entry twice", "minProperties": "not empty",
        "minLength": "not empty", "maxLength": f"at most {limit} characters", "const": f"only “{limit}” here",
        "not": "this field does not belong together with another field here",
    }  # fmt: skip
    return words.get(error.validator, "see the schema")


def _thing(path: Iterable[str | int]) -> str:
    """Name the thing at a path: circuit “P22”, part “toilet”, the file."""
    steps = [str(step) for step in path]
    if not steps:
        return "the file"
    return f"{' '.join(steps[:-1])} “{shown(steps[-1])}”".strip()


def _key_span(document: Document, path: Path) -> Span:
    return document.places.get(path, (Span(document.file, 1, 1),) * 2)[0]
