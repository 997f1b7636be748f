"""Build a frozen boat from assembled data: look up parts, expand circuits, add up routes."""

from __future__ import annotations

import re
from dataclasses import dataclass, field, replace
from typing import Any

from checker.boat.catalogue import Catalogue
from checker.boat.entry import NOT_RECORDED, Entry
from checker.boat.hull import (
    Boat,
    Circuit,
    Condition,
    Conductor,
    Device,
    Engine,
    Joint,
    Shield,
    SwitchRow,
    Way,
    Zone,
)
from checker.boat.landing import End, Workmanship
from checker.boat.parts import Cable, Load, Overcurrent, Part, Source, Switch
from checker.boat.patch import Patched
from checker.boat.workmanship import known_flag, read_end, read_isolation, read_landings, read_workmanship
from checker.finding import Span
from checker.reading.document import Fault
from checker.reading.quantity import Dimension
from checker.units import Size

_POSITION = re.compile(r"(.*?)([0-9]{1,3})\Z")
MOST_POSITIONS = 200


@dataclass(slots=True)
class _Workshop:
    """Hold what has been built so far of one boat."""

    top: Entry
    catalogue: Catalogue
    usual: Workmanship = field(default_factory=Workmanship)
    zones: dict[str, Zone] = field(default_factory=dict)
    ways: dict[str, Way] = field(default_factory=dict)
    devices: dict[str, Device] = field(default_factory=dict)
    conductors: dict[str, Conductor] = field(default_factory=dict)
    circuits: dict[str, Circuit] = field(default_factory=dict)
    # position -> (bus it sits on, series it takes, post its circuits return to)
    positions: dict[str, tuple[str, str, str]] = field(default_factory=dict)
    posts: set[str] = field(default_factory=set)


def build_boat(source: Patched, class_id: str, catalogue: Catalogue) -> tuple[Boat | None, list[Fault]]:
    """Return the boat that assembled class data describe, or None, and what is wrong with the data."""
    faults: list[Fault] = []
    top = Entry(source, (), source.data, faults)
    shop = _Workshop(top, catalogue, read_workmanship(top))
    if not top.has("class"):
        top.fault("missing-field", top.at(), f"class “{class_id}” has no section “class”", "add it")
        return None, faults
    _build_places(shop)
    for row in top.entries("devices"):
        _add_device(shop, row)
    for row in top.entries("circuits"):
        _add_circuit(shop, row)
    for row in top.entries("conductors"):
        _add_conductor(shop, row)
    bonds = top.data.get("bonds", NOT_RECORDED)
    for row in top.entries("bonds"):
        _add_conductor(shop, row, is_bond=True)
    _name_posts(shop)
    _count_company(shop)
    _check_posts(shop)
    boat = _finish(shop, class_id, isinstance(bonds, dict))
    return (None if faults else boat), faults


def _build_places(shop: _Workshop) -> None:
    for row in shop.top.entries("zones"):
        ambient_c = row.needed_number("ambient", Dimension.TEMPERATURE)
        shop.zones[row.id] = Zone(
            id=row.id,
            name=row.text("name"),
            ambient_c=30.0 if ambient_c is None else ambient_c,
            is_engine_space=row.flag("engine_space"),
            has_petrol_vapour=row.flag("petrol_vapour"),
            has_cooking_gas=row.flag("cooking_gas"),
            is_wet=row.flag("wet"),
            has_bilge_water=known_flag(row, "bilge_water"),
            access=row.text("access"),
            has_hydrogen_vent=known_flag(row, "hydrogen_vent"),
            charge_limit_a=row.number("charge_limit", Dimension.CURRENT),
            has_fuel_parts=known_flag(row, "fuel_parts"),
            opens_to=_neighbours(shop, row),
            isolated_from=read_isolation(row, shop.top.fields("zones")),
            at=row.at(),
            at_petrol=row.at("petrol_vapour"),
        )
    for row in shop.top.entries("ways"):
        length_m = row.needed_number("length", Dimension.LENGTH)
        zone = _known(shop, row, "zone", shop.zones)
        if length_m is not None and zone:
            shop.ways[row.id] = Way(
                id=row.id,
                zone=zone,
                length_m=length_m,
                is_conduit=row.text("kind", "open") == "conduit",
                is_bundled=row.text("lay", "bundled") == "bundled",
                passage=row.text("passage", shop.usual.passages),
                ac=row.text("ac", shop.usual.ac),
                supports_m=row.number("supports", Dimension.LENGTH) if row.has("supports") else shop.usual.supports_m,
                at=row.at(),
                at_supports=row.at("supports") if row.has("supports") else shop.usual.at,
                at_passage=row.at("passage") if row.has("passage") else row.at(),
                at_ac=row.at("ac") if row.has("ac") else row.at(),
            )


