"""Judge how panels are used: positions, returns, lights, radios."""

from __future__ import annotations

from collections.abc import Iterator

from checker.boat.hull import Boat, Circuit, Device
from checker.boat.parts import Bus, Load, Part
from checker.checks.check import Case, Place, Told, check
from checker.checks.landed import landed
from checker.finding import Basis, Level, Measure, Outcome
from checker.limits.panel_rule import panel_rule
from checker.network.apart import Parting, loads_of_one_device


def _at(circuit: Circuit) -> Place:
    return Place(circuit.id, circuit.at, circuit.id)


def _name(circuit: Circuit) -> str:
    return f"{circuit.id} {circuit.name}".strip()


# --- positions


@check(
    title="A position serves one circuit, and a circuit hangs on one position",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source; 46 CFR § 28.860(c) as a principle",
    why="the wrong breaker is switched off, and what is worked on stays live",
    catalogue=("PAN-03",),
    exemptions="circuits that each give their reason as `shares`",
    caution="hold a tester to a conductor before it is touched",
)
def position_use(case: Case) -> Iterator[Outcome]:
    """Does each position of a panel or fuse block serve one circuit, and each circuit hang on one position?

    Circuits that share a position on purpose say why as `shares`, each of them.
    """
    on = _circuits_on_positions(case.boat)
    for name, circuits in on.items():
        device = case.boat.devices[name]
        silent = [circuit for circuit in circuits if not circuit.shares]
        if len(circuits) == 1 or not silent:
            reasons = "; ".join(dict.fromkeys(circuit.shares for circuit in circuits))
            shared = ", ".join(circuit.id for circuit in circuits)
            note = f"{shared} share it: {reasons}" if len(circuits) > 1 else ""
            yield position_use.passed(case, Place(name, device.at, device.circuit), note)
            continue
        told = Told(
            fault=f"it serves {len(circuits)} circuits: {', '.join(map(_name, circuits))}",
            remedy=f"give {silent[-1].id} a position of its own, or write in each why they share it, as `shares`",
            inputs=(("position", name), ("circuits", " ".join(circuit.id for circuit in circuits))),
            also_at=tuple(circuit.at for circuit in circuits if circuit is not silent[-1]),
        )
        yield position_use.found(case, Place(name, silent[-1].at, silent[-1].id), told)
    yield from _spread_circuits(case, on)


def _circuits_on_positions(boat: Boat) -> dict[str, list[Circuit]]:
    """Return the circuits on each position: the branches fed there, and what else lands on its load post."""
    found = {device.id: list(device.served) for device in boat.devices.values() if device.served}
    for conductor in boat.conductors.values():
        for post in (conductor.start, conductor.end):
            name = post.removesuffix(".load")
            if name != post and name in found and conductor.circuit and conductor.circuit not in found[name]:
                found[name].append(conductor.circuit)
    return {name: [boat.circuits[circuit] for circuit in sorted(circuits)] for name, circuits in found.items()}


def _spread_circuits(case: Case, on: dict[str, list[Circuit]]) -> Iterator[Outcome]:
    """Tell circuits that hang on several positions."""
    positions: dict[str, list[str]] = {}
    for name, circuits in on.items():
        for circuit in circuits:
            positions.setdefault(circuit.id, []).append(name)
    for circuit_id, names in sorted(positions.items()):
        if len(names) < 2:
            continue
        circuit = case.boat.circuits[circuit_id]
        told = Told(
            fault=f"it hangs on {' and '.join(names)}: switching one off leaves it live",
            remedy="feed it from one position, or write the parts of it as circuits of their own",
            inputs=(("circuit", circuit_id), ("positions", " ".join(names))),
        )
        yield position_use.found(case, _at(circuit), told)


# --- returns


@check(
    title="A circuit returns to the panel that feeds it",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="the returns carry what no feed of their panel does, and work on one panel leaves the other live",
    level=Level.WARNING,
    catalogue=("PAN-04",),
    exemptions="a circuit that gives its reason as `return_reason`",
)
def panel_return(case: Case) -> Iterator[Outcome]:
    """Does what is fed from a panel return to the bar of that panel?

    The bar is what the panel's `positions` name as `returns`. A trunk circuit that begins on a
    panel is looked at by its own return conductors.
    """
    unsaid: dict[str, Device] = {}
    for circuit in case.boat.circuits.values():
        panel = _panel_of(case.boat, circuit)
        back = "" if panel is None else _return_post(case, circuit, panel)
        if panel is None or not back:
            continue
        if not panel.returns:
            unsaid.setdefault(panel.id, panel)
        elif back == panel.returns:
            yield panel_return.passed(case, _at(circuit))
        elif circuit.return_reason:
            yield panel_return.passed(case, _at(circuit), f"returns to {back}: {circuit.return_reason}")
        else:
            told = Told(
                fault=f"fed from {panel.id}, it returns to {back} and not to {panel.returns}",
                remedy=f"land its return on {panel.returns}, or write why not as `return_reason`",
                inputs=(("panel", panel.id), ("returns to", back), ("bar", panel.returns)),
            )
            yield panel_return.found(case, _at(circuit), told)
    for panel in unsaid.values():
        fault = "where the circuits of this panel return to is not recorded"
        yield panel_return.not_assessed(case, Place(panel.id, panel.at), fault, "positions: returns")


