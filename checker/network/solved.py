"""Solve every operating condition of a boat, with full and with low batteries."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from checker.network.conditions import Operation
from checker.network.flow import Copper, Flow, Grid, NoOperatingPoint
from checker.network.graph import Network


@dataclass(frozen=True, slots=True)
class Solved:
    """Hold one condition solved with full and with low batteries."""

    operation: Operation
    full: Flow | NoOperatingPoint
    low: Flow | NoOperatingPoint

    def lasts_beyond(self, surge_s: float) -> bool:
        """Tell whether the condition lasts longer than a surge."""
        seconds = self.operation.condition.short_time_s
        return seconds is None or seconds > surge_s

    def flows(self) -> tuple[Flow, ...]:
        """Return the solutions that exist."""
        return tuple(flow for flow in (self.full, self.low) if isinstance(flow, Flow))


@dataclass(frozen=True, slots=True)
class SolvedConditions:
    """Hold all conditions, and the batteries that could not be taken for want of their figures."""

    solved: tuple[Solved, ...]
    missing: tuple[str, ...]


def solve_operations(network: Network, operations: Sequence[Operation], copper: Copper) -> SolvedConditions:
    """Solve every condition; conditions with the same contacts closed share one factorisation."""
    grids: dict[tuple[object, bool], Grid] = {}
    missing: set[str] = set()

    def grid(operation: Operation, *, is_full: bool) -> Grid:
        key = (operation.state.closed, is_full)
        if key not in grids:
            grids[key] = Grid(network, operation.state, copper, is_full=is_full)
            missing.update(grids[key].missing)
        return grids[key]

    solved = tuple(
        Solved(
            operation,
            grid(operation, is_full=True).solve(operation.draws, operation.feeds),
            grid(operation, is_full=False).solve(operation.draws, operation.feeds),
        )
        for operation in operations
    )
    return SolvedConditions(solved, tuple(sorted(missing)))