def _neighbours(shop: _Workshop, row: Entry) -> tuple[str, ...]:
    """Return the zones that share air with a zone."""
    for index, name in enumerate(row.items("opens_to")):
        if name not in shop.top.fields("zones"):
            row.unknown("zone", name, row.at("opens_to", index), shop.top.fields("zones"))
    return row.items("opens_to")


def _known(shop: _Workshop, row: Entry, name: str, known: Any, what: str = "") -> str | None:
    """Return the id that a field names, if such a thing exists."""
    wanted = row.needed(name)
    if wanted is None:
        return None
    if wanted not in known:
        if wanted not in shop.top.fields(f"{name}s"):  # else it is told where it could not be built
            row.unknown(what or name, wanted, row.at(name), known)
        return None
    return wanted


def _add_device(shop: _Workshop, row: Entry) -> None:
    part_id = _known(shop, row, "part", shop.catalogue)
    zone = _known(shop, row, "zone", shop.zones)
    if part_id is None or zone is None:
        return
    part = shop.catalogue[part_id]
    at_rating = row.at("rating") if row.has("rating") else row.at("part")
    if isinstance(part, Cable):
        row.fault("bad-value", row.at("part"), f"“{part_id}” is a cable, not a device")
        return
    if isinstance(part, Overcurrent) and part.series:
        rating_a = row.needed_number("rating", Dimension.CURRENT)
        chosen = None if rating_a is None else _of_series(row, part, rating_a, row.at("rating"))
        if chosen is None:
            return
        part = chosen
    mounts = tuple((own, str(other)) for own, other in sorted(row.fields("mount").items()))
    for own, _ in mounts:
        if own not in part.posts:
            row.unknown(f"post on {row.id}", own, row.key_at("mount", own), part.posts)
    if row.has("regulates") and row.text("regulates") not in shop.top.fields("devices"):
        row.unknown("device", row.text("regulates"), row.at("regulates"), shop.top.fields("devices"))
    if row.has("trips_with") and row.text("trips_with") not in shop.top.fields("devices"):
        row.unknown("device", row.text("trips_with"), row.at("trips_with"), shop.top.fields("devices"))
    if row.has("measures") and row.text("measures") not in _banks(shop):
        row.unknown("bank", row.text("measures"), row.at("measures"), _banks(shop))
    shop.devices[row.id] = Device(
        id=row.id,
        part=part,
        zone=zone,
        bank=row.text("bank"),
        measures=row.text("measures"),
        belongs_to=row.text("belongs_to"),
        is_engine_mounted=row.flag("engine_mounted"),
        is_covered=row.flag("cover") if row.has("cover") else part.fittings.is_covered,
        is_marked=row.flag("marked") if row.has("marked") else _usual_mark(shop, part),
        regulates=row.text("regulates"),
        trips_with=row.text("trips_with"),
        returns=str(row.fields("positions").get("returns", "")),
        set_capacity_ah=row.quantity_at(("set", "capacity"), row.fields("set").get("capacity"), Dimension.CAPACITY),
        set_ratio=str(row.fields("set").get("ratio", "")),
        is_above_bilge_water=row.flag("above_bilge_water"),
        fuel_clearance_m=row.number("fuel_clearance", Dimension.LENGTH),
        is_fuel_shielded=row.flag("fuel_shielded"),
        is_in_line_with_fuel=known_flag(row, "in_line_with_fuel"),
        mounts=mounts,
        at=row.at(),
        at_rating=at_rating,
        at_set=row.at("set") if row.has("set") else row.at(),
    )
    _add_positions(shop, row)


def _usual_mark(shop: _Workshop, part: Part) -> bool | None:
    """Return what the workmanship says of the mark beside a fuse, breaker or hand switch; None for the rest."""
    if isinstance(part, Overcurrent):
        return shop.usual.fuse_marks
    return shop.usual.switch_marks if isinstance(part, Switch) and part.by_hand else None


