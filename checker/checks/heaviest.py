"""Find the largest current that any solved condition sends through each piece of the network, once for all checks."""

from __future__ import annotations

from dataclasses import dataclass, field

from checker.boat.parts import Bus
from checker.checks.check import Case
from checker.limits.limit_set import surge_s
from checker.network.solved import Solved

Largest = tuple[float, str]
"""A current without its sign, A, and the condition that it flows in."""

NEVER: Largest = (-1.0, "")


@dataclass(slots=True)
class Heaviest:
    """Hold the largest currents by edge and by bus, over conditions of one kind: those that last, or surges."""

    edges: dict[int, Largest] = field(default_factory=dict)
    buses: dict[str, Largest] = field(default_factory=dict)


def is_surge(case: Case, solved: Solved) -> bool:
    """Tell whether a condition lasts no longer than a surge."""
    return not solved.lasts_beyond(surge_s(case.house.common))


def heaviest(case: Case) -> tuple[Heaviest, Heaviest]:
    """Return the largest currents of the lasting conditions and those of surges, with full and with low batteries."""
    memo = case.studies.network.memo
    if "heaviest" not in memo:
        memo["heaviest"] = _heaviest(case)
    found: tuple[Heaviest, Heaviest] = memo["heaviest"]
    return found


def _heaviest(case: Case) -> tuple[Heaviest, Heaviest]:
    buses = [(d.id, case.studies.network.index[d.id]) for d in case.boat.devices.values() if isinstance(d.part, Bus)]
    lasting, surges = Heaviest(), Heaviest()
    for solved in case.studies.conditions.solved:
        kind = surges if is_surge(case, solved) else lasting
        condition = solved.operation.condition.id
        for flow in solved.flows():
            for index, signed_a in flow.currents_a.items():
                current_a = abs(signed_a)
                if current_a > kind.edges.get(index, NEVER)[0]:
                    kind.edges[index] = (current_a, condition)
            for name, post in buses:
                current_a = flow.through_place(post)
                if current_a > kind.buses.get(name, NEVER)[0]:
                    kind.buses[name] = (current_a, condition)
    return lasting, surges
