"""Read the yard's parts catalogue into part records."""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import replace
from typing import Any

from checker.boat.entry import Entry
from checker.boat.parts import (
    Band,
    BandPoint,
    Battery,
    Bus,
    Cable,
    Diode,
    Fittings,
    Load,
    Metal,
    Overcurrent,
    Part,
    Shunt,
    Source,
    Switch,
    Terminals,
)
from checker.boat.patch import Patched
from checker.boat.workmanship import known_flag
from checker.reading.document import Document, Fault
from checker.reading.quantity import Dimension, QuantityError, read_size
from checker.units import Size

Catalogue = dict[str, Part]


def read_catalogue(documents: Sequence[Document]) -> tuple[Catalogue, list[Fault]]:
    """Return all parts by id, and what is wrong with them."""
    parts: Catalogue = {}
    faults: list[Fault] = []
    bands: dict[str, Band] = {}
    for document in documents:
        source = Patched(document.data, (document.places,))
        for entry in Entry(source, (), document.data or {}, faults).entries("bands"):
            if entry.id in bands:
                entry.fault("repeated-key", entry.at(), f"band “{entry.id}” is written twice",
                            f"the other one stands in {bands[entry.id].at}")  # fmt: skip
                continue
            bands[entry.id] = _band(entry)
    for document in documents:
        source = Patched(document.data, (document.places,))
        for entry in Entry(source, (), document.data or {}, faults).entries("parts"):
            if entry.id in parts:
                entry.fault("repeated-key", entry.at(), f"part “{entry.id}” is written twice",
                            f"the other one stands in {parts[entry.id].at}")  # fmt: skip
                continue
            part = _READERS[entry.text("kind")](entry)
            if isinstance(part, Overcurrent):
                part = _with_band(entry, part, bands)
            if part is not None:
                parts[entry.id] = part
    return parts, faults


def _battery(entry: Entry) -> Part | None:
    voltage_v = entry.needed_number("voltage", Dimension.VOLTAGE)
    capacity_ah = entry.needed_number("capacity", Dimension.CAPACITY)
    if voltage_v is None or capacity_ah is None:
        return None
    return Battery(
        id=entry.id,
        at=entry.at(),
        voltage_v=voltage_v,
        capacity_ah=capacity_ah,
        chemistry=entry.text("chemistry"),
        emf_full_v=entry.number("emf_full", Dimension.VOLTAGE),
        emf_low_v=entry.number("emf_low", Dimension.VOLTAGE),
        resistance_full_ohm=entry.number("resistance_full", Dimension.RESISTANCE),
        resistance_low_ohm=entry.number("resistance_low", Dimension.RESISTANCE),
        short_circuit_a=entry.number("short_circuit", Dimension.CURRENT),
        charge_voltage_v=entry.number("charge_voltage", Dimension.VOLTAGE),
        fittings=_fittings(entry),
        cranking_a=entry.number("cranking_amps", Dimension.CURRENT),
    )


def _overcurrent(entry: Entry) -> Part | None:
    """Read a fuse or breaker, or a series of them that differ in rating and resistance only."""
    voltage_v = entry.needed_number("voltage", Dimension.VOLTAGE)
    if voltage_v is None:
        return None

    def one(rating_a: float, resistance_ohm: float | None, series: tuple[Overcurrent, ...] = ()) -> Overcurrent:
        return Overcurrent(
            id=entry.id,
            at=entry.at(),
            is_breaker=entry.text("kind") == "breaker",
            rating_a=rating_a,
            voltage_v=voltage_v,
            interrupting_a=entry.number("interrupting", Dimension.CURRENT),
            resistance_ohm=resistance_ohm,
            trip_free=entry.flag("trip_free", default=True),
            resets_itself=entry.text("reset") == "automatic",
            polarised=entry.flag("polarised"),
            ignition_protected=entry.flag("ignition_protected"),
            series=series,
            fittings=fittings,
        )

    fittings = _fittings(entry)
    resistance_ohm = entry.number("resistance", Dimension.RESISTANCE)
    if not entry.has("ratings"):
        rating_a = entry.needed_number("rating", Dimension.CURRENT)
        return None if rating_a is None else one(rating_a, resistance_ohm)
    made: list[Overcurrent] = []
    for key, facts in entry.fields("ratings").items():
        rating = entry.quantity_at(("ratings", key), key, Dimension.CURRENT)
        stated = (facts or {}).get("resistance")
        resistance = entry.quantity_at(("ratings", key, "resistance"), stated, Dimension.RESISTANCE)
        if rating is not None:
            made.append(one(rating, resistance if stated else resistance_ohm))
    made.sort(key=lambda device: device.rating_a)
    return one(made[-1].rating_a, resistance_ohm, tuple(made)) if made else None


def _with_band(entry: Entry, part: Overcurrent, bands: dict[str, Band]) -> Overcurrent:
    """Give a device, and each member of its series, the band that it names."""
    name = entry.text("band")
    if not name:
        return part
    if name not in bands:
        entry.unknown("band", name, entry.at("band"), bands)
        return part
    band = bands[name]
    return replace(part, band=band, series=tuple(replace(member, band=band) for member in part.series))