def _banks(shop: _Workshop) -> set[str]:
    rows = shop.top.fields("devices").values()
    return {str(row["bank"]) for row in rows if isinstance(row, dict) and "bank" in row}


def _add_positions(shop: _Workshop, row: Entry) -> None:
    """Name the positions of a panel or fuse block: PNL-01 to PNL-38."""
    if not row.has("positions"):
        return
    given = row.fields("positions")
    first, last = (_POSITION.match(str(given.get(end, ""))) for end in ("first", "last"))
    takes = str(given.get("takes", ""))
    if not first or not last or first[1] != last[1] or len(first[2]) > len(last[2]):
        row.fault("bad-value", row.at("positions"), "positions run from a first to a last numbered id",
                  "write e.g. {first: PNL-01, last: PNL-38, …}")  # fmt: skip
        return
    if not isinstance(shop.catalogue.get(takes), Overcurrent):
        row.unknown("fuse or breaker part", takes, row.at("positions", "takes"), shop.catalogue)
        return
    numbers = range(int(first[2]), int(last[2]) + 1)
    if len(numbers) > MOST_POSITIONS:
        row.fault("bad-value", row.at("positions"), f"more than {MOST_POSITIONS} positions on one bus")
        return
    for number in numbers:
        name = f"{first[1]}{number:0{len(first[2])}d}"
        shop.positions[name] = (row.id, takes, str(given.get("returns", "")))


def _of_series(row: Entry, part: Overcurrent, rating_a: float, at: Span) -> Overcurrent | None:
    """Return the member of a series with a rating; a part of one rating stands for itself."""
    for member in part.series or (part,):
        if member.rating_a == rating_a:
            return replace(member, series=part.series)  # so that a remedy names a rating that is made
    made = ", ".join(f"{member.rating_a:g} A" for member in part.series or (part,))
    row.fault("unknown-reference", at, f"{part.id} is not made at {rating_a:g} A", f"made at: {made}")
    return None


def _add_circuit(shop: _Workshop, row: Entry) -> None:
    if row.has("conductors"):
        for name in ("feed", "cable", "load"):
            if row.has(name):
                row.fault("bad-value", row.key_at(name), f"circuit “{row.id}” has conductors of its own and “{name}”",
                          "a branch is written by feed, cable and load, a trunk by its conductors")  # fmt: skip
        _add_trunk(shop, row)
    else:
        _add_branch(shop, row)


def _add_trunk(shop: _Workshop, row: Entry) -> None:
    for wire in row.entries("conductors"):
        _add_conductor(shop, wire, circuit=row.id)
    shop.circuits[row.id] = Circuit(
        id=row.id,
        name=row.text("name"),
        service=row.needed("service", "general") or "general",
        current_a=row.needed_number("current", Dimension.CURRENT),
        conductors=tuple(sorted(row.fields("conductors"))),
        voltage_v=row.number("voltage", Dimension.VOLTAGE),
        always_on=row.text("always_on"),
        return_reason=row.text("return_reason"),
        at=row.at(),
        at_current=row.at("current"),
    )


