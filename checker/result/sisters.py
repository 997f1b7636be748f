"""Compare the lengths of sister hulls: one that is far from the others is a typing error or another route."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from statistics import median_low

from checker.boat.hull import Boat
from checker.finding import Outcome, Span, Verdict
from checker.limits.sisters_rule import SistersRule, sisters_rule
from checker.result.cards import LENGTH_FAR_FROM_SISTERS

HULLS = "hulls/"
"""The folder of the hulls' files: only a length that is written there is a hull's own."""


@dataclass(frozen=True, slots=True)
class Length:
    """Hold the length of one conductor of one hull, m, and where it is written."""

    conductor: str
    circuit: str
    length_m: float
    at: Span


@dataclass(frozen=True, slots=True)
class Lengths:
    """Hold the lengths of one boat, m, by conductor, and those that a hull's own file gives."""

    all_m: Mapping[str, float] = field(default_factory=dict)
    own: tuple[Length, ...] = ()


def lengths_of(boat: Boat) -> Lengths:
    """Return the lengths of a boat."""
    own = (c for c in boat.conductors.values() if c.at_length.file.startswith(HULLS))
    return Lengths(
        {name: conductor.length_m for name, conductor in boat.conductors.items()},
        tuple(Length(c.id, c.circuit, c.length_m, c.at_length) for c in own),
    )


def far_lengths(hulls: Sequence[tuple[str, Lengths]], designs: Iterable[Lengths]) -> dict[str, list[Outcome]]:
    """Return for each hull the lengths of its own that are far from its sisters'.

    Args:
        hulls: The hulls of one class with their lengths.
        designs: The lengths of the class with each option set, for what fewer hulls have.
    """
    if not any(lengths.own for _, lengths in hulls):
        return {}
    rule = sisters_rule()
    known: dict[str, list[float]] = {}
    for _, lengths in hulls:
        for name, length_m in lengths.all_m.items():
            known.setdefault(name, []).append(length_m)
    design_m: dict[str, float] = {}
    for design in designs:
        for name, length_m in design.all_m.items():
            design_m.setdefault(name, length_m)
    found: dict[str, list[Outcome]] = {}
    for hull, lengths in hulls:
        for length in lengths.own:
            others = known[length.conductor]
            enough = len(others) >= rule.fewest_hulls
            usual_m = median_low(others) if enough else design_m.get(length.conductor)
            if usual_m is not None and _is_far(length.length_m, usual_m, rule):
                found.setdefault(hull, []).append(_outcome(length, usual_m, len(others)))
    return found


def _is_far(length_m: float, usual_m: float, rule: SistersRule) -> bool:
    difference_m = abs(length_m - usual_m)
    return difference_m > rule.least_difference_m and difference_m > rule.most_fraction * usual_m


def _outcome(length: Length, usual_m: float, hulls: int) -> Outcome:
    card = LENGTH_FAR_FROM_SISTERS
    of = f"the middle one of {hulls} hulls" if hulls >= sisters_rule().fewest_hulls else "in the class"
    return Outcome(
        verdict=Verdict.FINDING, check=card.id, level=card.level, part=length.conductor, circuit=length.circuit,
        at=length.at, fault=f"{length.length_m:.2f} m here, {usual_m:.2f} m is {of}",
        remedy="measure again; if it is right, say in the change why the route differs",
        inputs=(("length", f"{length.length_m:.3f} m"), ("usual", f"{usual_m:.3f} m")),
    )  # fmt: skip