def _band(entry: Entry) -> Band:
    points: list[BandPoint] = []
    for index, row in enumerate(entry.data.get("points", ())):
        earliest_s = entry.quantity_at(("points", index, "earliest"), row.get("earliest"), Dimension.TIME)
        latest = row.get("latest")
        never = latest == "never"
        latest_s = math.inf if never else entry.quantity_at(("points", index, "latest"), latest, Dimension.TIME)
        point = BandPoint(float(row.get("multiple", 0)), earliest_s or 0.0, math.inf if latest_s is None else latest_s)
        before = points[-1] if points else None
        if point.latest_s < point.earliest_s or (before is not None and before.multiple >= point.multiple):
            entry.fault(
                "bad-value", entry.at("points", index), "points rise in their multiple, and open late after early"
            )
        points.append(point)
    factor = float(entry.data["engine_space_factor"]) if entry.has("engine_space_factor") else None
    return Band(id=entry.id, points=tuple(points), engine_space_factor=factor, at=entry.at())


def _bus(entry: Entry) -> Part | None:
    rating_a = entry.needed_number("rating", Dimension.CURRENT)
    if rating_a is None:
        return None
    return Bus(
        id=entry.id,
        at=entry.at(),
        rating_a=rating_a,
        studs=entry.whole("studs") or None,
        terminals_per_stud=entry.whole("terminals_per_stud") or None,
        screws=entry.whole("screws") or None,
        screw_thread=entry.text("screw_thread"),
        is_splice=entry.flag("splice"),
        fittings=_fittings(entry),
    )


def _metal(entry: Entry) -> Part | None:
    return Metal(id=entry.id, at=entry.at(), fittings=_fittings(entry))


def _switch(entry: Entry) -> Part | None:
    posts = entry.items("posts")
    states: list[tuple[str, tuple[tuple[str, str], ...]]] = []
    for name, pairs in sorted(entry.fields("states").items()):
        for index, pair in enumerate(pairs):
            for post in (post for post in pair if post not in posts):
                entry.unknown(f"post on {entry.id}", post, entry.at("states", name, index), posts)
        states.append((name, tuple((str(pair[0]), str(pair[1])) for pair in pairs)))
    if not states:
        entry.fault("bad-value", entry.at("states"), f"{entry.words} has no state", "add one, e.g. `open: []`")
        return None
    return Switch(
        id=entry.id,
        at=entry.at(),
        posts=posts,
        states=tuple(states),
        by_hand=entry.text("operated", "hand") == "hand",
        continuous_a=entry.number("continuous", Dimension.CURRENT),
        intermittent_a=entry.number("intermittent", Dimension.CURRENT),
        contact_ohm=entry.number("contact_resistance", Dimension.RESISTANCE),
        ignition_protected=entry.flag("ignition_protected"),
        fittings=_fittings(entry),
    )


def _diode(entry: Entry) -> Part | None:
    posts = entry.items("posts")
    paths = [(str(pair[0]), str(pair[1])) for pair in entry.data.get("passes", ())]
    for index, pair in enumerate(paths):
        for post in (post for post in pair if post not in posts):
            entry.unknown(f"post on {entry.id}", post, entry.at("passes", index), posts)
    drop_v = entry.needed_number("drop", Dimension.VOLTAGE)
    resistance_ohm = entry.needed_number("resistance", Dimension.RESISTANCE)
    if drop_v is None or resistance_ohm is None:
        return None
    if not resistance_ohm:
        entry.fault("bad-value", entry.at("resistance"), "a diode has some resistance", "e.g. `resistance: 2 mohm`")
        return None
    return Diode(
        id=entry.id,
        at=entry.at(),
        posts=posts,
        paths=tuple(sorted(paths)),
        drop_v=drop_v,
        resistance_ohm=resistance_ohm,
        continuous_a=entry.number("continuous", Dimension.CURRENT),
        ignition_protected=entry.flag("ignition_protected"),
        fittings=_fittings(entry),
    )


def _shunt(entry: Entry) -> Part | None:
    rating_a = entry.needed_number("rating", Dimension.CURRENT)
    if rating_a is None:
        return None
    short = entry.fields("short_time")
    return Shunt(
        id=entry.id,
        at=entry.at(),
        rating_a=rating_a,
        continuous_a=entry.number("continuous", Dimension.CURRENT),
        short_time_a=entry.quantity_at(("short_time", "current"), short.get("current"), Dimension.CURRENT),
        short_time_s=entry.quantity_at(("short_time", "time"), short.get("time"), Dimension.TIME),
        resistance_ohm=entry.number("resistance", Dimension.RESISTANCE),
        fittings=_fittings(entry),
    )