def _add_branch(shop: _Workshop, row: Entry) -> None:
    """Expand a branch circuit: device at its position, cable out, switch, load, cable back."""
    zone = _known(shop, row, "zone", shop.zones)
    load_id = _known(shop, row, "load", shop.catalogue, "load part")
    feed = row.needed("feed", "PNL-01")
    if zone is None or load_id is None or feed is None:
        return
    load = shop.catalogue[load_id]
    if not isinstance(load, Load):
        row.fault("bad-value", row.at("load"), f"“{load_id}” is not a load", "name a part of kind load")
        return
    start, returns, device = _branch_feed(shop, row, feed)
    if not returns:
        row.fault("missing-field", row.at(), f"{row.words} has no “returns”", "name the post its return lands on")
        return
    shop.devices[f"{row.id}.load"] = Device(
        id=f"{row.id}.load", part=load, zone=zone, circuit=row.id, is_covered=load.fittings.is_covered,
        at=row.at("load"), at_rating=row.at("load"),
    )  # fmt: skip
    load_feed = _branch_switch(shop, row, zone, f"{row.id}.load.{load.feed_post}")
    out = _conductor(shop, row, f"{row.id}.out", (start, load_feed), circuit=row.id)
    if out is None:
        return
    back = _as_back(row, out, f"{row.id}.load.{load.return_post}", returns)
    if row.has("back"):
        other = Entry(row._source, (*row.path, "back"), {**_cable_fields(row), **row.fields("back")}, row._faults)
        built = _conductor(shop, other, back.id, (back.start, back.end), circuit=row.id)
        back = _as_back(row, built, back.start, back.end) if built else back
    shop.conductors[out.id] = replace(out, ends=_branch_ends(shop, row, "feed", "load"))
    shop.conductors[back.id] = replace(back, ends=_branch_ends(shop, row, "load_back", "back"))
    current_a = row.number("current", Dimension.CURRENT)
    shop.circuits[row.id] = Circuit(
        id=row.id,
        name=row.text("name"),
        service=row.text("service", "general"),
        current_a=load.current_a if current_a is None else current_a,
        conductors=(out.id, back.id),
        voltage_v=row.number("voltage", Dimension.VOLTAGE),
        load=f"{row.id}.load",
        device=device,
        always_on=row.text("always_on"),
        shares=row.text("shares"),
        return_reason=row.text("return_reason"),
        at=row.at(),
        at_current=row.at("current") if row.has("current") else row.at("load"),
    )


def _as_back(row: Entry, out: Conductor, start: str, end: str) -> Conductor:
    """Return the way back: like the way out, with the second colour of the cable."""
    colours = row.items("colours") or out.cable.core_colours
    name = f"{row.id}.back"
    return replace(out, id=name, start=start, end=end, colour=colours[1] if len(colours) > 1 else "",
                   label=row.text("label", name))  # fmt: skip


def _branch_ends(shop: _Workshop, row: Entry, start: str, end: str) -> tuple[End, End]:
    return read_end(row, start, shop.usual), read_end(row, end, shop.usual)


_LIKE_OUT = ("cable", "type", "bare_tail", "enclosed", "role", "reason", "place_reason", "supports")
_LENGTHS = ("length", "route", "tail")


def _cable_fields(row: Entry) -> dict[str, Any]:
    """Return what the way back has from the way out where it is not written: its length as a whole or not at all."""
    own = row.fields("back")
    names = _LIKE_OUT if any(name in own for name in _LENGTHS) else (*_LIKE_OUT, *_LENGTHS)
    return {name: row.data[name] for name in names if name in row.data}


def _branch_feed(shop: _Workshop, row: Entry, feed: str) -> tuple[str, str, str]:
    """Return the post a branch starts at, the post it returns to, and its device (or "")."""
    if feed not in shop.positions:
        return feed, row.text("returns"), ""
    bus, series_id, returns = shop.positions[feed]
    returns = row.text("returns", returns)
    series = shop.catalogue[series_id]
    rating_a = row.needed_number("protect", Dimension.CURRENT)
    if rating_a is None or not isinstance(series, Overcurrent):
        return f"{feed}.load", returns, ""
    legends = ((row.text("legend"), row.at("legend")),) if row.has("legend") else ()
    there = shop.devices.get(feed)
    if there is not None:
        there = replace(there, served=tuple(sorted((*there.served, row.id))))
        if isinstance(there.part, Overcurrent) and there.part.rating_a != rating_a:
            row.fault("bad-value", row.at("protect"),
                      f"{feed} is {rating_a:g} A here and {there.part.rating_a:g} A in circuit {there.circuit}",
                      "one position holds one device")  # fmt: skip
        shop.devices[feed] = replace(there, legends=(*there.legends, *legends))
        return f"{feed}.load", returns, feed
    part = _of_series(row, series, rating_a, row.at("protect"))
    if part is not None:
        zone = shop.devices[bus].zone
        shop.devices[feed] = Device(
            id=feed, part=part, zone=zone, circuit=row.id, mounts=(("line", bus),), served=(row.id,),
            is_covered=part.fittings.is_covered, is_marked=shop.usual.fuse_marks,
            at=row.at("feed"), at_rating=row.at("protect"), legends=legends,
        )  # fmt: skip
    return f"{feed}.load", returns, feed


