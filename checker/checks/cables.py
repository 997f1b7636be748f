"""Look at each cable once: a branch's two cores lie in one cable and are told together, by the circuit's id."""

from __future__ import annotations

from collections.abc import Iterator

from checker.boat.hull import Boat, Conductor

MOST_NAMED = 4


def cable_of(conductor: Conductor) -> str:
    """Return the name of the cable that a conductor lies in: of a branch its circuit, else its own id."""
    cores = (f"{conductor.circuit}.out", f"{conductor.circuit}.back")
    return conductor.circuit if conductor.circuit and conductor.id in cores else conductor.id


def each_cable(boat: Boat) -> Iterator[tuple[str, Conductor]]:
    """Yield the name of each cable once, with a conductor of it: of a branch the way out."""
    first: dict[str, Conductor] = {}
    for conductor in boat.conductors.values():
        name = cable_of(conductor)
        if name not in first or conductor.id == f"{name}.out":
            first[name] = conductor
    yield from ((name, first[name]) for name in sorted(first))


def named(names: list[str]) -> str:
    """List a few names, and say how many more there are."""
    more = len(names) - MOST_NAMED
    return ", ".join(names[:MOST_NAMED]) + (f" and {more} more" if more > 0 else "")
