"""A merge patch does what RFC 7396 says, and every value keeps the place where it was typed."""

from __future__ import annotations

import copy
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from checker.boat.patch import Patched, apply_patch, merge_patch, places_under, without_effect
from checker.finding import NOWHERE, Span
from checker.reading.document import Document, compose


def read(text: str, file: str) -> Document:
    document = compose(text.encode("utf-8"), file)
    assert document.faults == []
    return document


def patched(*texts: str) -> Patched:
    """Apply patches on a first text; the files are called 0.yaml, 1.yaml and so on."""
    first, *patches = [read(text, f"{number}.yaml") for number, text in enumerate(texts)]
    result = Patched(first.data, (first.places,))
    for patch in patches:
        result = apply_patch(result, patch.data, patch.places)
    return result


# RFC 7396, appendix A: all fifteen cases, in its order.
APPENDIX_A: list[tuple[Any, Any, Any]] = [
    ({"a": "b"}, {"a": "c"}, {"a": "c"}),
    ({"a": "b"}, {"b": "c"}, {"a": "b", "b": "c"}),
    ({"a": "b"}, {"a": None}, {}),
    ({"a": "b", "b": "c"}, {"a": None}, {"b": "c"}),
    ({"a": ["b"]}, {"a": "c"}, {"a": "c"}),
    ({"a": "c"}, {"a": ["b"]}, {"a": ["b"]}),
    ({"a": {"b": "c"}}, {"a": {"b": "d", "c": None}}, {"a": {"b": "d"}}),
    ({"a": [{"b": "c"}]}, {"a": [1]}, {"a": [1]}),
    (["a", "b"], ["c", "d"], ["c", "d"]),
    ({"a": "b"}, ["c"], ["c"]),
    ({"a": "foo"}, None, None),
    ({"a": "foo"}, "bar", "bar"),
    ({"e": None}, {"a": 1}, {"e": None, "a": 1}),
    ([1, 2], {"a": "b", "c": None}, {"a": "b"}),
    ({}, {"a": {"bb": {"ccc": None}}}, {"a": {"bb": {}}}),
]


@pytest.mark.parametrize(("target", "patch", "expected"), APPENDIX_A)
def test_a_case_of_rfc_7396_appendix_a(target: Any, patch: Any, expected: Any) -> None:
    assert merge_patch(target, patch) == expected


def test_the_example_of_rfc_7396_section_3() -> None:
    target = {
        "title": "Goodbye!",
        "author": {"givenName": "John", "familyName": "Doe"},
        "tags": ["example", "sample"],
        "content": "This will be unchanged",
    }
    patch = {"title": "Hello!", "phoneNumber": "+01-123-456-7890", "author": {"familyName": None}, "tags": ["example"]}
    assert merge_patch(target, patch) == {
        "title": "Hello!",
        "author": {"givenName": "John"},
        "tags": ["example"],
        "content": "This will be unchanged",
        "phoneNumber": "+01-123-456-7890",
    }


VALUES = st.recursive(
    st.none() | st.booleans() | st.integers(-3, 3) | st.sampled_from(["", "x", "6 AWG"]),
    lambda inner: st.lists(inner, max_size=2) | st.dictionaries(st.sampled_from("abc"), inner, max_size=3),
    max_leaves=8,
)


def without_nulls(value: Any) -> Any:
    return {k: without_nulls(v) for k, v in value.items() if v is not None} if isinstance(value, dict) else value


@given(VALUES, VALUES)
def test_a_patch_changes_neither_target_nor_patch_and_holds_when_applied_twice(target: Any, patch: Any) -> None:
    before = copy.deepcopy((target, patch))
    once = merge_patch(target, patch)
    assert (target, patch) == before
    assert merge_patch(once, patch) == once


@given(VALUES)
def test_a_patch_on_nothing_leaves_its_own_values_without_the_nulls(patch: Any) -> None:
    assert merge_patch(None, patch) == without_nulls(patch)


# --- places


def test_a_value_that_a_patch_replaces_stands_in_the_patch() -> None:
    result = patched("a:\n  b: 1\n  c: 2\n", "a:\n  c: 3\n")
    assert result.data == {"a": {"b": 1, "c": 3}}
    assert result.span(("a", "b")) == Span("0.yaml", 2, 6)
    assert result.span(("a", "c")) == Span("1.yaml", 2, 6)
    assert result.key_span(("a", "c")) == Span("1.yaml", 2, 3)