def _branch_switch(shop: _Workshop, row: Entry, zone: str, load_feed: str) -> str:
    """Put a circuit's control switch at its load; return the post the cable out lands on."""
    if not row.has("switch"):
        return load_feed
    part_id = _known(shop, row, "switch", shop.catalogue, "switch part")
    part = shop.catalogue.get(part_id or "")
    if not isinstance(part, Switch):
        if part_id:
            row.fault("bad-value", row.at("switch"), f"“{part_id}” is not a switch")
        return load_feed
    name = f"{row.id}.switch"
    mounts = ((part.posts[-1], load_feed),)
    shop.devices[name] = Device(
        id=name, part=part, zone=zone, circuit=row.id, mounts=mounts, is_covered=part.fittings.is_covered,
        at=row.at("switch"),
    )  # fmt: skip
    return f"{name}.{part.posts[0]}"


def _add_conductor(shop: _Workshop, row: Entry, *, circuit: str = "", is_bond: bool = False) -> None:
    if row.id in shop.conductors:
        row.fault("repeated-key", row.at(), f"conductor “{row.id}” is written twice aboard",
                  f"the other one stands in {shop.conductors[row.id].at}")  # fmt: skip
        return
    ends = (row.needed("from", "BUS-N"), row.needed("to", "BUS-N"))
    if ends[0] is None or ends[1] is None:
        return
    built = _conductor(shop, row, row.id, (ends[0], ends[1]), circuit=circuit, is_bond=is_bond)
    if built is not None:
        shop.conductors[row.id] = built


def _conductor(
    shop: _Workshop, row: Entry, name: str, ends: tuple[str, str], *, circuit: str = "", is_bond: bool = False
) -> Conductor | None:
    """Build a conductor between two posts from the fields of its own row or of its branch circuit."""
    is_branch = row.has("cable")
    size = row.size("cable" if is_branch and not row.has("size") else "size")
    cable = _cable_type(shop, row, "branch_cable" if is_branch else "single_conductor")
    ways = _ways(shop, row)
    length = _length(row, ways)
    if size is None or cable is None or length is None:
        return None
    return _of_length(shop, row, name, ends, circuit, is_bond, size, cable, ways, length, is_branch)


def _of_length(
    shop: _Workshop, row: Entry, name: str, ends: tuple[str, str], circuit: str, is_bond: bool,
    size: Size, cable: Cable, ways: tuple[Way, ...], length: tuple[float, float | None, str], is_branch: bool,
) -> Conductor:  # fmt: skip
    length_m, route_m, length_field = length
    end_zones = [_zone_of(shop, end) for end in ends]
    zones = dict.fromkeys(z for z in (end_zones[0], *(way.zone for way in ways), end_zones[1]) if z)
    text = row.text(length_field) if length_field else ""
    colours = row.items("colours") or cable.core_colours
    supports_m, at_supports = _supports(shop, row, ways)
    return Conductor(
        id=name,
        start=ends[0],
        end=ends[1],
        size=size,
        cable=cable,
        length_m=length_m,
        length_unit="ft" if text.endswith(("ft", "in")) else "m",
        route_m=route_m,
        zones=tuple(zones),
        enclosed_m=_enclosed(row, cable, ways, length_m),
        ways=tuple(way.id for way in ways),
        role=row.text("role"),
        role_reason=row.text("reason"),
        place_reason=row.text("place_reason"),
        current_a=None if is_branch else row.number("current", Dimension.CURRENT),
        out_of_sheath_m=row.number("bare_tail", Dimension.LENGTH),
        circuit=circuit,
        is_bond=is_bond,
        colour=row.text("colour", colours[0] if colours else ""),
        is_colour_marked=row.flag("colour_marked"),
        label=row.text("label", name),
        labelled=row.text("labelled", shop.usual.labels),
        ends=(End(), End()) if is_branch else (read_end(row, "from", shop.usual), read_end(row, "to", shop.usual)),
        passage=row.text("passage", shop.usual.passages),
        supports_m=supports_m,
        at_supports=at_supports,
        at_colour=next((row.at(name) for name in ("colour", "colours") if row.has(name)), row.at()),
        at_label=row.at("label") if row.has("label") else row.at(),
        at_labelled=row.at("labelled") if row.has("labelled") else row.at(),
        at_passage=row.at("passage") if row.has("passage") else row.at(),
        at=row.at(),
        at_size=row.at("cable" if is_branch and not row.has("size") else "size"),
        at_length=row.at(length_field) if length_field else row.at(),
    )


