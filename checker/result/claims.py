"""Say which facts of a boat make checks say less, and which way.

A role frees a conductor, a zone without vapour asks for no protected part, a condition that is
not judged has no drop. None of these is wrong by itself; a reviewer should see each that comes.
What mends a finding at its own place (a cover, a mark, a size) is no such fact.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from enum import Enum

from checker.boat.aboard import TRUE_UNLESS_WRITTEN, Fact, Facts
from checker.result.compare_aboard import AboardChanges, Thing
from checker.result.comparison import FactChange


class Says(Enum):
    """Say when a fact makes checks say less."""

    IF_WRITTEN = "it is written, or written otherwise"
    IF_TRUE = "it becomes true"
    IF_FALSE = "it becomes false"
    IF_LOWER = "it becomes lower, or is taken away"
    IF_HIGHER = "it becomes higher, or is taken away"
    IF_FEWER = "it names fewer"
    IF_MORE = "it names more"
    IF_MILDER = "it becomes what less is asked of"
    IF_ASSERTED = "it is written where nothing was, or asserts more"


_WRITTEN, _TRUE, _FALSE, _LOWER = Says.IF_WRITTEN, Says.IF_TRUE, Says.IF_FALSE, Says.IF_LOWER

SAYS_LESS: Mapping[str, Mapping[str, Says]] = {
    "conductor": {
        "role": _WRITTEN, "place_reason": _WRITTEN, "colour_marked": _TRUE, "passage": Says.IF_ASSERTED,
    },
    "circuit": {
        "always_on": _WRITTEN, "shares": _WRITTEN, "return_reason": _WRITTEN, "service": _WRITTEN,
    },
    "zone": {
        "engine_space": _FALSE, "petrol_vapour": _FALSE, "cooking_gas": _FALSE, "wet": _FALSE, "bilge_water": _FALSE,
        "fuel_parts": _FALSE, "hydrogen_vent": _TRUE, "ambient_c": _LOWER, "charge_limit_a": Says.IF_HIGHER,
        "opens_to": Says.IF_FEWER, "isolated_from": Says.IF_MORE,
    },
    "way": {"bundled": _FALSE, "passage": Says.IF_ASSERTED, "ac": Says.IF_ASSERTED},
    "device": {
        "above_bilge_water": _TRUE, "fuel_shielded": _TRUE, "in_line_with_fuel": _FALSE, "engine_mounted": _TRUE,
    },
    "part": {
        "ignition_protected": _TRUE, "case_isolated": _TRUE, "own_switch": _TRUE, "internal_fuse": _TRUE,
        "trip_free": _TRUE, "resets_itself": _FALSE, "polarised": _FALSE, "splice": _TRUE,
        "motor": _FALSE, "regulator": _FALSE, "stall_protection": _WRITTEN, "by_hand": _FALSE,
        "max_device_a": Says.IF_HIGHER, "min_voltage_v": _LOWER, "on_disconnect": Says.IF_ASSERTED,
        "insulation_c": Says.IF_HIGHER, "ingress": _WRITTEN,
    },
    "condition": {"judges_drop": _FALSE, "short_time_s": _WRITTEN},
    "state": {"kind": Says.IF_MILDER},
    "engine": {"fuel": Says.IF_MILDER, "mounting": Says.IF_MILDER},
    "boat": {
        "generator_fuel": Says.IF_MILDER, "ac": _FALSE, "monitored": Says.IF_FEWER,
        **{f"workmanship_{key}": Says.IF_ASSERTED for key in (
            "terminal", "ring_as_stud", "barrel_as_conductor", "largest_first", "labels", "passages", "fuse_marks",
            "switch_marks", "ac",
        )},
    },
}  # fmt: skip
"""By kind of thing and fact, when it makes the checks say less."""

NAMED_WHEN_NEW = ("role", "place_reason", "always_on", "shares", "return_reason")
"""Claims of a thing that is new aboard: they are told as well."""
REASONS = {"role": "role_reason"}


WIDE = ("zone", "boat", "engine", "state", "condition")
"""Things whose facts decide what is asked of other things."""


@dataclass(frozen=True, slots=True)
class Claim:
    """Tell a claim: where, which fact, and the yard's reason."""

    where: Thing
    fact: FactChange
    reason: str

    @property
    def is_wide(self) -> bool:
        """Tell whether it says less of other things than its own."""
        return self.where.kind in WIDE


def claims(changes: AboardChanges) -> Iterator[Claim]:
    """Yield what makes the checks say less of one boat than before."""
    for thing, facts in changes.changed.items():
        told = {fact.key: fact for fact in facts}
        for key, says in SAYS_LESS.get(thing.kind, {}).items():
            if key in told and says_less(says, told[key]):
                reason = told.get(REASONS.get(key, ""))
                yield Claim(thing, told[key], str(reason.new) if reason and reason.new else "")
    for thing, new in changes.added.items():
        yield from _of_new(thing, new)
    for thing, old in changes.removed.items():
        if thing.kind == "condition" or (thing.kind == "state" and old.get("kind") == "normal"):
            yield Claim(thing, FactChange("", "studied", None), "")


def _of_new(thing: Thing, facts: Facts) -> Iterator[Claim]:
    for key in SAYS_LESS.get(thing.kind, {}):
        if key in NAMED_WHEN_NEW and facts.get(key):
            yield Claim(thing, FactChange(key, None, facts[key]), str(facts.get(REASONS.get(key, ""), "")))


def says_less(says: Says, fact: FactChange) -> bool:
    """Tell whether a change of a fact makes the checks say less."""
    old, new = fact.old, fact.new
    if fact.key in TRUE_UNLESS_WRITTEN:
        old, new = (True if one is None else one for one in (old, new))
    return {
        Says.IF_WRITTEN: new is not None,
        Says.IF_TRUE: new is True,
        Says.IF_FALSE: not new and old is not None,
        Says.IF_LOWER: new is None or (old is not None and _number(new) < _number(old)),
        Says.IF_HIGHER: new is None or (old is not None and _number(new) > _number(old)),
        Says.IF_FEWER: bool(_named(old) - _named(new)),
        Says.IF_MORE: bool(_named(new) - _named(old)),
        Says.IF_MILDER: _mildness(fact.key, new) > _mildness(fact.key, old),
        Says.IF_ASSERTED: new is not None and new is not False,
    }[says]


def _mildness(key: str, value: Fact | None) -> int:
    """Return 0 for what most is asked of: a petrol engine that is no outboard, a normal state."""
    if key == "kind":
        return ("normal", "abnormal", "forbidden").index(str(value)) if value else 0
    return int(value == "outboard") if key == "mounting" else int(value != "petrol")


def _number(fact: Fact) -> float:
    return float(fact) if isinstance(fact, int | float) else float("inf")


def _named(fact: Fact | None) -> set[str]:
    return {name for name in str(fact or "").split(", ") if name}
