"""The schemas are sound, helpful in an editor, and take and refuse what the format says."""

from __future__ import annotations

import json
import re
import runpy
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
from jsonschema import Draft202012Validator
from referencing import Registry, Resource

Schema = dict[str, Any]
Document = dict[str, Any]
Place = tuple[str, str]

ROOT = Path(__file__).resolve().parents[2]
SCHEMAS = {
    path.name: json.loads(path.read_text(encoding="utf-8"))
    for path in sorted((ROOT / "schemas").glob("*.json"))
    if path.name != "result.json"
}
KINDS = ["yard", "parts", "class", "option", "hull", "waivers", "limits", "changes", "sheet"]
DERIVATION = runpy.run_path(str(ROOT / "tests" / "derive_changes_schema.py"))
REGISTRY: Registry[Any] = Registry().with_resources(
    [(schema["$id"], Resource.from_contents(schema)) for schema in SCHEMAS.values()]
)
NAMED_PARTS = ("properties", "$defs")
SINGLE_PARTS = ("additionalProperties", "propertyNames", "items", "then", "else", "if")
QUANTITIES = {
    "length", "current", "voltage", "power", "capacity", "resistance", "temperature", "time", "torque", "size",
}  # fmt: skip
REFERENCES = {
    "part", "zone", "way", "device", "post", "circuit", "conductor", "state", "option", "band",
}  # fmt: skip


def subschemas(schema: Any, path: str) -> Iterator[tuple[str, Schema]]:
    """Yield every schema object with its JSON pointer."""
    if not isinstance(schema, dict):
        return
    yield path, schema
    for keyword in NAMED_PARTS:
        for name, part in schema.get(keyword, {}).items():
            yield from subschemas(part, f"{path}/{keyword}/{name}")
    for keyword in SINGLE_PARTS:
        yield from subschemas(schema.get(keyword), f"{path}/{keyword}")
    for index, part in enumerate(schema.get("allOf", [])):
        yield from subschemas(part, f"{path}/allOf/{index}")


ALL = [found for name, schema in SCHEMAS.items() for found in subschemas(schema, f"{name}#")]
OUTSIDE_CONDITIONS = [(path, schema) for path, schema in ALL if "/if" not in path]
PROPERTIES = [
    (f"{parent}/properties/{name}", part)
    for parent, schema in OUTSIDE_CONDITIONS
    if not parent.endswith("/then")  # what a condition adds refuses a key that is declared elsewhere
    for name, part in schema.get("properties", {}).items()
]


def validator(path: str) -> Draft202012Validator:
    """Return the validator of the schema at a file name and JSON pointer."""
    name, _, pointer = path.partition("#")
    return Draft202012Validator({"$ref": SCHEMAS[name]["$id"] + "#" + pointer}, registry=REGISTRY)


def faults(kind: str, document: Any) -> list[Place]:
    """Return the place and the violated keyword of every fault of a document."""
    errors = validator(f"{kind}.json#").iter_errors(document)
    return sorted(("/".join(map(str, error.absolute_path)), str(error.validator)) for error in errors)


# --- the schemas themselves


def test_there_is_a_schema_for_every_kind_of_file() -> None:
    assert sorted(SCHEMAS) == sorted([*(f"{kind}.json" for kind in KINDS), "quantity.json"])


@pytest.mark.parametrize("name", SCHEMAS)
def test_a_schema_is_valid_under_draft_2020_12_and_names_itself(name: str) -> None:
    schema = SCHEMAS[name]
    Draft202012Validator.check_schema(schema)
    assert schema["$schema"] == "https://json-schema.org/draft/2020-12/schema"
    assert schema["$id"] == f"https://fairloom.invalid/schemas/{name}"


@pytest.mark.parametrize("name", SCHEMAS)
def test_a_schema_file_is_formatted_as_the_derivation_writes_it(name: str) -> None:
    assert (ROOT / "schemas" / name).read_text(encoding="utf-8") == DERIVATION["text"](SCHEMAS[name])


def test_every_reference_is_relative_and_leads_somewhere() -> None:
    resolver = {name: REGISTRY.resolver(schema["$id"]) for name, schema in SCHEMAS.items()}
    for path, schema in ALL:
        if "$ref" in schema:
            assert "://" not in schema["$ref"], path
            assert resolver[path.partition("#")[0]].lookup(schema["$ref"]).contents, path


def test_every_definition_is_used_or_is_a_shared_quantity() -> None:
    used = {schema["$ref"].split("/")[-1] for _, schema in ALL if "$ref" in schema}
    unused = {
        name
        for file, schema in SCHEMAS.items()
        if file != "quantity.json"
        for name in schema.get("$defs", {})
        if name not in used
    }
    assert unused == set()