def _load(entry: Entry) -> Part | None:
    voltage_v = entry.needed_number("voltage", Dimension.VOLTAGE)
    current_a = entry.needed_number("current", Dimension.CURRENT)
    if voltage_v is None or current_a is None:
        return None
    return Load(
        id=entry.id,
        at=entry.at(),
        voltage_v=voltage_v,
        current_a=current_a,
        peak_a=entry.number("peak", Dimension.CURRENT),
        min_voltage_v=entry.number("min_voltage", Dimension.VOLTAGE),
        max_device_a=entry.number("max_device", Dimension.CURRENT),
        standby_a=entry.number("standby", Dimension.CURRENT),
        model=entry.text("model", "constant-current"),
        duty_s=entry.number("duty", Dimension.TIME),
        is_motor=entry.flag("motor"),
        stall_a=entry.number("stall_current", Dimension.CURRENT),
        stall_protection=entry.text("stall_protection"),
        has_own_switch=entry.flag("own_switch"),
        is_regulator=entry.flag("regulator"),
        case_isolated=known_flag(entry, "case_isolated"),
        fittings=_fittings(entry),
        ignition_protected=entry.flag("ignition_protected"),
        feed_post=entry.text("feed_post", "pos"),
        return_post=entry.text("return_post", "neg"),
        case_post=entry.text("case_post"),
    )


def _terminals(entry: Entry, name: str) -> tuple[Terminals, ...]:
    found: list[Terminals] = []
    for row in entry.entries(name):
        max_a = row.needed_number("max", Dimension.CURRENT)
        voltage_v = row.needed_number("voltage", Dimension.VOLTAGE)
        if max_a is not None and voltage_v is not None:
            found.append(
                Terminals(
                    post=row.id,
                    return_post=row.text("return"),
                    max_a=max_a,
                    voltage_v=voltage_v,
                    limited=row.flag("limited"),
                    cold_open_v=row.number("cold_open_voltage", Dimension.VOLTAGE),
                )
            )
    return tuple(found)


def _source(entry: Entry) -> Part | None:
    outputs = _terminals(entry, "outputs")
    if not outputs:
        return None
    joined: list[tuple[str, str, float]] = []
    for index, row in enumerate(entry.data.get("joined", ())):
        pair: list[Any] = row.get("between", [])
        ohm = entry.quantity_at(("joined", index, "resistance"), row.get("resistance"), Dimension.RESISTANCE)
        joined.append((str(pair[0]), str(pair[1]), ohm or 0.0))
    return Source(
        id=entry.id,
        at=entry.at(),
        outputs=outputs,
        inputs=_terminals(entry, "inputs"),
        joined=tuple(joined),
        rated_a=entry.number("rated", Dimension.CURRENT),
        max_input_v=entry.number("max_input", Dimension.VOLTAGE),
        has_internal_fuse=known_flag(entry, "internal_fuse"),
        enable=entry.text("enable"),
        on_disconnect=entry.text("on_disconnect"),
        case_isolated=known_flag(entry, "case_isolated"),
        fittings=_fittings(entry),
        case_post=entry.text("case_post"),
        ignition_protected=entry.flag("ignition_protected"),
    )


def _cable(entry: Entry) -> Part | None:
    insulation_c = entry.needed_number("insulation", Dimension.TEMPERATURE)
    if insulation_c is None:
        return None
    return Cable(
        id=entry.id,
        at=entry.at(),
        insulation_c=insulation_c,
        material=entry.text("material", "copper"),
        is_stranded=entry.text("strands", "stranded") == "stranded",
        is_insulated=entry.flag("insulated", default=True),
        is_sheathed=entry.flag("sheathed"),
        cores=entry.whole("cores", 1),
        is_welding=entry.flag("welding"),
        core_colours=entry.items("core_colours"),
        real_areas_mm2=_real_areas(entry),
    )


def _real_areas(entry: Entry) -> tuple[tuple[str, float], ...]:
    """Read stated copper areas by size; both are spelled as the yard spells sizes."""
    found: list[tuple[str, float]] = []
    for text, area in sorted(entry.fields("real_areas").items()):
        size, real = _size(entry, ("real_areas", text), text), _size(entry, ("real_areas", text), str(area))
        if size is not None and real is not None:
            found.append((size.text, real.area_mm2))
    return tuple(found)


def _size(entry: Entry, steps: tuple[str, ...], text: str) -> Size | None:
    try:
        return read_size(text)
    except QuantityError as error:
        entry.fault("bad-value", entry.at(*steps), f"{steps[-1]}: {error}")
        return None


def _fittings(entry: Entry) -> Fittings:
    """Read how conductors are fixed to the posts of a part."""
    return Fittings(
        terminal=entry.text("terminal"),
        stud=entry.text("stud"),
        is_covered=known_flag(entry, "cover"),
        torque_nm=entry.number("torque", Dimension.TORQUE),
        smallest=entry.size("smallest_size") if entry.has("smallest_size") else None,
        largest=entry.size("largest_size") if entry.has("largest_size") else None,
        ingress=entry.text("ingress"),
    )


_READERS: dict[str, Callable[[Entry], Part | None]] = {
    "battery": _battery,
    "fuse": _overcurrent,
    "breaker": _overcurrent,
    "bus": _bus,
    "metal": _metal,
    "switch": _switch,
    "diode": _diode,
    "shunt": _shunt,
    "load": _load,
    "source": _source,
    "cable": _cable,
}
