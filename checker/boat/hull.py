"""Hold one assembled boat: frozen records of everything aboard.

Positions are kept beside the facts but do not count when two boats are compared, so that two
hulls with the same wiring are equal wherever they were typed.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from checker.boat.parts import Cable, Part
from checker.finding import NOWHERE, Span
from checker.units import Size


@dataclass(frozen=True, slots=True, kw_only=True)
class Zone:
    """Describe a compartment."""

    id: str
    name: str
    ambient_c: float
    is_engine_space: bool = False
    has_petrol_vapour: bool = False
    has_cooking_gas: bool = False
    at_petrol: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class Way:
    """Describe a wireway or conduit through one zone. In a bundled way conductors lie together."""

    id: str
    zone: str
    length_m: float
    is_conduit: bool = False
    is_bundled: bool = True


@dataclass(frozen=True, slots=True, kw_only=True)
class Device:
    """Describe one device aboard: a part at a place. `mounts` join an own post to another, zero length."""

    id: str
    part: Part
    zone: str
    bank: str = ""
    measures: str = ""
    belongs_to: str = ""
    is_engine_mounted: bool = False
    circuit: str = ""
    mounts: tuple[tuple[str, str], ...] = ()
    at: Span = field(default=NOWHERE, compare=False, repr=False)
    at_rating: Span = field(default=NOWHERE, compare=False, repr=False)
    legends: tuple[tuple[str, Span], ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Conductor:
    """Describe one conductor between two posts.

    `length_m` is the measured length where one was given, else ways and tails added up, which
    is `route_m`. `enclosed_m` is how much of it lies in a sheath, sleeve or conduit. `company`
    is the largest number of conductors lying together along it, itself counted.
    """

    id: str
    start: str
    end: str
    size: Size
    cable: Cable
    length_m: float
    length_unit: str
    zones: tuple[str, ...]
    route_m: float | None = None
    enclosed_m: float = 0.0
    company: int = 1
    ways: tuple[str, ...] = ()
    role: str = ""
    role_reason: str = ""
    place_reason: str = ""
    current_a: float | None = None
    out_of_sheath_m: float | None = None
    circuit: str = ""
    is_bond: bool = False
    at: Span = field(default=NOWHERE, compare=False, repr=False)
    at_size: Span = field(default=NOWHERE, compare=False, repr=False)
    at_length: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class Joint:
    """Describe metal to metal contact between two posts."""

    id: str
    start: str
    end: str
    resistance_ohm: float = 0.0
    at: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class Shield:
    """Describe a cable shield by the posts it is joined to; None where that was not recorded."""

    id: str
    joins: tuple[str, ...] | None
    at: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class Circuit:
    """Describe a circuit: what it serves, its current, and its own conductors in the order written."""

    id: str
    name: str
    service: str
    current_a: float | None
    conductors: tuple[str, ...]
    voltage_v: float | None = None
    load: str = ""
    device: str = ""
    always_on: str = ""
    at: Span = field(default=NOWHERE, compare=False, repr=False)
    at_current: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class SwitchRow:
    """Describe one row of the table of switch states that can exist."""

    id: str
    kind: str
    switches: tuple[tuple[str, str], ...]
    at: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class Condition:
    """Describe an operating state: switches set, contactors closed, what draws and what feeds.

    A source in `holds_v` gives no more than holds that voltage at its output.
    """

    id: str
    switches: tuple[tuple[str, str], ...]
    closed: tuple[str, ...]
    loads_a: tuple[tuple[str, float], ...]
    sources_a: tuple[tuple[str, float], ...]
    holds_v: tuple[tuple[str, float], ...] = ()
    short_time_s: float | None = None
    judges_drop: bool = True
    at: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class Engine:
    """Describe an engine; `block` is its metal part, None where that was not recorded."""

    id: str
    fuel: str
    mounting: str
    block: str | None
    at: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class Boat:
    """Hold everything aboard one hull. All maps are in the order of their ids."""

    class_id: str
    class_name: str
    revision: int
    system_voltage_v: float
    reference: str
    zones: Mapping[str, Zone]
    ways: Mapping[str, Way]
    devices: Mapping[str, Device]
    conductors: Mapping[str, Conductor]
    joints: tuple[Joint, ...]
    shields: tuple[Shield, ...] | None
    bonds_recorded: bool
    circuits: Mapping[str, Circuit]
    switch_rows: tuple[SwitchRow, ...]
    conditions: Mapping[str, Condition]
    engines: tuple[Engine, ...]
    generator_fuel: str = "none"
    at: Span = field(default=NOWHERE, compare=False, repr=False)
    at_bonds: Span = field(default=NOWHERE, compare=False, repr=False)
    at_shields: Span = field(default=NOWHERE, compare=False, repr=False)
    at_engines: Span = field(default=NOWHERE, compare=False, repr=False)

    def device_of(self, post: str) -> Device | None:
        """Return the device that a post belongs to: the longest device id that begins its name."""
        name = post
        while name:
            if name in self.devices:
                return self.devices[name]
            name = name.rpartition(".")[0]
        return None