def _supports(shop: _Workshop, row: Entry, ways: tuple[Way, ...]) -> tuple[float | None, Span]:
    """Return the largest spacing of a conductor's supports and where it stands; a conduit supports all along."""
    if row.has("supports"):
        return row.number("supports", Dimension.LENGTH), row.at("supports")
    spacings = [(way.supports_m, way.at_supports) for way in ways if not way.is_conduit]
    spacings.append((shop.usual.supports_m, shop.usual.at))  # the tails, or all of it
    known = [(spacing_m, at) for spacing_m, at in spacings if spacing_m is not None]
    if len(known) < len(spacings):
        return None, shop.usual.at
    return max(known)


def _cable_type(shop: _Workshop, row: Entry, default: str) -> Cable | None:
    if row.has("type"):
        name, at = row.text("type"), row.at("type")
    else:
        name, at = str(shop.top.fields("defaults").get(default, "")), shop.top.at("defaults", default)
        if not name:
            row.fault("missing-field", row.at(), f"{row.words} has no “type” and the class no default “{default}”",
                      "name the cable part")  # fmt: skip
            return None
    part = shop.catalogue.get(name)
    if not isinstance(part, Cable):
        row.unknown("cable part", name, at, (p for p, v in shop.catalogue.items() if isinstance(v, Cable)))
        return None
    return part


def _ways(shop: _Workshop, row: Entry) -> tuple[Way, ...]:
    found: list[Way] = []
    for index, name in enumerate(row.items("route")):
        if name in shop.ways:
            found.append(shop.ways[name])
        elif name not in shop.top.fields("ways"):
            row.unknown("way", name, row.at("route", index), shop.ways)
    return tuple(found)


def _length(row: Entry, ways: tuple[Way, ...]) -> tuple[float, float | None, str] | None:
    """Return the length, the routed length where there is a route, and the field a person would edit."""
    measured_m = row.number("length", Dimension.LENGTH)
    tail_m = row.number("tail", Dimension.LENGTH)
    route_m = None
    if ways or tail_m is not None:
        route_m = sum(way.length_m for way in ways) + (tail_m or 0.0)
    if measured_m is not None:
        return measured_m, route_m, "length"
    if route_m is not None:
        return route_m, route_m, "tail" if tail_m is not None else "route"
    row.fault("missing-field", row.at(), f"{row.words} has no length", "add “length”, or “route” and “tail”")
    return None


def _enclosed(row: Entry, cable: Cable, ways: tuple[Way, ...], length_m: float) -> float:
    """Return how much of a conductor lies in a sheath, sleeve or conduit."""
    if cable.is_sheathed or row.data.get("enclosed") == "full":
        return length_m
    covered_m = row.number("enclosed", Dimension.LENGTH) or 0.0
    conduit_m = sum(way.length_m for way in ways if way.is_conduit)
    return min(length_m, covered_m + conduit_m)


def _zone_of(shop: _Workshop, post: str) -> str:
    name = post
    while name:
        if name in shop.devices:
            return shop.devices[name].zone
        name = name.rpartition(".")[0]
    return ""


def _name_posts(shop: _Workshop) -> None:
    for device in shop.devices.values():
        shop.posts.update(f"{device.id}.{post}" if post else device.id for post in device.part.posts)


def _count_company(shop: _Workshop) -> None:
    """Count for each conductor the most that lie together in any of its bundled ways."""
    together: dict[str, int] = {}
    for conductor in shop.conductors.values():
        if not conductor.is_bond:
            for way in set(conductor.ways):
                together[way] = together.get(way, 0) + 1
    for name, conductor in shop.conductors.items():
        company = max(1, conductor.cable.cores)
        for way in conductor.ways:
            if shop.ways[way].is_bundled:
                company = max(company, together.get(way, 1))
        if company > 1:
            shop.conductors[name] = replace(conductor, company=company)


def _check_posts(shop: _Workshop) -> None:
    """Refuse conductors and mounts that end at a post that no part has."""
    for conductor in shop.conductors.values():
        for post in (conductor.start, conductor.end):
            if post not in shop.posts:
                _unknown_post(shop, post, conductor.at, conductor.id)
    for device in shop.devices.values():
        for _, post in device.mounts:
            if post not in shop.posts:
                _unknown_post(shop, post, device.at, device.id)


