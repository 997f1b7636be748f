"""Lists that are kept by hand agree with what they list: checks, the fault catalogue, limit sets, services."""

from __future__ import annotations

import ast
import importlib
import json
import pkgutil
import re
from collections import Counter
from collections.abc import Iterator
from functools import cache
from pathlib import Path
from typing import Any

import pytest

import checker.checks
from checker.checks.catalogue import CHECKS
from checker.checks.check import Check
from checker.limits.limit_set import limit_set_ids, load_limit_set
from checker.pipeline import all_cards

ROOT = Path(__file__).resolve().parents[1]
SCHEMAS = ROOT / "schemas"

SEEDED = {
    "CON": (1, 2, 3, 4, 5, 6, 7, 8, 10, 13, 14, 15, 16),
    "PRO": (1, 2, 3, 4, 5, 6, 7, 10, 11, 16, 17, 18, 20, 21, 22, 23, 25, 26),
    "SRC": (1, 2, 5, 6, 7, 8, 9, 13),
    "BNK": (2, 3, 13, 15, 16),
    "LOD": (1, 2),
    "RET": (1, 7),
    "SHU": (1, 2, 3, 4, 5, 6, 7, 8, 11, 12),
    "ZON": (1,),
    "FLT": (2, 4, 5, 6, 7),
}
FAULTS = [f"{group}-{number:02d}" for group, numbers in SEEDED.items() for number in numbers]
"""Faults of the catalogue that are seeded, found exactly, and have a sound twin that stays silent."""

SOUND_ARRANGEMENTS = [f"T-{n:02d}" for n in (1, 2, 4, 5, 6, 7, 8, 12, 13, 15, 16, 17, 20, 28, 30, 32, 34, 35, 36)]
"""What looks like a fault and is none; no check claims these, and a test holds each silent."""

_CATALOGUE_ID = re.compile(r"\b(?:CON|PRO|SRC|BNK|SHU|RET|TRM|PAN|ZON|LOD|LBL|FLT|COM|T)-[0-9]{2}\b")


def checks_in_modules() -> dict[str, list[Check]]:
    """Return every check of every module of checker/checks, by the module that defines it."""
    found: dict[str, list[Check]] = {}
    for module in pkgutil.iter_modules(checker.checks.__path__, "checker.checks."):
        loaded = importlib.import_module(module.name)
        mine = [one for one in vars(loaded).values() if isinstance(one, Check)]
        found[module.name] = [one for one in mine if one.run.__module__ == module.name]
    return found


@cache
def named_in_tests() -> dict[str, list[str]]:
    """Return the names of the tests whose docstring begins with a catalogue id."""
    found: dict[str, list[str]] = {}
    for path in sorted((ROOT / "tests").rglob("test_*.py")):
        for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
            if isinstance(node, ast.FunctionDef) and node.name.startswith("test_"):
                head = re.split(r"[:.](?:\s|$)", ast.get_docstring(node) or "", maxsplit=1)[0]
                for name in _CATALOGUE_ID.findall(head):
                    found.setdefault(name, []).append(node.name)
    return found


def test_every_check_of_the_modules_is_listed_once() -> None:
    in_modules = [check.id for checks in checks_in_modules().values() for check in checks]
    assert Counter(check.id for check in CHECKS) == Counter(in_modules)
    assert max(Counter(in_modules).values()) == 1


def test_every_check_is_named_after_its_function() -> None:
    for module, checks in checks_in_modules().items():
        loaded = importlib.import_module(module)
        for check in checks:
            name = check.run.__name__
            assert check.id == name.replace("_", "-")
            assert getattr(loaded, name) is check


def test_no_two_cards_share_an_id() -> None:
    assert max(Counter(card.id for card in all_cards()).values()) == 1


def test_every_card_says_what_it_is_and_why_it_matters() -> None:
    for card in all_cards():
        assert all((card.title, card.text, card.why, card.citation)), card.id
        assert not card.title.endswith("."), card.id