def test_every_property_has_a_title_a_description_and_examples_of_its_own() -> None:
    lacking = [
        (path, key)
        for path, schema in PROPERTIES
        for key in ("title", "description", "examples")
        if not schema.get(key)
    ]
    assert lacking == []


def test_every_definition_has_a_title_and_a_description() -> None:
    definitions = [found for found in ALL if re.search(r"/\$defs/[a-z_]+$", found[0])]
    assert definitions
    assert [path for path, schema in definitions if not (schema["title"] and schema["description"])] == []


def test_every_description_ends_as_a_sentence() -> None:
    assert [path for path, schema in ALL if not schema.get("description", ".").endswith(".")] == []


@pytest.mark.parametrize("name", SCHEMAS)
def test_every_example_is_valid_where_it_stands(name: str) -> None:
    for path, schema in OUTSIDE_CONDITIONS:
        if path.startswith(name):
            for example in schema.get("examples", []):
                errors = [error.message for error in validator(path).iter_errors(example)]
                assert errors == [], f"{path}: {example}"


def test_every_choice_of_an_enum_is_described() -> None:
    enums = [(path, schema) for path, schema in ALL if "enum" in schema]
    assert enums
    for path, schema in enums:
        assert len(schema["enumDescriptions"]) == len(schema["enum"]), path
        assert all(schema["enumDescriptions"]), path


def test_every_pattern_tells_what_to_write() -> None:
    patterned = [found for found in ALL if "pattern" in found[1]]
    assert patterned
    assert [path for path, schema in patterned if not schema.get("patternErrorMessage")] == []


def test_every_pattern_keeps_to_what_all_regular_expression_engines_share() -> None:
    for path, schema in ALL:
        if "pattern" in schema:
            pattern = schema["pattern"]
            assert pattern[0] + pattern[-1] == "^$", path
            assert not re.search(r"\\[^.trn]|\(\?|[*+?}][+?]", pattern), path


def test_every_quantity_tells_what_it_measures_and_in_which_units() -> None:
    quantities = [schema for _, schema in ALL if "x-quantity" in schema]
    assert {schema["x-quantity"] for schema in quantities} == QUANTITIES
    for schema in quantities:
        assert "string" in schema["type"]
        for unit in schema["x-unit"].split(", "):
            assert re.search(rf"\b{unit}\b", schema["pattern"]), unit


def test_every_reference_annotation_names_a_known_kind_of_thing() -> None:
    annotations = [schema["x-ref"] for _, schema in ALL if "x-ref" in schema]
    named = {kind for note in annotations for kind in ([note] if isinstance(note, str) else note)}
    assert named
    assert named <= REFERENCES


def test_nothing_but_words_for_readers_stands_beside_a_reference() -> None:
    # An editor then shows the words of the use; with anything else there, those of the definition.
    words = {"title", "description", "examples", "$ref"}
    assert [path for path, schema in ALL if "$ref" in schema and set(schema) - words] == []


def test_every_object_with_properties_is_closed() -> None:
    open_objects = [
        path
        for path, schema in OUTSIDE_CONDITIONS
        if "properties" in schema and schema.get("additionalProperties") is not False
        if not path.endswith("/then")
    ]
    # A part is closed by the definition of its kind, to which its discriminator leads.
    assert open_objects == ["parts.json#/$defs/part"]


def test_no_schema_offers_unnamed_alternatives() -> None:
    assert [path for path, schema in ALL if {"oneOf", "anyOf", "not"} & set(schema)] == []


def test_every_kind_of_part_leads_to_its_own_definition() -> None:
    definitions = SCHEMAS["parts.json"]["$defs"]
    kinds = definitions["part"]["properties"]["kind"]["enum"]
    led_to = [
        (rule["if"]["properties"]["kind"]["const"], rule["then"]["$ref"]) for rule in definitions["part"]["allOf"]
    ]
    assert led_to == [(kind, f"#/$defs/{kind}") for kind in kinds]
    assert [definitions[kind]["properties"]["kind"]["const"] for kind in kinds] == kinds


def filled_in(body: Any) -> Any:
    """Return a snippet as it reads when its placeholders keep their text."""
    return json.loads(re.sub(r"\$\{[0-9]+:([^}]*)\}", r"\1", json.dumps(body)))