def _unknown_post(shop: _Workshop, post: str, at: Span, user: str) -> None:
    owner = post
    while owner and owner not in shop.devices:
        owner = owner.rpartition(".")[0]
    first = post.partition(".")[0]
    if not owner and any(first in shop.top.fields(section) for section in ("devices", "circuits")):
        return  # it is written, but could not be built: that is told where it stands
    if owner:
        posts = shop.devices[owner].part.posts
        named = ", ".join(f"{owner}.{name}" if name else owner for name in posts)
        message, remedy = f"{user} ends at “{post}”, but {owner} has no such post", f"its posts: {named}"
        shop.top.fault("unknown-reference", at, message, remedy)
    else:
        shop.top.unknown(f"post for {user}", post, at, shop.posts)


def _finish(shop: _Workshop, class_id: str, bonds_recorded: bool) -> Boat:
    top = shop.top
    head = Entry(top._source, ("class",), top.fields("class"), top._faults)
    reference = head.needed("reference", "BUS-N") or ""
    if reference and reference not in shop.posts:
        head.unknown("post", reference, head.at("reference"), shop.posts)
    facts = top.fields("facts")
    return Boat(
        class_id=class_id,
        class_name=head.text("name"),
        revision=head.whole("revision"),
        system_voltage_v=head.needed_number("system_voltage", Dimension.VOLTAGE) or 0.0,
        reference=reference,
        zones=shop.zones,
        ways=shop.ways,
        devices=dict(sorted(shop.devices.items())),
        conductors=dict(sorted(shop.conductors.items())),
        joints=tuple(_joint(shop, row) for row in top.entries("joints")),
        shields=_shields(shop),
        bonds_recorded=bonds_recorded,
        circuits=shop.circuits,
        switch_rows=_switch_rows(shop),
        conditions={row.id: _condition(shop, row) for row in top.entries("conditions")},
        engines=tuple(_engine(shop, row) for row in _facts_entry(top).entries("engines")),
        generator_fuel=str(facts.get("generator_fuel", "none")),
        has_ac=bool(facts["ac_aboard"]) if "ac_aboard" in facts else None,
        monitored=_monitored(shop),
        workmanship=shop.usual,
        landings=read_landings(top, shop.posts, shop.conductors),
        at_facts=top.at("facts") if facts else head.at(),
        at=head.at(),
        at_bonds=top.at("bonds") if top.has("bonds") else head.at(),
        at_shields=top.at("shields") if top.has("shields") else head.at(),
        at_engines=top.at("facts", "engines") if facts.get("engines") else head.at(),
    )


def _monitored(shop: _Workshop) -> tuple[str, ...] | None:
    """Return the banks whose charge is counted, None where it is not recorded."""
    row = _facts_entry(shop.top)
    if not row.has("monitored"):
        return None
    for index, name in enumerate(row.items("monitored")):
        if name not in _banks(shop):
            row.unknown("bank", name, row.at("monitored", index), _banks(shop))
    return row.items("monitored")


def _facts_entry(top: Entry) -> Entry:
    return Entry(top._source, ("facts",), top.fields("facts"), top._faults)


def _joint(shop: _Workshop, row: Entry) -> Joint:
    ends = [row.text("from"), row.text("to")]
    for name, post in zip(("from", "to"), ends, strict=True):
        if post not in shop.posts:
            _unknown_post(shop, post, row.at(name), row.id)
    resistance_ohm = row.number("resistance", Dimension.RESISTANCE) or 0.0
    return Joint(id=row.id, start=ends[0], end=ends[1], resistance_ohm=resistance_ohm, at=row.at())


def _shields(shop: _Workshop) -> tuple[Shield, ...] | None:
    if not isinstance(shop.top.data.get("shields", NOT_RECORDED), dict):
        return None
    found: list[Shield] = []
    for row in shop.top.entries("shields"):
        joins = row.data.get("joins", NOT_RECORDED)
        if isinstance(joins, list):
            for index, post in enumerate(joins):
                if post not in shop.posts:
                    _unknown_post(shop, str(post), row.at("joins", index), row.id)
        found.append(Shield(id=row.id, joins=tuple(joins) if isinstance(joins, list) else None, at=row.at()))
    return tuple(found)


