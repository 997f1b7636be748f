"""Plant faults of conductors: gauge, insulation, drop."""

from __future__ import annotations

from collections.abc import Iterator

from tests.campaign.planting import Design, Plant, at, fault


@fault("CON-04")
def thin_single(design: Design) -> Iterator[Plant]:
    """A branch lies in single conductors thinner than 16 AWG."""
    for name, row, _ in design.branches():
        if row["cable"] == "16 AWG" and row["service"] == "lighting" and "legend" not in row:
            single = {"cable": "18 AWG", "type": "single-105", "length": "1 m", "route": None, "tail": None}
            finds = [("minimum-size", f"{name}.out"), ("minimum-size", f"{name}.back")]
            yield Plant(at("circuits", name, single), finds=finds, line="18 AWG")