def test_the_youngest_of_several_patches_gives_the_place() -> None:
    result = patched("a: {b: 1, c: 1, d: 1}\n", "a: {b: 2, c: 2}\n", "\na: {b: 3}\n")
    assert result.data == {"a": {"b": 3, "c": 2, "d": 1}}
    assert [result.span(("a", name)).file for name in "bcd"] == ["2.yaml", "1.yaml", "0.yaml"]


def test_what_a_patch_adds_stands_in_the_patch_with_all_that_is_in_it() -> None:
    result = patched("a: {b: 1}\n", "a:\n  new:\n    list: [x, y]\n")
    assert result.span(("a", "new", "list", 1)) == Span("1.yaml", 3, 15)
    assert result.key_span(("a", "new")) == Span("1.yaml", 2, 3)


def test_what_is_not_written_stands_at_its_nearest_written_parent() -> None:
    result = patched("a:\n  b: 1\n", "a: {c: 2}\n")
    assert result.span(("a", "b", "deeper", 4)) == Span("0.yaml", 2, 6)
    assert result.key_span(("a", "b", "deeper")) == Span("0.yaml", 2, 3)
    assert Patched({}, ({},)).span(("a",)) == NOWHERE


def test_what_was_removed_and_written_anew_stands_where_it_was_written_last() -> None:
    result = patched("a: {b: {c: 1, d: 1}}\n", "a: {b: null}\n", "a: {b: {c: 2}}\n")
    assert result.data == {"a": {"b": {"c": 2}}}
    assert result.span(("a", "b", "c")).file == "2.yaml"


def test_the_places_of_a_patch_are_counted_from_its_own_top() -> None:
    document = read("option: X\nchanges:\n  a: {b: 1}\n", "f.yaml")
    assert places_under(document.places, ("changes",)) == {
        (): (Span("f.yaml", 2, 1), Span("f.yaml", 3, 3)),
        ("a",): (Span("f.yaml", 3, 3), Span("f.yaml", 3, 6)),
        ("a", "b"): (Span("f.yaml", 3, 7), Span("f.yaml", 3, 10)),
    }


# --- patches that change nothing


@pytest.mark.parametrize(
    ("target", "patch", "idle"),
    [
        ({"a": 1}, {"a": 2}, []),
        ({"a": 1}, {"a": 1}, [("a",)]),
        ({"a": "1"}, {"a": 1}, []),
        ({"a": 1}, {"a": True}, []),
        ({"a": 1}, {"b": 1}, []),
        ({"a": 1}, {"a": None}, []),
        ({"a": 1}, {"b": None}, [("b",)]),
        ({"a": {"b": 1, "c": 2}}, {"a": {"b": 1, "c": 3}}, [("a", "b")]),
        ({"a": {"b": 1}}, {"a": {"c": None}}, [("a", "c")]),
        ({"a": {"b": 1}}, {"a": {}}, [("a",)]),
        ({"a": 1}, {"a": {}}, []),
        ({"a": {"b": 1}}, {"a": 1}, []),
        ({"a": [1, 2]}, {"a": [1, 2]}, [("a",)]),
        ({"a": [1, 2]}, {"a": [2, 1]}, []),
        ({"a": {"b": 1}}, {"a": {"b": {"c": 1}}}, []),
        ({}, {}, []),
        ({"a": 1}, {}, []),
    ],
)
def test_the_lines_of_a_patch_that_change_nothing_are_named(
    target: Any, patch: Any, idle: list[tuple[str, ...]]
) -> None:
    assert list(without_effect(target, patch)) == idle


@given(VALUES, VALUES)
def test_a_patch_whose_every_line_is_named_changes_nothing(target: Any, patch: Any) -> None:
    target = without_nulls(target)  # a class holds none
    idle = set(without_effect(target, patch))

    def leaves(value: Any, path: tuple[str, ...] = ()) -> set[tuple[str, ...]]:
        if isinstance(value, dict) and value and path not in idle:
            return {leaf for key in value for leaf in leaves(value[key], (*path, key))}
        return {path}

    if isinstance(target, dict) and isinstance(patch, dict) and patch and leaves(patch) <= idle:
        assert merge_patch(target, patch) == target
