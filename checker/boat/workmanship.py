"""Read how a class is made: ends, labels, landings, passages, isolation claims.

What is not written at a conductor, way or device is taken from the class's section
`workmanship`; what is written in neither is not recorded.
"""

from __future__ import annotations

from collections.abc import Container

from checker.boat.entry import Entry
from checker.boat.landing import End, Isolation, Stack, Workmanship
from checker.reading.quantity import Dimension


def read_workmanship(top: Entry) -> Workmanship:
    """Read the section `workmanship` of a class; without one, nothing is recorded."""
    row = Entry(top._source, ("workmanship",), top.fields("workmanship"), top._faults)
    return Workmanship(
        terminal=row.text("terminal"),
        ring_as_stud=row.has("ring_hole"),
        barrel_as_conductor=row.has("barrel"),
        largest_first=row.has("stacking"),
        labels=row.text("labels"),
        passages=row.text("passages"),
        fuse_marks=known_flag(row, "fuse_marks"),
        switch_marks=known_flag(row, "switch_marks"),
        ac=row.text("ac"),
        supports_m=row.number("supports", Dimension.LENGTH),
        at=row.at() if top.has("workmanship") else top.at("class"),
    )


def known_flag(row: Entry, name: str) -> bool | None:
    """Return a true/false field, None where it is not written."""
    return row.flag(name) if row.has(name) else None


def read_end(row: Entry, name: str, usual: Workmanship) -> End:
    """Read one end of a conductor from its row's field `ends`."""
    given = Entry(row._source, (*row.path, "ends", name), row.fields("ends").get(name, {}), row._faults)
    return End(
        terminal=given.text("terminal", usual.terminal),
        hole=given.text("hole"),
        hole_as_stud=usual.ring_as_stud and not given.has("hole"),
        barrel=given.size("barrel") if given.has("barrel") else None,
        barrel_as_conductor=usual.barrel_as_conductor and not given.has("barrel"),
        barrel_colour=given.text("barrel_colour"),
        shares_barrel=given.flag("shares_barrel"),
        at=given.at() if given.data else row.at(),
    )


def read_landings(top: Entry, posts: Container[str], conductors: Container[str]) -> dict[str, tuple[Stack, ...]]:
    """Read the section `landings`; every post named must exist.

    A conductor that is not aboard leaves its stack: an option or a change took it away. One that
    is aboard and in no stack is told by the checks.
    """
    found: dict[str, tuple[Stack, ...]] = {}
    for post, studs in sorted(top.fields("landings").items()):
        if post not in posts:
            top.unknown("post", post, top.key_at("landings", post), posts)
            continue
        stacks: list[Stack] = []
        for stud, names in sorted((studs or {}).items()):
            aboard = tuple(str(name) for name in names if name in conductors)
            stacks.append(Stack(post=post, stud=stud, conductors=aboard, at=top.key_at("landings", post, stud)))
        found[post] = tuple(stacks)
    return found


def read_isolation(zone: Entry, zones: Container[str]) -> tuple[Isolation, ...]:
    """Read the claims that a zone is isolated from others."""
    found: list[Isolation] = []
    for row in zone.entries("isolated_from"):
        if row.id not in zones:
            row.unknown("zone", row.id, zone.key_at("isolated_from", row.id), zones)
        found.append(
            Isolation(
                zone=row.id,
                by=row.needed("by", "bulkhead") or "",
                height_m=row.number("height", Dimension.LENGTH),
                tight_to_m=row.number("tight_to", Dimension.LENGTH),
                gap_m=row.number("gap", Dimension.LENGTH),
                is_sealed=known_flag(row, "sealed"),
                has_deck_between=known_flag(row, "deck_between"),
                distance_m=row.number("distance", Dimension.LENGTH),
                is_open_to_air=known_flag(row, "open_to_air"),
                at=row.at(),
            )
        )
    return tuple(found)
