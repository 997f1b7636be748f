"""Hold a document against the JSON Schema of its kind, in the yard's words.

The schemas are the files that editors use too. A validator's own sentence never reaches a
yard: every error is told again here, at the place a person would edit.
"""

from __future__ import annotations

import json
import pathlib
from collections.abc import Iterable, Iterator
from functools import cache
from typing import Any

from checker.finding import Path, Span
from checker.reading.document import Document, Fault
from checker.reading.quantity import Dimension, QuantityError, read_number, read_size
from checker.reading.words import nearest, shown

KINDS = ("yard", "parts", "class", "option", "hull", "waivers")
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
    from jsonschema import Draft202012Validator

    return Draft202012Validator(self_contained(kind))


def schema_faults(document: Document, kind: str) -> list[Fault]:
    """Return what a document's kind does not allow, one sentence a fault."""
    errors = list(_validator(kind).iter_errors(document.data))
    faults = [fault for error in errors for fault in _told(document, error, errors)]
    return sorted(set(faults), key=lambda fault: (fault.at, fault.check, fault.message))


def _told(document: Document, error: Any, errors: list[Any]) -> Iterator[Fault]:
    """Tell one validator error in the yard's words."""
    path: Path = tuple(error.absolute_path)
    match error.validator:
        case "additionalProperties" | "unevaluatedProperties":
            yield from _unknown_fields(document, path, error, errors)
        case "required":
            yield from _missing_fields(document, path, error)
        case "propertyNames":
            yield from _bad_names(document, path, error)
        case _:
            fault = _bad_value(document, path, error)
            if fault is not None:
                yield fault


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


def _bad_names(document: Document, path: Path, error: Any) -> Iterator[Fault]:
    key = error.instance
    at = _key_span(document, (*path, key))
    yield Fault("bad-value", at, f"“{shown(key)}” is not a plain id",
                "use letters, digits, - and _, at most 40 characters, starting with a letter or digit")  # fmt: skip


def _bad_value(document: Document, path: Path, error: Any) -> Fault | None:
    """Tell a fault of a single value; None where it is no fault by our own reading."""
    at = document.places.get(path, (Span(document.file, 1, 1),) * 2)[1]
    value, schema = error.instance, error.schema
    name = shown(str(path[-1])) if path else "the file"
    dimension = schema.get("x-quantity") if isinstance(schema, dict) else None
    written = document.raw.get(path, value if isinstance(value, str) else None)
    if dimension and isinstance(written, str) and value is not None:
        return _bad_quantity(written, Dimension(dimension), name, at)
    if error.validator == "enum":
        choices = [str(choice) for choice in error.validator_value]
        meant = nearest(str(value), choices)
        remedy = f"did you mean “{meant}”?" if meant else f"one of: {', '.join(choices)}"
        return Fault("bad-value", at, f"“{name}” cannot be “{shown(str(value))}”", remedy)
    if error.validator == "pattern":
        remedy = schema.get("patternErrorMessage", "") if isinstance(schema, dict) else ""
        return Fault("bad-value", at, f"“{name}” cannot be “{shown(str(value))}”", remedy)
    if error.validator == "type":
        return Fault("bad-value", at, *_wrong_type(name, value, written, error.validator_value))
    return Fault("bad-value", at, f"“{name}” does not fit: {_rule_words(error)}")


def _bad_quantity(written: str, dimension: Dimension, name: str, at: Span) -> Fault | None:
    try:
        read_size(written) if dimension is Dimension.SIZE else read_number(written, dimension)
    except QuantityError as error:
        return Fault("bad-value", at, f"{name}: {shown(str(error))}")
    return None


_TYPE_WORDS = {
    "string": "text", "integer": "a whole number", "number": "a number", "boolean": "true or false",
    "object": "fields (`name: value`)", "array": "a list", "null": "null",
}  # fmt: skip


def _wrong_type(name: str, value: Any, written: str | None, wanted: str | list[str]) -> tuple[str, str]:
    kinds = [wanted] if isinstance(wanted, str) else wanted
    words = " or ".join(_TYPE_WORDS[kind] for kind in kinds)
    if value is None:
        return f"“{name}” is removed by null here, where there is nothing to remove", f"write {words}"
    if "string" in kinds and written is not None:
        return f"“{name}” is text, but {shown(written)} reads as a number or as true/false", f'write "{shown(written)}"'
    if kinds == ["boolean"]:
        return f"“{name}” is true or false, not “{shown(str(value))}”", "write true or false"
    return f"“{name}” must be {words}", ""


def _rule_words(error: Any) -> str:
    """Say a rarer rule without showing a whole object."""
    limit = error.validator_value
    words = {
        "minimum": f"at least {limit}", "maximum": f"at most {limit}", "minItems": f"at least {limit} entries",
        "maxItems": f"at most {limit} entries", "uniqueItems": "no entry twice", "minProperties": f"at least {limit} fields",
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