def _panel_of(boat: Boat, circuit: Circuit) -> Device | None:
    """Return the panel bus that feeds a circuit: over its position, or where a trunk circuit begins."""
    starts = {boat.conductors[name].start for name in circuit.conductors}
    if circuit.device:
        starts = {post for _, post in boat.devices[circuit.device].mounts}
    panels = _panels(boat)
    return next((panels[post] for post in sorted(starts) if post in panels), None)


def _panels(boat: Boat) -> dict[str, Device]:
    """Return the buses with positions, by id."""
    in_use = {post for device in boat.devices.values() if device.served for _, post in device.mounts}
    return {name: device for name, device in boat.devices.items() if device.returns or name in in_use}


def _return_post(case: Case, circuit: Circuit, panel: Device) -> str:
    """Return the post that a circuit returns to: the panel's bar where it lands there, "" where it has no return."""
    index, usual = case.studies.network.index, case.studies.usual
    own = (case.boat.conductors[name] for name in circuit.conductors)
    ends = [post for c in own for post in (c.start, c.end) if usual.is_return(index[c.start])]
    if panel.returns in ends:
        return panel.returns
    beyond = [post for post in ends if not isinstance(_part_at(case.boat, post), Load)]
    return next((post for post in beyond if isinstance(_part_at(case.boat, post), Bus)), next(iter(beyond), ""))


def _part_at(boat: Boat, post: str) -> Part | None:
    device = boat.device_of(post)
    return None if device is None else device.part


@check(
    title="A negative bar has a screw for each return",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    formula="conductors under the screws of the bar ≤ its screws",
    why="two returns end under one screw, and a third circuit goes dead when one is taken off",
    level=Level.NOTE,
    catalogue=("PAN-09",),
    exemptions="bars without screws, whose returns lie on studs and are counted there",
)
def return_screws(case: Case) -> Iterator[Outcome]:
    """Has every bar at least as many screws as branch circuits land on it?"""
    under: dict[str, int] = {}
    unknown: dict[str, Device] = {}
    for one in landed(case):
        part = one.device.part
        if one.on_screw:
            under[one.device.id] = under.get(one.device.id, 0) + 1
        elif (
            isinstance(part, Bus)
            and part.screws is None
            and part.studs is None
            and _is_branch(case, one.conductor.circuit)
        ):
            unknown.setdefault(part.id, one.device)
    for name, count in sorted(under.items()):
        device = case.boat.devices[name]
        assert isinstance(device.part, Bus)
        screws = device.part.screws or 0
        told = Told(
            fault=f"{count} conductors lie under its {screws} screws",
            remedy=f"a bar with {count} screws or more, or a second bar joined to it",
            inputs=(("conductors", str(count)), ("screws", str(screws))),
        )
        measure = Measure("returns", count, screws, "screws", is_stepped=True)
        yield return_screws.judge(case, Place(name, device.at), measure, lambda told=told: told)  # type: ignore[misc]
    for device in unknown.values():
        fault = f"returns land on {device.id}, how many screws it has is not recorded"
        yield return_screws.not_assessed(case, Place(device.part.id, device.part.at), fault, "screws, or studs")


def _is_branch(case: Case, circuit: str) -> bool:
    found = case.boat.circuits.get(circuit)
    return found is not None and bool(found.load)


# --- lights and radios


def _loads_of(case: Case, circuit: Circuit) -> list[str]:
    """Return the loads of a circuit: its own, or what its conductors end at."""
    if circuit.load:
        return [circuit.load]
    posts = (post for name in circuit.conductors for post in (case.boat.conductors[name].start,
                                                              case.boat.conductors[name].end))  # fmt: skip
    devices = (case.boat.device_of(post) for post in posts)
    return sorted({device.id for device in devices if device is not None and isinstance(device.part, Load)})


def _owners(case: Case) -> dict[str, Circuit]:
    """Return the circuit of each load."""
    if "owners" not in case.memo:
        case.memo["owners"] = {
            load: circuit for circuit in case.boat.circuits.values() for load in _loads_of(case, circuit)
        }
    found: dict[str, Circuit] = case.memo["owners"]
    return found


