"""Hold one assembled boat with the names that its yard wrote, for the lists that people work from."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field
from typing import Any

from checker.boat.hull import Boat, Conductor
from checker.units import foot_from_metre


@dataclass(frozen=True, slots=True, kw_only=True)
class Aboard:
    """Hold a hull's boat, and the names of its devices and parts where the yard gave any."""

    hull: str
    boat: Boat
    device_names: Mapping[str, str] = field(default_factory=dict)
    part_names: Mapping[str, str] = field(default_factory=dict)

    @property
    def length_unit(self) -> str:
        """Return the unit in which the yard wrote most lengths: ft or m."""
        units = Counter(conductor.length_unit for conductor in self.boat.conductors.values())
        return "ft" if units["ft"] > units["m"] else "m"

    def length(self, value_m: float) -> float:
        """Return a length, m, in the yard's unit, rounded as a tape is read."""
        return round(foot_from_metre(value_m), 2) if self.length_unit == "ft" else round(value_m, 3)

    def zone_words(self, zone_id: str) -> str:
        """Name a zone: Z-BATT battery locker."""
        zone = self.boat.zones.get(zone_id)
        return f"{zone_id} {zone.name}".strip() if zone else zone_id

    def circuit_name(self, conductor: Conductor) -> str:
        """Return the name of the circuit that a conductor belongs to."""
        circuit = self.boat.circuits.get(conductor.circuit)
        return circuit.name if circuit else ""


def named_aboard(hull: str, boat: Boat, data: Any, parts: Iterable[Any]) -> Aboard:
    """Return a hull's boat with the names that its assembled data and the data of the files of parts give."""
    rows = {name: row for document in parts for name, row in _rows(document, "parts").items()}
    return Aboard(hull=hull, boat=boat, device_names=_names(_rows(data, "devices")), part_names=_names(rows))


def _rows(data: Any, section: str) -> Mapping[str, Any]:
    rows = data.get(section) if isinstance(data, dict) else None
    return rows if isinstance(rows, dict) else {}


def _names(rows: Mapping[str, Any]) -> dict[str, str]:
    return {name: str(row["name"]) for name, row in rows.items() if isinstance(row, dict) and "name" in row}