def _positions_of(shop: _Workshop, row: Entry, name: str = "switches") -> tuple[tuple[str, str], ...]:
    """Read switch states, each held against what the switch's part can do."""
    found: list[tuple[str, str]] = []
    for switch, state in sorted(row.fields(name).items()):
        device = shop.devices.get(switch)
        if device is None or not isinstance(device.part, Switch):
            known = [d for d, v in shop.devices.items() if isinstance(v.part, Switch)]
            row.unknown("switch", switch, row.key_at(name, switch), known)
            continue
        states = [known for known, _ in device.part.states]
        if state not in states:
            row.unknown(f"state of {switch}", str(state), row.at(name, switch), states)
            continue
        found.append((switch, str(state)))
    return tuple(found)


def _switch_rows(shop: _Workshop) -> tuple[SwitchRow, ...]:
    rows = tuple(_switch_row(shop, row) for row in shop.top.entries("states"))
    if rows and all(row.kind == "forbidden" for row in rows):
        shop.top.fault("bad-value", shop.top.at("states"), "every state is forbidden, so the boat can be in none",
                       "add a state of kind normal")  # fmt: skip
    return rows


def _switch_row(shop: _Workshop, row: Entry) -> SwitchRow:
    kind = row.needed("kind", "normal") or "normal"
    return SwitchRow(id=row.id, kind=kind, switches=_positions_of(shop, row), at=row.at())


def _condition(shop: _Workshop, row: Entry) -> Condition:
    closed = row.items("closed")
    for index, name in enumerate(closed):
        device = shop.devices.get(name)
        if device is None or not isinstance(device.part, Switch):
            row.unknown("relay or contactor", name, row.at("closed", index), shop.devices)
    return Condition(
        id=row.id,
        switches=_positions_of(shop, row),
        closed=closed,
        loads_a=_currents(shop, row, "loads"),
        sources_a=_currents(shop, row, "sources"),
        holds_v=_held(row),
        short_time_s=row.number("short_time", Dimension.TIME),
        judges_drop=row.flag("judge_drop", default=True),
        at=row.at(),
    )


def _currents(shop: _Workshop, row: Entry, name: str) -> tuple[tuple[str, float], ...]:
    """Read currents by circuit, device, or output or input of a source."""
    found: list[tuple[str, float]] = []
    for key, value in sorted(row.fields(name).items()):
        if not _can_run(shop, key, name):
            row.unknown("circuit, load or source", key, row.key_at(name, key), [*shop.circuits, *shop.devices])
            continue
        current_a = row.quantity_at((name, key), value, Dimension.CURRENT)
        if current_a is not None:
            found.append((key, current_a))
    return tuple(found)


def _held(row: Entry) -> tuple[tuple[str, float], ...]:
    """Read the voltages that sources hold; each must have its largest current under `sources`."""
    found: list[tuple[str, float]] = []
    for key, value in sorted(row.fields("holds").items()):
        if key not in row.fields("sources"):
            row.unknown("source with a current under `sources`", key, row.key_at("holds", key), row.fields("sources"))
            continue
        volts = row.quantity_at(("holds", key), value, Dimension.VOLTAGE)
        if volts == 0:
            row.fault("bad-value", row.at("holds", key), f"{key} holds 0 V", "leave it out, or give its voltage")
        elif volts is not None:
            found.append((key, volts))
    return tuple(found)


def _can_run(shop: _Workshop, key: str, name: str) -> bool:
    circuit = shop.circuits.get(key)
    if circuit is not None and circuit.load and name == "loads":
        return True
    device = shop.devices.get(key)
    if device is not None:
        return isinstance(device.part, (Load, Source) if name == "loads" else Source)
    owner, _, post = key.rpartition(".")
    device = shop.devices.get(owner)
    if device is None or not isinstance(device.part, Source):
        return False
    ends = device.part.inputs if name == "loads" else device.part.outputs
    return any(end.post == post for end in ends)


def _engine(shop: _Workshop, row: Entry) -> Engine:
    block: str | None = row.text("block", NOT_RECORDED)
    if block == NOT_RECORDED:
        block = None
    elif block not in shop.devices:
        row.unknown("device", str(block), row.at("block"), shop.devices)
    return Engine(id=row.id, fuel=row.text("fuel", "none"), mounting=row.text("mounting"), block=block, at=row.at())
