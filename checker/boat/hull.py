"""Hold one assembled boat: frozen records of everything aboard.

Positions are kept beside the facts but do not count when two boats are compared, so that two
hulls with the same wiring are equal wherever they were typed.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from checker.boat.landing import End, Isolation, Stack, Workmanship
from checker.boat.parts import Cable, Part
from checker.finding import NOWHERE, Span
from checker.units import Size


@dataclass(frozen=True, slots=True, kw_only=True)
class Zone:
    """Describe a compartment. None or "" is what was not recorded.

    `isolated_from` are claims, by the zone with petrol or gas; `opens_to` are zones that share
    its air. `has_fuel_parts`: a fuel tank, filter, fitting or metal line is in it.
    `has_bilge_water`: bilge water can stand in it.
    """

    id: str
    name: str
    ambient_c: float
    is_engine_space: bool = False
    has_petrol_vapour: bool = False
    has_cooking_gas: bool = False
    is_wet: bool = False
    has_bilge_water: bool | None = None
    access: str = ""
    has_hydrogen_vent: bool | None = None
    charge_limit_a: float | None = None
    has_fuel_parts: bool | None = None
    opens_to: tuple[str, ...] = ()
    isolated_from: tuple[Isolation, ...] = ()
    at: Span = field(default=NOWHERE, compare=False, repr=False)
    at_petrol: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class Way:
    """Describe a wireway or conduit through one zone. In a bundled way conductors lie together.

    `passage` is what guards conductors at its bulkheads, `ac` the alternating-current cables in
    it (none, sheathed, bare), `supports_m` the largest spacing of its clips; all the class's
    workmanship where the way says nothing, else "" or None.
    """

    id: str
    zone: str
    length_m: float
    is_conduit: bool = False
    is_bundled: bool = True
    passage: str = ""
    ac: str = ""
    supports_m: float | None = None
    at: Span = field(default=NOWHERE, compare=False, repr=False)
    at_supports: Span = field(default=NOWHERE, compare=False, repr=False)
    at_passage: Span = field(default=NOWHERE, compare=False, repr=False)
    at_ac: Span = field(default=NOWHERE, compare=False, repr=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class Device:
    """Describe one device aboard: a part at a place. `mounts` join an own post to another, zero length.

    `is_covered` and `is_marked` are the device's own facts, else its part's or the class's
    workmanship; None where nobody recorded it. `returns` is where the circuits of a panel bus
    return to. `served` are the circuits of a position, in the order of their ids. `set_capacity_ah`
    and `set_ratio` are what a monitor is set to; fuel facts are those of batteries. `trips_with` is
    the other pole of the same breaker.
    """

    id: str
    part: Part
    zone: str
    bank: str = ""
    measures: str = ""
    belongs_to: str = ""
    is_engine_mounted: bool = False
    circuit: str = ""
    is_covered: bool | None = None
    is_marked: bool | None = None
    regulates: str = ""
    trips_with: str = ""
    returns: str = ""
    served: tuple[str, ...] = ()
    set_capacity_ah: float | None = None
    set_ratio: str = ""
    is_above_bilge_water: bool = False
    fuel_clearance_m: float | None = None
    is_fuel_shielded: bool = False
    is_in_line_with_fuel: bool | None = None
    mounts: tuple[tuple[str, str], ...] = ()
    at: Span = field(default=NOWHERE, compare=False, repr=False)
    at_rating: Span = field(default=NOWHERE, compare=False, repr=False)
    at_set: Span = field(default=NOWHERE, compare=False, repr=False)
    legends: tuple[tuple[str, Span], ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Conductor:
    """Describe one conductor between two posts.

    `length_m` is the measured length where one was given, else ways and tails added up, which
    is `route_m`. `enclosed_m` is how much of it lies in a sheath, sleeve or conduit. `company`
    is the largest number of conductors lying together along it, itself counted.

    `size` is what it is called, `copper` the same with the area that its cable states for it.
    `colour` is "" where it was not recorded. `label` is the text on it, its id unless the yard
    wrote another; `labelled` says which ends carry it (both, from, to, none, "" not recorded).
    `ends` are its start and its end. `passage` is what guards it where it passes a bulkhead
    outside ways.
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
    colour: str = ""
    is_colour_marked: bool = False
    label: str = ""
    labelled: str = ""
    ends: tuple[End, End] = (End(), End())
    passage: str = ""
    supports_m: float | None = None
    at_supports: Span = field(default=NOWHERE, compare=False, repr=False)
    at_colour: Span = field(default=NOWHERE, compare=False, repr=False)
    at_label: Span = field(default=NOWHERE, compare=False, repr=False)
    at_labelled: Span = field(default=NOWHERE, compare=False, repr=False)
    at_passage: Span = field(default=NOWHERE, compare=False, repr=False)
    at: Span = field(default=NOWHERE, compare=False, repr=False)
    at_size: Span = field(default=NOWHERE, compare=False, repr=False)
    at_length: Span = field(default=NOWHERE, compare=False, repr=False)

    @property
    def copper(self) -> Size:
        """Return the size with its real copper area: what losses and faults are reckoned with."""
        return self.cable.real_size(self.size)


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
    shares: str = ""
    return_reason: str = ""
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
    has_ac: bool | None = None
    monitored: tuple[str, ...] | None = None
    workmanship: Workmanship = field(default_factory=Workmanship)
    landings: Mapping[str, tuple[Stack, ...]] = field(default_factory=dict)
    at_facts: Span = field(default=NOWHERE, compare=False, repr=False)
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
