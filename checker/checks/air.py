"""Tell which zones share the air of a zone with petrol, and whether a claim of isolation holds."""

from __future__ import annotations

from dataclasses import dataclass, field

from checker.boat.hull import Boat, Zone
from checker.boat.landing import Isolation
from checker.checks.words import short_length
from checker.finding import Measure
from checker.limits.rules import IgnitionRule
from checker.units import inch_from_metre

OPEN_SPACE = "open-space"


@dataclass(frozen=True, slots=True)
class ClaimVerdict:
    """Hold what is wrong with a claim of isolation, and the fields it lacks; a claim with neither holds."""

    faults: tuple[str, ...] = ()
    missing: tuple[str, ...] = ()


@dataclass(slots=True)
class Vapour:
    """Hold where petrol vapour can be: zone by zone the one it comes from, and where a claim lacks its figures."""

    comes_from: dict[str, str] = field(default_factory=dict)
    in_doubt: dict[str, tuple[Isolation, ClaimVerdict]] = field(default_factory=dict)


def opens_to(boat: Boat, zone: Zone) -> list[str]:
    """Return the zones that share air with a zone, whichever of the two says so, in the order of their ids."""
    told = {other.id for other in boat.zones.values() if zone.id in other.opens_to}
    return sorted((told | set(zone.opens_to)) & set(boat.zones))


def vapour_zones(boat: Boat, rule: IgnitionRule) -> Vapour:
    """Find the zones that petrol vapour can come to: their own, and over openings from one to the next.

    A zone that a claim isolates from the source stops it.
    """
    found = Vapour({zone.id: zone.id for zone in boat.zones.values() if zone.has_petrol_vapour})
    for source in list(found.comes_from):
        waiting = [source]
        while waiting:
            for name in opens_to(boat, boat.zones[waiting.pop(0)]):
                if name in found.comes_from:
                    continue
                claim = next((c for c in boat.zones[name].isolated_from if c.zone == source), None)
                verdict = None if claim is None else judge_claim(boat, boat.zones[name], claim, rule)
                if claim is None or verdict is None or verdict.faults:
                    found.comes_from[name] = source
                    waiting.append(name)
                elif verdict.missing:
                    found.in_doubt.setdefault(name, (claim, verdict))
    for name in found.comes_from:
        found.in_doubt.pop(name, None)
    return found


def judge_claim(boat: Boat, zone: Zone, claim: Isolation, rule: IgnitionRule) -> ClaimVerdict:
    """Hold a claim against the four ways of the text. Zones that share air are isolated by open space only."""
    if claim.by != OPEN_SPACE and claim.zone in opens_to(boat, zone):
        return ClaimVerdict((f"{zone.id} opens to {claim.zone}: they share their air",))
    if claim.by == "bulkhead":
        return _bulkhead(claim, rule)
    if claim.by == "below":
        return _flag(claim.is_sealed, "sealed", "fuel and vapour are not kept from the electrical parts below")
    if claim.by == "above":
        return _flag(claim.has_deck_between, "deck_between", "neither a deck nor an enclosure lies between")
    return _both(
        _least("distance", claim.distance_m, rule.open_space_m, "the distance is"),
        _flag(claim.is_open_to_air, "open_to_air", "the space between is not open to the atmosphere"),
    )


def _bulkhead(claim: Isolation, rule: IgnitionRule) -> ClaimVerdict:
    least_m = rule.bulkhead_tight_m
    is_tight = claim.tight_to_m is not None and Measure("", claim.tight_to_m, least_m, "m", at_least=True).holds
    if claim.height_m is not None:
        least_m = min(least_m, claim.height_m / rule.bulkhead_tight_parts)
    elif claim.tight_to_m is not None and not is_tight:
        return _both(ClaimVerdict(missing=("height",)), _gap(claim, rule))
    return _both(_least("tight_to", claim.tight_to_m, least_m, "the bulkhead holds water up to"), _gap(claim, rule))


def _gap(claim: Isolation, rule: IgnitionRule) -> ClaimVerdict:
    if claim.gap_m is None:
        return ClaimVerdict(missing=("gap",))
    if Measure("", claim.gap_m, rule.bulkhead_gap_m, "m").holds:
        return ClaimVerdict()
    most = gap_words(rule.bulkhead_gap_m)
    return ClaimVerdict((f"its gaps are {gap_words(claim.gap_m)} wide, at most {most} is allowed",))


def gap_words(gap_m: float) -> str:
    """Print the width of a gap in both units: "6.35 mm (1/4 in)" would be lost in metres."""
    return f"{gap_m * 1000:.2f} mm ({inch_from_metre(gap_m):.2f} in)"


def _least(name: str, value_m: float | None, least_m: float, what: str) -> ClaimVerdict:
    if value_m is None:
        return ClaimVerdict(missing=(name,))
    if Measure("", value_m, least_m, "m", at_least=True).holds:
        return ClaimVerdict()
    return ClaimVerdict((f"{what} {short_length(value_m)}, at least {short_length(least_m)} is asked",))


def _flag(value: bool | None, name: str, fault: str) -> ClaimVerdict:
    if value is None:
        return ClaimVerdict(missing=(name,))
    return ClaimVerdict() if value else ClaimVerdict((fault,))


def _both(first: ClaimVerdict, second: ClaimVerdict) -> ClaimVerdict:
    return ClaimVerdict(first.faults + second.faults, first.missing + second.missing)


def claim_remedy(claim: Isolation, rule: IgnitionRule) -> str:
    """Say what would make a claim hold, with the figures of the rule."""
    part = f"1/{rule.bulkhead_tight_parts:g} of its height"
    mended = {
        "bulkhead": f"close every opening, seal the bulkhead up to {short_length(rule.bulkhead_tight_m)} or {part}, "
        f"whichever is less, and leave gaps of at most {gap_words(rule.bulkhead_gap_m)} above",
        "below": "seal the space with no opening, so that neither fuel nor vapour comes to the electrical parts",
        "above": "put a deck or an enclosure between, with no opening in it",
    }.get(claim.by, f"keep {short_length(rule.open_space_m)} of space between that is open to the atmosphere")
    return f"{mended}; or take the claim out and fit ignition-protected parts"
