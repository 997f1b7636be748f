"""Work out what a conductor bears under one limit set: table, engine space, company."""

from __future__ import annotations

from dataclasses import dataclass

from checker.boat.hull import Boat, Conductor
from checker.limits.limit_set import LimitSet
from checker.units import Size

SIZING = ("ampacity", "engine_factor", "bundle")
"""The tables of a limit set that say what a conductor bears."""


@dataclass(frozen=True, slots=True)
class Bearing:
    """Hold a corrected ampacity, and how it came about: "60 A (10 AWG, 105 C) x 0.85 engine space"."""

    ampacity_a: float
    words: str


class Bearings:
    """Look up and correct ampacities for the conductors of one boat under one limit set."""

    def __init__(self, boat: Boat, limits: LimitSet, *, next_smaller: bool) -> None:
        self._boat = boat
        self.limits = limits
        self.next_smaller = next_smaller
        self._known: dict[tuple[str, str], Bearing | None] = {}

    def of(self, conductor: Conductor, size: Size | None = None) -> Bearing | None:
        """Return what a conductor bears, or would bear in another size; None where the table has no figure."""
        size = size or conductor.size
        key = (conductor.id, size.text)
        if key not in self._known:
            self._known[key] = self._bearing(conductor, size)
        return self._known[key]

    def allowed_a(self, conductor: Conductor, size: Size | None = None) -> float | None:
        """Return the largest overcurrent protection that a conductor may stand behind."""
        bearing = self.of(conductor, size)
        if bearing is None or self.limits.lacks(["device_rating"]):
            return None
        return self.limits.device_rating.largest_allowed_a(bearing.ampacity_a)

    def _bearing(self, conductor: Conductor, size: Size) -> Bearing | None:
        if self.limits.lacks(SIZING):
            return None
        row = self.limits.ampacity.at(size, conductor.cable.insulation_c, next_smaller=self.next_smaller)
        if row is None:
            return None
        ampacity_a = row.ampacity_a
        is_own = (size.awg is None) is self.limits.ampacity.is_metric
        gauge = size.text if is_own else f"{size.text} judged as {row.size}"
        words = f"{row.ampacity_a:g} A for {gauge} at {row.column_c:g} C"
        engine = next((z for z in conductor.zones if self._boat.zones[z].is_engine_space), None)
        if engine is not None:
            factor = self.limits.engine_factor.at(row.column_c)
            ampacity_a *= factor
            words += f", x {factor:g} for engine space {engine}"
        bundle = self.limits.bundle.factor(conductor.company)
        if bundle != 1.0:
            ampacity_a *= bundle
            words += f", x {bundle:g} for {conductor.company} conductors lying together"
        return Bearing(ampacity_a, words)