@pytest.mark.parametrize("label", ["new branch circuit", "new hull", "new waiver"])
def test_a_snippet_is_valid_as_it_is_inserted(label: str) -> None:
    snippets = [
        (path, snippet)
        for path, schema in ALL
        for snippet in schema.get("defaultSnippets", [])
        if snippet["label"] == label
    ]
    assert snippets
    for path, snippet in snippets:
        assert [error.message for error in validator(path).iter_errors(filled_in(snippet["body"]))] == []


# --- patterns

SPELLINGS = {
    "length": (
        ["4.2 m", "350mm", "7 in", "13 ft 6 in", "13.5 ft"],
        ["4.2", "4,2 m", "4 m 6 in", "-1 m", "m"],
    ),
    "full_or_length": (["full", "0.9 m"], ["Full", "none", "0.9"]),
    "current": (["7.5 A", "20 mA", "10 kA", "0 A"], ["7.5", "7.5 a", ".5 A", "1e3 A", "5 A "]),
    "voltage": (["12 V", "50 mV"], ["12", "12 volts", "12 kV"]),
    "power": (["60 W", "2 kW"], ["60", "60 VA"]),
    "capacity": (["220 Ah"], ["220", "220 ah", "220 A"]),
    "resistance": (["0.1 mohm", "2 ohm"], ["0.1", "2 R", "0.1 mOhm"]),
    "temperature": (["105 C", "-20 C"], ["105", "105 F", "--5 C"]),
    "time": (["10 s", "0.0000604 s"], ["10", "1 min", "never"]),
    "time_or_never": (["360 s", "never"], ["Never", "360"]),
    "torque": (["12 Nm", "9 ft-lb", "80 in-lb"], ["12", "12 N", "12 nm"]),
    "thread": (["M8", "#10", "5/16 in"], ["8", "m8", "M8 x 1", "5/16"]),
    "ingress": (["IP67", "IPX4", "IP69K"], ["67", "IP7", "ip67"]),
    "size": (
        ["6 AWG", "2/0 AWG", "0000 AWG", "16 mm2"],
        ["6", "00", "5/0 AWG", "010 AWG", "00000 AWG", "16"],
    ),
    **dict.fromkeys(
        ["id", "part_id", "band_id", "zone_id", "way_id", "option_id", "state_id"],
        (["BUS-N", "24H-1", "a", "A" * 40], ["", "-a", "a.b", "a b", "A" * 41, "é"]),
    ),
    **dict.fromkeys(["device_id", "circuit_or_device"], (["SW-H", "P22.switch"], ["P22.", ".switch", "P22.load.pos"])),
    **dict.fromkeys(
        ["post", "device_or_post"],
        (["BUS-N", "BAT-S.pos", "P22.load.pos"], ["a.b.c.d", "BAT-S pos", "BAT-S..pos"]),
    ),
    "line": (["Bilge pump, main"], ["", " ", " x", "one\ntwo"]),
}


def test_every_shared_pattern_is_tried() -> None:
    patterned = [name for name, schema in SCHEMAS["quantity.json"]["$defs"].items() if "pattern" in schema]
    assert list(SPELLINGS) == patterned


@pytest.mark.parametrize("name", SPELLINGS)
def test_a_spelling_is_taken_or_refused(name: str) -> None:
    taken, refused = SPELLINGS[name]
    check = validator(f"quantity.json#/$defs/{name}")
    assert [spelling for spelling in taken if not check.is_valid(spelling)] == []
    assert [spelling for spelling in refused if check.is_valid(spelling)] == []


@pytest.mark.parametrize("name", SPELLINGS)
def test_the_engine_of_editors_reads_the_patterns_alike(name: str) -> None:
    regress = pytest.importorskip("regress")
    pattern = regress.Regex(SCHEMAS["quantity.json"]["$defs"][name]["pattern"], "u")
    taken, refused = SPELLINGS[name]
    assert [spelling for spelling in taken if pattern.find(spelling) is None] == []
    assert [spelling for spelling in refused if pattern.find(spelling) is not None] == []


def test_a_bare_number_is_no_quantity() -> None:
    assert not validator("quantity.json#/$defs/length").is_valid(4.2)


# --- documents of each kind