def _company(case: Case) -> dict[str, tuple[str, ...]]:
    """Return for each load what hangs behind the same device."""
    if "company" not in case.memo:
        case.memo["company"] = loads_of_one_device(case.studies.network, case.studies.usual.state)
    found: dict[str, tuple[str, ...]] = case.memo["company"]
    return found


def _words(case: Case, load: str) -> str:
    circuit = _owners(case).get(load)
    return load if circuit is None else f"{_name(circuit)} ({circuit.service})"


UNPROTECTED = "no device stands ahead of it, which is told elsewhere"


@check(
    title="Navigation and anchor lights are switched apart, and share a device with lights only",
    basis=Basis.FROM_MEMORY,
    citation="46 CFR § 28.860(f) (second hand), as a principle",
    why="the boat shows the wrong lights, or none because a lamp in the galley failed",
    level=Level.WARNING,
    catalogue=("PAN-08",),
    needs=("panels",),
    exemptions="lights on one breaker behind a switch that shows them one at a time",
)
def light_circuits(case: Case) -> Iterator[Outcome]:
    """Can the anchor light be lit without the navigation lights and these without it, and do they stand alone?

    Two lights are apart where a breaker, a position or a contact puts one out and leaves the
    other lit, or where a switch shows one at a time. A fuse is drawn, not switched.
    """
    rule = panel_rule(case.house.common)
    lights = [c for c in case.boat.circuits.values() if c.service in rule.light_services and _loads_of(case, c)]
    parting = Parting(case.boat, case.studies.network, case.studies.states.kept)
    for circuit in lights:
        faults = [*_strangers(case, circuit, rule.light_services)]
        if circuit.service in rule.anchor_services:
            shown_under_way = [c for c in lights if c.service not in rule.anchor_services]
            faults += _stuck_together(case, circuit, shown_under_way, parting)
        for told in faults:
            yield light_circuits.found(case, _at(circuit), told)
        if not faults:
            alone = all(load in _company(case) for load in _loads_of(case, circuit))
            yield light_circuits.passed(case, _at(circuit), "" if alone else UNPROTECTED)


def _strangers(case: Case, circuit: Circuit, services: tuple[str, ...]) -> Iterator[Told]:
    """Tell what else hangs behind the device of a circuit's loads, other than some services."""
    others = sorted({
        other
        for load in _loads_of(case, circuit)
        for other in _company(case).get(load, ())
        if other not in _loads_of(case, circuit) and _service(case, other) not in services
    })  # fmt: skip
    if others:
        owners = _owners(case)
        names = ", ".join(_words(case, other) for other in others)
        away = ", ".join(owners[other].id if other in owners else other for other in others)
        yield Told(
            fault=f"the device ahead of it feeds {names} as well",
            remedy=f"move {away} to {'a device of its' if len(others) == 1 else 'devices of their'} own",
            inputs=(("shares with", " ".join(others)),),
        )


def _service(case: Case, load: str) -> str:
    circuit = _owners(case).get(load)
    return "" if circuit is None else circuit.service


def _stuck_together(case: Case, anchor: Circuit, others: list[Circuit], parting: Parting) -> list[Told]:
    """Tell with which lights an anchor light is always lit, or out."""
    stuck = [
        other
        for other in others
        if not all(
            parting.is_fed_alone(one, two) and parting.is_fed_alone(two, one)
            for one in _loads_of(case, anchor)
            for two in _loads_of(case, other)
        )
    ]
    if not stuck:
        return []
    names = ", ".join(map(_name, stuck))
    return [
        Told(
            fault=f"it cannot be switched apart from {names}",
            remedy="give it a position of its own, or a switch that shows one at a time",
            inputs=(("with", " ".join(c.id for c in stuck)),),
        )
    ]


@check(
    title="A radio has an overcurrent device of its own",
    basis=Basis.FROM_MEMORY,
    citation="46 CFR § 28.860(g) (second hand), as a principle",
    why="the distress call is lost because another load opened its device",
    level=Level.WARNING,
    catalogue=("PAN-10",),
    needs=("panels",),
)
def radio_device(case: Case) -> Iterator[Outcome]:
    """Does the device ahead of every radio feed nothing else?"""
    for circuit in case.boat.circuits.values():
        if circuit.service not in panel_rule(case.house.common).lone_services or not _loads_of(case, circuit):
            continue
        faults = list(_strangers(case, circuit, ()))
        for told in faults:
            yield radio_device.found(case, _at(circuit), told)
        if not faults:
            alone = all(load in _company(case) for load in _loads_of(case, circuit))
            yield radio_device.passed(case, _at(circuit), "" if alone else UNPROTECTED)
