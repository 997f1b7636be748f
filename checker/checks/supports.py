"""Judge how far apart the supports of conductors stand."""

from __future__ import annotations

from collections.abc import Iterator

from checker.boat.hull import Conductor
from checker.boat.parts import Battery
from checker.checks.check import Case, Place, Told, check
from checker.checks.words import kept_length, short_length
from checker.finding import Basis, Level, Measure, Outcome
from checker.network.live import unprotected_live_posts

MOST_NAMED = 5
"""So many conductors are named where their supports are not recorded; the rest are counted."""


@check(
    title="Conductors are held by supports that stand close enough",
    basis=Basis.STANDARD,
    citation="ISO 10133:2012, 7.3 and 7.4 (450 mm; 300 mm for sheathed and battery conductors), published copies",
    why="a conductor that hangs free chafes and breaks its strands at the terminal",
    level=Level.WARNING,
    exemptions="a conduit supports all along; a conductor no longer than the spacing hangs between its ends",
    caution="that the first support stands within 1 m of the terminal is not judged",
    per_set=True,
    needs=("supports",),
)
def support_spacing(case: Case) -> Iterator[Outcome]:
    """Are the clips and ties of every conductor no further apart than the limit set allows?

    Judged only under a limit set that has the rule. The spacing is the conductor's own, or the
    largest of its ways and of the class's workmanship. Conductors on a battery, and those that
    it keeps live with all switches open and no device between, count as battery conductors.
    """
    rule = case.limits.supports
    if rule is None:
        return
    live = unprotected_live_posts(case.studies.network, case.studies.all_off)
    unknown: list[str] = []
    for conductor in case.boat.conductors.values():
        if _is_on_battery(case, conductor, live):
            kind, most_m = "a battery conductor", rule.battery_m
        elif conductor.cable.is_sheathed:
            kind, most_m = "a sheathed conductor", rule.sheathed_m
        else:
            kind, most_m = "a single conductor", rule.single_m
        if conductor.length_m <= most_m * (1 + 1e-9):
            yield support_spacing.passed(case, _at(conductor), f"no longer than {kept_length(most_m)}")
        elif conductor.supports_m is None:
            unknown.append(conductor.id)
        else:
            yield _judge_spacing(case, conductor, conductor.supports_m, most_m, kind)
    if unknown:
        named = ", ".join(unknown[:MOST_NAMED]) + (
            f" and {more} more" if (more := len(unknown) - MOST_NAMED) > 0 else ""
        )
        fault = f"how far apart the supports of {named} stand is not recorded"
        place = Place("workmanship", case.boat.workmanship.at)
        yield support_spacing.not_assessed(case, place, fault, "supports in workmanship, e.g. 300 mm")


def _at(conductor: Conductor) -> Place:
    return Place(conductor.id, conductor.at_supports, conductor.circuit)


def _is_on_battery(case: Case, conductor: Conductor, live: frozenset[int]) -> bool:
    posts = (conductor.start, conductor.end)
    if any(case.studies.network.index[post] in live for post in posts):
        return True
    owners = (case.boat.device_of(post) for post in posts)
    return any(owner is not None and isinstance(owner.part, Battery) for owner in owners)


def _judge_spacing(case: Case, conductor: Conductor, spacing_m: float, most_m: float, kind: str) -> Outcome:
    told = Told(
        fault=f"its supports stand {short_length(spacing_m)} apart; it is {kind}",
        remedy=f"support it at least every {kept_length(most_m)}, or lay it in a conduit",
        inputs=(("supports", f"{spacing_m:.3f} m"), ("is", kind)),
    )
    measure = Measure("support spacing", spacing_m, most_m, "m", is_stepped=True)
    return support_spacing.judge(case, _at(conductor), measure, lambda: told)