YARD: Document = {"name": "Brackenholm Yard", "limit_sets": ["voluntary-dc"]}
FUSE: Document = {"kind": "fuse", "rating": "40 A", "voltage": "32 V"}
BRANCH: Document = {
    "name": "Cabin lights",
    "service": "lighting",
    "feed": "PNL-01",
    "protect": "10 A",
    "cable": "14 AWG",
    "load": "LAMP-LED",
    "zone": "Z-SAL",
}
CONDUCTOR: Document = {"from": "BAT-S.pos", "to": "SW-S.in", "size": "2/0 AWG"}
TRUNK: Document = {
    "name": "Start feeder",
    "service": "cranking",
    "current": "240 A",
    "conductors": {"W030": CONDUCTOR},
}
OPTION: Document = {"option": "OPT-24V", "name": "Bow bank, 24 V", "changes": {}}
HULL: Document = {"hull": "TND-031", "class": "tindral-36", "revision": 4, "status": "planned", "options": []}
WAIVER: Document = {
    "check": "ampacity",
    "hull": "TND-035",
    "part": "P22.out",
    "fingerprint": "f1-00ff",
    "reason": "Cable on order.",
    "approved_by": "electrical lead",
    "expires": "2031-03-31",
}


def without(document: Document, key: str) -> Document:
    """Return a document without one key."""
    return {name: value for name, value in document.items() if name != key}


@pytest.mark.parametrize(
    ("kind", "document"),
    [
        ("yard", YARD),
        ("yard", {**YARD, "house": {"drop_critical": ["bilge-pump"], "metric_sizes": "not-assessed"}}),
        ("parts", {"parts": {"F40": FUSE}}),
        ("parts", {"bands": {"slow": {"points": [{"multiple": 2, "earliest": "1 s", "latest": "never"}]}}}),
        ("class", {"circuits": {"P01": BRANCH, "M05": TRUNK}}),
        (
            "class",
            {"bonds": "not recorded", "shields": {"S1": {"joins": "not recorded"}, "S2": {"joins": []}}},
        ),
        ("class", {"facts": {"engines": {"main": {"block": "not recorded"}}}}),
        ("option", OPTION),
        ("hull", HULL),
        (
            "hull",
            {**HULL, "changes": {"D1": {"what": "longer", "set": {"circuits": {"P01": {"length": "9 m"}}}}}},
        ),
        ("waivers", {"waivers": {"WV-1": WAIVER}}),
        ("waivers", {"waivers": {"WV-1": {**without(WAIVER, "hull"), "class": "tindral-36"}}}),
        ("changes", {}),
        ("changes", {"circuits": {"P01": {"cable": "8 AWG"}, "M05": {"current": "250 A"}}}),
    ],
)
def test_a_plain_document_is_sound(kind: str, document: Document) -> None:
    assert faults(kind, document) == []


@pytest.mark.parametrize("kind", KINDS)
def test_an_unknown_key_is_found_at_the_top(kind: str) -> None:
    assert ("", "additionalProperties") in faults(kind, {"wirring": {}})


@pytest.mark.parametrize(
    ("kind", "document", "expected"),
    [
        ("yard", without(YARD, "name"), ("", "required")),
        ("yard", {**YARD, "limit_sets": ["unheard-of"]}, ("limit_sets/0", "enum")),
        ("yard", {**YARD, "house": {"drop_critical": ["disco"]}}, ("house/drop_critical/0", "enum")),
        ("parts", {"parts": {"a.b": FUSE}}, ("parts", "pattern")),
        ("parts", {"parts": {"F": without(FUSE, "kind")}}, ("parts/F", "required")),
        ("parts", {"parts": {"F": {**FUSE, "kind": "fuze"}}}, ("parts/F/kind", "enum")),
        ("parts", {"parts": {"F": "40 A"}}, ("parts/F", "type")),
        ("parts", {"parts": {"F": {**FUSE, "reset": "manual"}}}, ("parts/F", "additionalProperties")),
        ("parts", {"parts": {"F": without(FUSE, "rating")}}, ("parts/F", "required")),
        ("parts", {"parts": {"F": {**FUSE, "rating": 40}}}, ("parts/F/rating", "type")),
        (
            "parts",
            {"parts": {"F": {**without(FUSE, "rating"), "ratings": {"5": {}}}}},
            ("parts/F/ratings", "pattern"),
        ),
        ("class", {"circuits": {"P01": without(BRANCH, "load")}}, ("circuits/P01", "required")),
        ("class", {"circuits": {"P01": None}}, ("circuits/P01", "type")),
        (
            "class",
            {"circuits": {"M05": {**TRUNK, "feed": "PNL-01"}}},
            ("circuits/M05", "additionalProperties"),
        ),
        (
            "class",
            {"circuits": {"P01": {**BRANCH, "voltage": "24 V"}}},
            ("circuits/P01", "additionalProperties"),
        ),
        ("class", {"conductors": {"W1": without(CONDUCTOR, "size")}}, ("conductors/W1", "required")),
        ("class", {"conductors": {"W1": {**CONDUCTOR, "size": "00"}}}, ("conductors/W1/size", "pattern")),
        ("class", {"bonds": "unknown"}, ("bonds", "pattern")),
        ("class", {"shields": {"S1": {"joins": "nothing"}}}, ("shields/S1/joins", "pattern")),
        ("class", {"facts": {"ac_aboard": "yes"}}, ("facts/ac_aboard", "type")),
        ("option", without(OPTION, "changes"), ("", "required")),
        ("option", {**OPTION, "changes": None}, ("changes", "type")),
        ("hull", {**HULL, "revision": "4"}, ("revision", "type")),
        ("hull", {**HULL, "status": "sold"}, ("status", "enum")),
        ("hull", {**HULL, "changes": {"D1": {"what": "x"}}}, ("changes/D1", "required")),
        (
            "waivers",
            {"waivers": {"W": {**WAIVER, "expires": "31.03.2031"}}},
            ("waivers/W/expires", "pattern"),
        ),
        ("waivers", {"waivers": {"W": {**WAIVER, "reason": "  "}}}, ("waivers/W/reason", "pattern")),
        ("waivers", {"waivers": {"W": {**WAIVER, "check": "*"}}}, ("waivers/W/check", "pattern")),
        ("waivers", {"waivers": {"W": without(WAIVER, "hull")}}, ("waivers/W", "required")),
        ("changes", {"circuits": {"P01": {"cabel": "8 AWG"}}}, ("circuits/P01", "additionalProperties")),
        ("changes", {"circuits": {"P01": {"cable": "8"}}}, ("circuits/P01/cable", "pattern")),
        ("changes", {"circuits": {"P01": {"route": [None]}}}, ("circuits/P01/route/0", "type")),
        ("changes", {"zones": {"Z 1": None}}, ("zones", "pattern")),
    ],
)
def test_a_fault_is_found_once_at_its_place(kind: str, document: Document, expected: Place) -> None:
    assert faults(kind, document) == [expected]


