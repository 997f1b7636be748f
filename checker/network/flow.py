"""Solve a boat's network: every voltage and every current, in one condition.

Batteries are an EMF behind a resistance; conductors, devices, contacts and shunts are
resistances; loads and sources draw and feed a current, and a load whose current depends on
its voltage is found by a few Newton steps. The conductances of one switch state are
factorised once; each condition is then one more right-hand side.

Posts with no resistance between them are one place. Currents through what has no resistance
follow from Kirchhoff's current law where it forms no loop.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import cached_property

from checker.network.conditions import CONSTANT_CURRENT, CONSTANT_POWER, RESISTIVE, Draw, Feed
from checker.network.elimination import Factor
from checker.network.graph import BatteryTie, Cell, Edge, EdgeKind, LoadTie, Network
from checker.network.ports import SETTLED_V, STIFF, holding_draw, port_currents
from checker.network.states import SwitchState, leading_to, live_edges, places, places_beyond
from checker.network.walk import groups

MOST_TURNS = 200


@dataclass(frozen=True, slots=True)
class Copper:
    """Hold the resistivity of the conductors at the temperature of the study."""

    ohm_mm2_per_m: float

    def resistance_ohm(self, edge: Edge) -> float:
        """Return the resistance of an edge."""
        if edge.area_mm2:
            return self.ohm_mm2_per_m * edge.length_m / edge.area_mm2
        return edge.resistance_ohm


class Grid:
    """Hold the factorised network of one switch state, at one temperature and state of charge.

    `without` are edges taken out, for the studies of a loss; `shunts` are loads that are plain
    resistances and always on, so that they need no step of Newton's. Shields count only where
    asked. Batteries whose figures are missing are left out; `missing` names them.
    """

    def __init__(
        self,
        network: Network,
        state: SwitchState,
        copper: Copper,
        *,
        is_full: bool,
        without: frozenset[int] = frozenset(),
        without_batteries: frozenset[str] = frozenset(),
        conducting: frozenset[int] = frozenset(),
        shunts: tuple[Draw, ...] = (),
        with_shields: bool = False,
    ) -> None:
        self.network = network
        self.state = state
        self._with_diodes: dict[frozenset[int], Grid] = {conducting: self}

        def sibling(conducting: frozenset[int]) -> Grid:
            return Grid(
                network, state, copper, is_full=is_full, without=without, without_batteries=without_batteries,
                conducting=conducting, shunts=shunts, with_shields=with_shields,
            )  # fmt: skip

        self._sibling = sibling
        self._diodes = [edge for edge in network.diodes if edge.index not in without]
        self._on = [edge for edge in self._diodes if edge.index in conducting]
        live = [network.edges[i] for i in live_edges(network, state) if i not in without]
        # A shield has no known resistance: counted on, it would ease the return beside it.
        self._edges = [e for e in live if with_shields or e.kind is not EdgeKind.SHIELD] + self._on
        self._ohm = {edge.index: copper.resistance_ohm(edge) for edge in self._edges}
        free = ((e.a, e.b) for e in self._edges if self._ohm[e.index] == 0)
        self.place = groups(len(network.posts), free)
        self.cells: list[tuple[BatteryTie, Cell]] = []
        missing: list[str] = []
        for battery in network.batteries:
            cell = battery.full if is_full else battery.low
            if cell is None:
                missing.append(battery.device)
            elif battery.device not in without_batteries:
                self.cells.append((battery, cell))
        self.missing = tuple(missing)
        self.resistive = [(e, 1 / self._ohm[e.index]) for e in self._edges if self._ohm[e.index] > 0]
        links = [(self.place[e.a], self.place[e.b], siemens) for e, siemens in self.resistive]
        links += [(self.place[b.pos], self.place[b.neg], 1 / cell.resistance_ohm) for b, cell in self.cells]
        # Places that conductances join; each island needs one place whose voltage is given.
        self.island = groups(len(network.posts), ((a, b) for a, b, _ in links))
        self.home = self.island[self.place[network.reference]]
        self.shunts = [draw for draw in shunts if self._is_fed(draw)]
        links += [
            (self.place[draw.feed], self.place[draw.back], draw.current_a / draw.nominal_v) for draw in self.shunts
        ]
        self.factor = Factor(len(network.posts), links, self._grounds())

    def _grounds(self) -> list[int]:
        """Return one place to ground in each island: the reference in its own, else the smallest."""
        grounds = {self.home: self.place[self.network.reference]}
        for place in self.place:
            grounds.setdefault(self.island[place], place)
        return sorted(set(grounds.values()))

    @cached_property
    def _powered(self) -> frozenset[int]:
        """Return the islands that have a battery."""
        return frozenset(self.island[self.place[battery.pos]] for battery, _ in self.cells)

    @cached_property
    def _inputs(self) -> dict[int, LoadTie]:
        """Return for each island without a battery the converter input that holds its voltage."""
        found: dict[int, LoadTie] = {}
        for tie in self.network.loads:
            island = self.island[self.place[tie.feed]]
            if tie.is_input and island not in self._powered and island != self.home:
                found.setdefault(island, tie)
        return found

    def _possible(self, draws: Sequence[Draw], feeds: Sequence[Feed]) -> tuple[list[Draw], list[Feed], frozenset[int]]:
        """Leave out loads that nothing can feed and sources that nothing can take from.

        An array feeds the input of its controller: that input draws what the array gives,
        where the condition does not name it. Also returns the islands that such inputs hold.
        """
        drawing = [d for d in draws if self._is_fed(d)]
        feeding: list[Feed] = []
        taken: dict[int, float] = {}
        for feed in feeds:
            island = self.island[self.place[feed.out]]
            back = self.island[self.place[feed.back]]
            if island in self._powered and back == island:  # else its current has no way back
                feeding.append(feed)
            elif island in self._inputs and back == self.island[self.place[self._inputs[island].back]]:
                feeding.append(feed)
                taken[island] = taken.get(island, 0.0) + feed.current_a
        for island, current_a in sorted(taken.items()):
            tie = self._inputs[island]
            name = f"{tie.device} input"
            drawing.append(Draw(name, tie.feed, tie.back, current_a, tie.voltage_v, CONSTANT_CURRENT))
        return drawing, feeding, frozenset(taken)

    def _is_fed(self, draw: Draw) -> bool:
        """Tell whether a battery can feed a load and take its current back."""
        feed, back = self.island[self.place[draw.feed]], self.island[self.place[draw.back]]
        return feed == back and feed in self._powered

    @cached_property
    def free_trees(self) -> list[list[tuple[Edge, int]]]:
        """Return for each place the edges without resistance that span it, each with the post it leads to."""
        at: dict[int, list[Edge]] = {}
        for edge in self._edges:
            if self._ohm[edge.index] == 0 and edge.a != edge.b:
                at.setdefault(edge.a, []).append(edge)
                at.setdefault(edge.b, []).append(edge)
        trees: list[list[tuple[Edge, int]]] = []
        seen: set[int] = set()
        for start in sorted(at):
            if start in seen:
                continue
            seen.add(start)
            tree: list[tuple[Edge, int]] = []
            waiting = [start]
            while waiting:
                for edge in at[node := waiting.pop()]:
                    far = edge.other(node)
                    if far not in seen:
                        seen.add(far)
                        tree.append((edge, far))
                        waiting.append(far)
            trees.append(tree)
        return trees

    @cached_property
    def at_rest_v(self) -> list[float]:
        """Return the voltages with no load and no source, shape (posts,) by place."""
        return self.factor.solve(self._battery_currents())

    def _battery_currents(self) -> list[float]:
        injected = [0.0] * len(self.network.posts)
        for battery, cell in self.cells:
            current_a = cell.emf_v / cell.resistance_ohm
            injected[self.place[battery.pos]] += current_a
            injected[self.place[battery.neg]] -= current_a
        for diode in self._on:
            current_a = diode.drop_v / self._ohm[diode.index]
            injected[self.place[diode.a]] += current_a
            injected[self.place[diode.b]] -= current_a
        return injected

    def conducting(self, diodes: frozenset[int]) -> Grid:
        """Return the same network with some diodes conducting and the others blocking."""
        if diodes not in self._with_diodes:
            self._with_diodes[diodes] = self._sibling(diodes)
        return self._with_diodes[diodes]

    def feeding(self, post: int) -> Grid:
        """Return the same network with the diodes conducting that lead to a post, as in a fault there."""
        if not self._diodes:
            return self
        reach = places(self.network, self.state, ())
        return self.conducting(leading_to(self.network, reach, [reach[post]]))

    def solve(self, draws: Sequence[Draw], feeds: Sequence[Feed]) -> Flow | NoOperatingPoint:
        """Solve one condition; each diode is found to conduct or to block, and agrees with the answer.

        One diode is turned at a time, the first that disagrees: Murty's least-index method,
        which ends for resistances in series with diodes (K. G. Murty, Math. Programming 7, 1974).
        Which conduct is first found with loads of constant power at their given current.
        """
        if not self._diodes:
            return self._solved(draws, feeds)
        draws, feeds = self._passable(draws, feeds)
        plain = [replace(draw, model=CONSTANT_CURRENT) if draw.model == CONSTANT_POWER else draw for draw in draws]
        on = frozenset(edge.index for edge in self._diodes)
        answer: Flow | NoOperatingPoint = NoOperatingPoint(self.state.id, ())
        tried: set[frozenset[int]] = set()
        for loads in (plain, draws):
            for _ in range(MOST_TURNS):
                tried.add(on)
                grid = self.conducting(on)
                answer = grid._solved(loads, feeds)
                turned = grid._disagreeing(answer, on, tried) if isinstance(answer, Flow) else None
                if turned is None:
                    break
                on ^= {turned}
            else:
                return NoOperatingPoint(self.state.id, ())
        return answer

    def _passable(self, draws: Sequence[Draw], feeds: Sequence[Feed]) -> tuple[list[Draw], list[Feed]]:
        """Leave out loads and sources that nothing reaches the right way round, but for arrays.

        While diodes are tried they would be fed backward, and turn those that others need.
        """
        at = [self.island[place] for place in self.place]

        def ways(outs: set[int], backs: set[int]) -> tuple[frozenset[int], frozenset[int]]:
            """Return what current from some islands can come to, and the islands it can come from to some."""
            giving = {at[self.network.edges[index].a] for index in leading_to(self.network, at, self._powered | backs)}
            return places_beyond(self.network, at, self._powered | outs), self._powered | backs | giving

        fed, giving = ways({at[feed.out] for feed in feeds}, {at[feed.back] for feed in feeds})
        ends = [(draw, at[draw.feed], at[draw.back]) for draw in draws]
        ends += [
            (draw, back, feed) for draw, feed, back in ends if draw.model == RESISTIVE
        ]  # it draws either way round
        ends = [(draw, feed, back) for draw, feed, back in ends if feed in fed and back in giving]
        drawing = {draw.name for draw, _, _ in ends}
        fed, giving = ways({back for _, _, back in ends}, {feed for _, feed, _ in ends})
        feeding = [f for f in feeds if at[f.out] in self._inputs or (at[f.back] in fed and at[f.out] in giving)]
        return [draw for draw in draws if draw.name in drawing], feeding

    def _disagreeing(self, flow: Flow, on: frozenset[int], tried: set[frozenset[int]]) -> int | None:
        """Return the first diode that conducts backward, or blocks what would flow forward.

        Where a diode alone joins two islands, nothing fixes the voltage over it while it blocks: it is
        turned to see whether it feeds what nothing else does, once with the same others conducting.
        """
        for edge in self._diodes:
            a, b = self.place[edge.a], self.place[edge.b]
            above_v = flow.across(edge.a, edge.b) - edge.drop_v
            if edge.index in on:
                if above_v < -SETTLED_V:
                    return edge.index
            elif self.island[a] != self.island[b]:
                if on | {edge.index} not in tried:
                    return edge.index
            elif above_v > SETTLED_V:
                return edge.index
        return None

    def _solved(self, draws: Sequence[Draw], feeds: Sequence[Feed]) -> Flow | NoOperatingPoint:
        """Solve with the diodes as they are; each regulated source gives all it can, holds its voltage, or rests.

        As with the diodes, the first that disagrees with the answer is turned until none does.
        """
        regulated = [feed for feed in feeds if feed.holds_v is not None]
        if not regulated:
            return self._balanced(draws, feeds)
        others = [feed for feed in feeds if feed.holds_v is None]
        modes = ["full"] * len(regulated)
        for _ in range(MOST_TURNS):
            full = [f for f, mode in zip(regulated, modes, strict=True) if mode == "full"]
            holding = [holding_draw(f) for f, mode in zip(regulated, modes, strict=True) if mode == "holds"]
            answer = self._balanced([*draws, *holding], [*others, *full])
            turned = _first_to_turn(answer, regulated, modes) if isinstance(answer, Flow) else None
            if turned is None:
                return answer
            modes[turned[0]] = turned[1]
        return NoOperatingPoint(self.state.id, ())

    def _balanced(self, draws: Sequence[Draw], feeds: Sequence[Feed]) -> Flow | NoOperatingPoint:
        draws, feeds, held = self._possible(draws, feeds)
        injected = self._battery_currents()
        for feed in feeds:
            injected[self.place[feed.out]] += feed.current_a
            injected[self.place[feed.back]] -= feed.current_a
        steady = [draw for draw in draws if draw.model == CONSTANT_CURRENT]
        bending = [draw for draw in draws if draw.model != CONSTANT_CURRENT and draw.current_a]
        currents = {draw.name: draw.current_a for draw in steady}
        for draw in steady:
            injected[self.place[draw.feed]] -= draw.current_a
            injected[self.place[draw.back]] += draw.current_a
        if bending:
            ports = [(self.place[draw.feed], self.place[draw.back]) for draw in bending]
            found = port_currents(self.factor, bending, ports, injected)
            if found is None:
                return NoOperatingPoint(self.state.id, tuple(d.name for d in draws if d.model == CONSTANT_POWER))
            for draw, current_a in zip(bending, found, strict=True):
                currents[draw.name] = current_a
                injected[self.place[draw.feed]] -= current_a
                injected[self.place[draw.back]] += current_a
        volts = self._levelled(self.factor.solve(injected), held)
        for draw in self.shunts:
            across = volts[self.place[draw.feed]] - volts[self.place[draw.back]]
            currents[draw.name] = across * draw.current_a / draw.nominal_v
        return Flow(self, volts, [*draws, *self.shunts], feeds, currents)

    def _levelled(self, volts: list[float], held: frozenset[int]) -> list[float]:
        """Lift each island that a converter input holds to the voltage it is held at."""
        for island in sorted(held):
            tie = self._inputs[island]
            feed, back = self.place[tie.feed], self.place[tie.back]
            lift_v = volts[back] + tie.voltage_v - volts[feed]
            for place in set(self.place):
                if self.island[place] == island:
                    volts[place] += lift_v
        return volts

    def ohm(self, edge: Edge) -> float:
        """Return the resistance of a live edge."""
        return self._ohm[edge.index]

    @property
    def edges(self) -> Sequence[Edge]:
        """Return the live edges."""
        return self._edges


def _first_to_turn(flow: Flow, regulated: Sequence[Feed], modes: Sequence[str]) -> tuple[int, str] | None:
    """Return the first regulated source that cannot stay as it is, and what it is turned to."""
    for number, (feed, mode) in enumerate(zip(regulated, modes, strict=True)):
        over_v = flow.across(feed.out, feed.back) - (feed.holds_v or 0.0)
        given_a = -flow.load_a.get(f"{feed.name} holding", 0.0)
        if mode == "holds" and not 0 <= given_a <= feed.current_a:
            return number, "full" if given_a > feed.current_a else "rests"
        if (mode == "full" and over_v > STIFF * (feed.holds_v or 0.0)) or (mode == "rests" and over_v < -SETTLED_V):
            return number, "holds"
    return None


@dataclass(frozen=True, slots=True)
class NoOperatingPoint:
    """Tell that loads of constant power ask for more than the network can give."""

    state: str
    loads: tuple[str, ...]


class Flow:
    """Hold a solved condition: voltages above the reference, and currents.

    `volts` has shape (posts,), by place; `load_a` is what each load draws.
    """

    def __init__(
        self, grid: Grid, volts: list[float], draws: Sequence[Draw], feeds: Sequence[Feed], load_a: dict[str, float]
    ) -> None:
        self.grid = grid
        self.volts = volts
        self.load_a = load_a
        self._draws = draws
        self._feeds = feeds

    def voltage(self, post: int) -> float:
        """Return the voltage of a post above the DC reference, V."""
        return self.volts[self.grid.place[post]]

    def across(self, first: int, second: int) -> float:
        """Return the voltage of the first post above the second, V."""
        return self.voltage(first) - self.voltage(second)

    @cached_property
    def currents_a(self) -> dict[int, float]:
        """Return the current of every live edge, A, positive from its a to its b.

        In a loop of edges without resistance nothing fixes the currents: there one edge is
        taken to carry none.
        """
        volts, place = self.volts, self.grid.place
        known = {
            edge.index: (volts[place[edge.a]] - volts[place[edge.b]] - edge.drop_v) * siemens
            for edge, siemens in self.grid.resistive
        }
        return known | self._free_currents(known)

    def battery_currents(self) -> dict[str, float]:
        """Return what each battery gives, A; negative while it is charged."""
        return {
            tie.device: (cell.emf_v - self.across(tie.pos, tie.neg)) / cell.resistance_ohm
            for tie, cell in self.grid.cells
        }

    @cached_property
    def given_a(self) -> list[float]:
        """Return what batteries, sources and loads put into each post, A, shape (posts,)."""
        given = [0.0] * len(self.volts)
        currents = self.battery_currents()
        for tie, _ in self.grid.cells:
            given[tie.pos] += currents[tie.device]
            given[tie.neg] -= currents[tie.device]
        for feed in self._feeds:
            given[feed.out] += feed.current_a
            given[feed.back] -= feed.current_a
        for draw in self._draws:
            given[draw.feed] -= self.load_a.get(draw.name, 0.0)
            given[draw.back] += self.load_a.get(draw.name, 0.0)
        return given

    def through_place(self, post: int) -> float:
        """Return the current that flows through the place of a post: all that flows in, A."""
        return self._through[self.grid.place[post]]

    @cached_property
    def _through(self) -> list[float]:
        """Return what flows into each place, A, shape (posts,) by place."""
        inward = [0.0] * len(self.volts)
        place = self.grid.place
        for post, given in enumerate(self.given_a):
            if given > 0:
                inward[place[post]] += given
        currents = self.currents_a
        for edge, _ in self.grid.resistive:
            current, a, b = currents[edge.index], place[edge.a], place[edge.b]
            if a != b:
                inward[b if current > 0 else a] += abs(current)
        return inward

    def _free_currents(self, known: dict[int, float]) -> dict[int, float]:
        """Find the currents of edges without resistance by Kirchhoff's current law, tree by tree."""
        excess = list(self.given_a)
        for edge, _ in self.grid.resistive:
            excess[edge.a] -= known[edge.index]
            excess[edge.b] += known[edge.index]
        found: dict[int, float] = {}
        for tree in self.grid.free_trees:
            for edge, child in reversed(tree):
                parent = edge.other(child)
                found[edge.index] = excess[child] if child == edge.a else -excess[child]
                excess[parent] += excess[child]
                excess[child] = 0.0
        return found


def parallel_ohm(values: Sequence[float]) -> float:
    """Return the resistance of several in parallel; 0 where one has none."""
    return 0.0 if any(v == 0 for v in values) else 1 / math.fsum(1 / v for v in values)