def test_every_catalogue_id_that_a_card_names_is_spelled_as_in_the_catalogue() -> None:
    for card in all_cards():
        for name in card.catalogue:
            assert _CATALOGUE_ID.fullmatch(name), (card.id, name)


@pytest.mark.parametrize("fault", FAULTS)
def test_every_seeded_fault_is_claimed_by_a_card(fault: str) -> None:
    assert [card.id for card in all_cards() if fault in card.catalogue]


@pytest.mark.parametrize("fault", FAULTS)
def test_every_seeded_fault_has_a_test_that_finds_it_and_one_that_stays_silent(fault: str) -> None:
    assert len(named_in_tests().get(fault, [])) >= 2


@pytest.mark.parametrize("trap", SOUND_ARRANGEMENTS)
def test_every_sound_arrangement_has_a_test(trap: str) -> None:
    assert named_in_tests().get(trap)


def test_no_card_claims_a_sound_arrangement() -> None:
    assert [name for card in all_cards() for name in card.catalogue if name.startswith("T-")] == []


def schema(name: str) -> dict[str, Any]:
    """Return a schema."""
    loaded: dict[str, Any] = json.loads((SCHEMAS / name).read_text(encoding="utf-8"))
    return loaded


def fields_called(name: str, part: Any) -> Iterator[dict[str, Any]]:
    """Yield the schema of every field of a name in a part of a schema."""
    if isinstance(part, list):
        for item in part:
            yield from fields_called(name, item)
    elif isinstance(part, dict):
        found = part.get("properties", {}).get(name)
        if isinstance(found, dict) and "enum" in found:
            yield found
        for item in part.values():
            yield from fields_called(name, item)


def test_limit_sets_of_the_schema_are_those_that_are_shipped() -> None:
    yard = schema("yard.json")
    assert yard["properties"]["limit_sets"]["items"] == {"$ref": "#/$defs/limit_set"}
    assert sorted(yard["$defs"]["limit_set"]["enum"]) == sorted(limit_set_ids())


def test_roles_that_a_table_may_exempt_are_those_of_conductors() -> None:
    """Else a yard could enter an exemption that frees nothing."""
    enums = [field["enum"] for field in fields_called("role", schema("class.json"))]
    assert [schema("limits.json")["$defs"]["role"]["enum"]] * len(enums) == enums


def test_services_that_a_yard_may_call_critical_are_those_of_circuits() -> None:
    house = schema("yard.json")["properties"]["house"]["properties"]
    assert house["drop_critical"]["items"] == {"$ref": "class.json#/$defs/service"}


@pytest.mark.parametrize("limit_set", limit_set_ids())
def test_schema_has_every_critical_service_of_a_limit_set(limit_set: str) -> None:
    drop = load_limit_set(limit_set).drop
    critical = set(drop.critical_services) if drop else set()
    assert critical <= set(schema("class.json")["$defs"]["service"]["enum"])


@pytest.mark.parametrize("limit_set", [name for name in limit_set_ids() if not load_limit_set(name).not_entered])
def test_schema_has_every_role_that_a_limit_set_exempts(limit_set: str) -> None:
    rule = load_limit_set(limit_set).exemptions
    fields = list(fields_called("role", schema("class.json")))
    assert len(fields) == 2  # of a conductor, and of a branch circuit
    roles = set(fields[0]["enum"]).intersection(*(field["enum"] for field in fields))
    exempt = (
        rule.roles,
        rule.ampacity_exempt_roles,
        rule.material_exempt_roles,
        rule.protection_exempt_roles,
    )
    assert {role for some in exempt for role in some} <= roles


def test_test_files_have_names_of_their_own() -> None:
    """Without packages two files of one name cannot be collected together."""
    names = Counter(path.name for path in (ROOT / "tests").rglob("*.py"))
    assert [name for name, count in names.items() if count > 1] == []