@pytest.mark.parametrize("more", [{"kind": "fuse"}, {"kind": "breaker", "trip_free": True, "reset": "manual"}])
def test_a_rating_beside_ratings_is_refused_at_the_rating(more: Document) -> None:
    part = {**FUSE, **more, "ratings": {"5 A": {}}}
    assert faults("parts", {"parts": {"F": part}}) == [("parts/F/rating", "pattern")]


def test_a_waiver_for_a_hull_and_a_class_is_refused_at_the_hull() -> None:
    both = {**WAIVER, "class": "tindral-36"}
    assert faults("waivers", {"waivers": {"W": both}}) == [("waivers/W/hull", "pattern")]


# --- the derived schema


def test_the_schema_of_changes_is_derived_from_that_of_the_class() -> None:
    assert SCHEMAS["changes.json"] == DERIVATION["derived"](SCHEMAS["class.json"])


def test_a_patch_may_remove_anything_that_has_a_key() -> None:
    patch: Document = dict.fromkeys(SCHEMAS["class.json"]["properties"])
    assert faults("changes", patch) == []
    assert faults("changes", {"circuits": {"M14": None, "M05": {"conductors": {"W030": None}}}}) == []
    assert faults("changes", {"conductors": {"W1": {"route": None, "size": None, "role": None}}}) == []
    assert faults("changes", {"devices": {"F-H": {"mount": {"line": None}, "positions": {"last": None}}}}) == []


def test_a_patch_may_be_every_document_that_is_a_class() -> None:
    for section in SCHEMAS["class.json"]["properties"]:
        for example in SCHEMAS["class.json"]["properties"][section]["examples"]:
            assert faults("changes", {section: example}) == []


def test_a_list_in_a_patch_keeps_the_definition_of_the_class() -> None:
    schema = {
        "$schema": "s",
        "$id": "class.json",
        "$defs": {"leg": {"title": "Leg", "type": "object", "required": ["a"], "properties": {}}},
        "properties": {"legs": {"type": "array", "items": {"$ref": "#/$defs/leg"}}},
    }
    assert DERIVATION["derived"](schema)["properties"]["legs"] == {
        "type": ["array", "null"],
        "items": {"$ref": "class.json#/$defs/leg"},
    }


def test_two_forms_that_disagree_about_a_key_cannot_be_derived() -> None:
    schema = json.loads(json.dumps(SCHEMAS["class.json"]))
    schema["$defs"]["trunk"]["properties"]["name"] = {"type": "integer"}
    with pytest.raises(DERIVATION["DerivationError"], match="disagree about name"):
        DERIVATION["derived"](schema)
