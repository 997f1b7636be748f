"""Ask what is lost when a switch opens, when everything is off, and when a return comes loose."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from checker.boat.hull import Boat
from checker.boat.parts import Switch
from checker.network.conditions import CONSTANT_POWER, Operation
from checker.network.exposure import find_bridges
from checker.network.flow import Copper, Flow, Grid
from checker.network.graph import Edge, EdgeKind, Network, SourceTie
from checker.network.potentials import Potentials, study_potentials
from checker.network.states import SwitchState, live_edges, places, places_beyond
from checker.network.walk import neighbours


def all_off_state(boat: Boat) -> SwitchState:
    """Return the state with every hand switch closing least, and every relay too."""
    closed: set[tuple[str, str, str]] = set()
    for device in boat.devices.values():
        if isinstance(device.part, Switch):
            least = min(device.part.states, key=lambda row: (len(row[1]), row[0]))
            closed |= {(device.id, a, b) for a, b in least[1]}
    return SwitchState("all switches off", True, frozenset(closed), "all switches off")


def live_loads(network: Network, potentials: Potentials) -> frozenset[str]:
    """Return the loads and converter inputs that a battery feeds in a state, over live converters too."""
    reached = live_nets(network, potentials)
    return frozenset(load.device for load in network.loads if potentials.net[load.feed] in reached)


def live_nets(network: Network, potentials: Potentials) -> frozenset[int]:
    """Return the nets that a battery holds at a voltage in a state, over live converters too."""
    net = potentials.net
    reached = {net[b.pos] for b in network.batteries if not potentials.is_return(b.pos)}
    while True:
        reached = set(places_beyond(network, net, reached))
        running = {tie.device for tie in network.loads if tie.is_input and net[tie.feed] in reached}
        fed = {net[source.out] for source in network.sources if source.device in running} - reached
        if not fed:
            return frozenset(reached)
        reached |= fed


def cut_off_sources(network: Network, states: Sequence[SwitchState]) -> list[tuple[SourceTie, SwitchState]]:
    """Return each source that some switch state parts from every battery, with the first such state.

    Asked of the sources that reach a battery in some state; an array behind its controller
    never does.
    """
    tops = [battery.pos for battery in network.batteries]
    lost: dict[SourceTie, SwitchState] = {}
    reaching: set[SourceTie] = set()
    for state in states:
        net = places(network, state, ())
        reached = {net[post] for post in tops}
        for source in network.sources:
            if places_beyond(network, net, [net[source.out]]) & reached:
                reaching.add(source)
            else:
                lost.setdefault(source, state)
    return [(source, lost[source]) for source in network.sources if source in lost and source in reaching]


def idle_diodes(network: Network, potentials: Sequence[Potentials]) -> frozenset[int]:
    """Return the diodes that nothing can feed, or that lead to nothing that draws, in every state."""
    idle = {edge.index for edge in network.diodes}
    for one in potentials:
        giving = {one.net[b.pos] for b in network.batteries} | {one.net[s.out] for s in network.sources}
        taking = {one.net[b.pos] for b in network.batteries} | {one.net[tie.feed] for tie in network.loads}
        for edge in network.diodes:
            beyond = places_beyond(network, one.net, [one.net[edge.b]])
            if beyond & taking and places_beyond(network, one.net, giving) & {one.net[edge.a]}:
                idle.discard(edge.index)
    return frozenset(idle)


@dataclass(frozen=True, slots=True)
class Diverted:
    """Hold what another path carries once a heavy return is open."""

    opened: str
    part: str
    current_a: float
    condition: str


def diverted_currents(
    network: Network, operations: Sequence[Operation], flows: Sequence[Flow], copper: Copper, heavy_a: float
) -> list[Diverted]:
    """Open in turn each heavy return that has others beside it, and find what these then carry.

    Only returns in a ring are asked: a return without another beside it takes its load with it.
    Loads are taken as resistances, since a motor behind a bad return draws less. What carries
    no more than with the return in place is left out.
    """
    worst: dict[tuple[str, str], Diverted] = {}
    for edge, operation, usual in _candidates(network, operations, flows, heavy_a):
        shunts = tuple(draw for draw in operation.draws if draw.model != CONSTANT_POWER)
        draws = tuple(draw for draw in operation.draws if draw.model == CONSTANT_POWER)
        out = frozenset((edge.index,))
        grid = Grid(network, operation.state, copper, is_full=True, without=out, shunts=shunts, with_shields=True)
        flow = grid.solve(draws, operation.feeds)
        if not isinstance(flow, Flow):
            continue
        for index, current_a in flow.currents_a.items():
            other = network.edges[index]
            key = (edge.part, other.part)
            is_path = other.kind in (EdgeKind.CONDUCTOR, EdgeKind.BOND, EdgeKind.SHIELD)
            is_more = abs(current_a) > abs(usual.currents_a.get(index, 0.0)) * (1 + 1e-6)
            if is_path and is_more and (key not in worst or abs(current_a) > worst[key].current_a):
                worst[key] = Diverted(edge.part, other.part, abs(current_a), operation.condition.id)
    return [worst[key] for key in sorted(worst)]


def _candidates(
    network: Network, operations: Sequence[Operation], flows: Sequence[Flow], heavy_a: float
) -> list[tuple[Edge, Operation, Flow]]:
    """Return each heavy return edge in a ring with the condition in which it carries most."""
    most: dict[int, tuple[float, Operation, Flow]] = {}
    rings: dict[object, frozenset[int]] = {}
    for operation, flow in zip(operations, flows, strict=True):
        closed = operation.state.closed
        if closed not in rings:
            potentials = study_potentials(network, operation.state)
            back = [i for i in live_edges(network, operation.state) if potentials.is_return(network.edges[i].a)]
            at = neighbours(network, back)
            rings[closed] = frozenset(back) - find_bridges(network, at)
        for index in rings[closed]:
            current_a = abs(flow.currents_a.get(index, 0.0))
            if current_a >= heavy_a and current_a > most.get(index, (0.0,))[0]:
                most[index] = (current_a, operation, flow)
    return [(network.edges[index], *most[index][1:]) for index in sorted(most)]
