"""Make a tree of a boat's wiring, from its banks and sources down: what a one-line drawing shows.

Posts that nothing drawn stands between are one place. A place is reached by the fewest parts
from a bank, over closed contacts first, so that every part has its level and no line needs to
cross another. What closes a loop is drawn once, and named at both of its ends.
"""

from __future__ import annotations

from collections import deque
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field
from enum import Enum

from checker.boat.hull import Boat, Circuit
from checker.boat.parts import Bus, Load, Metal, Overcurrent, Shunt, Source
from checker.network.graph import Edge, EdgeKind, Network
from checker.network.states import live_edges
from checker.network.studies import Studies
from checker.network.walk import groups


class Kind(Enum):
    """Say what stands at a node of the drawing."""

    BANK = "bank"
    BUS = "bus"
    JUNCTION = "junction"
    FUSE = "fuse"
    BREAKER = "breaker"
    CLOSED = "closed switch"
    OPEN = "open switch"
    SHUNT = "shunt"
    DIODE = "diode"
    LOAD = "load"
    SOURCE = "source"
    CONVERTER = "converter"
    PANEL = "panel"
    TIE = "tie"
    END = "end"


@dataclass(slots=True)
class Node:
    """Hold one thing drawn: what it is, the conductors that lead to it, and what hangs on it.

    `name` and `note` are written beside it, `told` is what is known of it on a second line.
    `stands_for` are the ids whose findings are marked here, `wires_for` those of the conductors.
    """

    kind: Kind
    name: str = ""
    note: str = ""
    told: str = ""
    wires: tuple[str, ...] = ()
    circuit: str = ""
    stands_for: tuple[str, ...] = ()
    children: list[Node] = field(default_factory=list)
    rows: list[Row] = field(default_factory=list)

    def walk(self) -> Iterable[Node]:
        """Yield this node and all below it, in the order drawn."""
        waiting = [self]
        while waiting:
            node = waiting.pop()
            yield node
            waiting.extend(reversed(node.children))


@dataclass(frozen=True, slots=True)
class Row:
    """Hold one branch of a panel: the devices, switches and conductors on its way to a load."""

    devices: tuple[str, ...]
    switches: tuple[tuple[str, bool], ...]
    wires: tuple[str, ...]
    circuit: str
    load: str
    is_source: bool = False

    @property
    def stands_for(self) -> tuple[str, ...]:
        """Return the ids whose findings are marked in this row."""
        return (self.circuit, *self.devices, *(name for name, _ in self.switches), *self.wires, self.load)


def feed_trees(studies: Studies) -> list[Node]:
    """Return the trees of the feed side: one for each bank, then those of sources that no bank reaches."""
    return _Side(studies, is_return=False).feed()


def return_tree(studies: Studies) -> Node:
    """Return the tree of the return side, from the reference to banks, shunts, buses and the engine."""
    return _Side(studies, is_return=True).back()


class _Side:
    """Hold the places and edges of one side of the boat, and how each place is reached."""

    def __init__(self, studies: Studies, *, is_return: bool) -> None:
        self.studies = studies
        self.boat: Boat = studies.boat
        network: Network = studies.network
        self.network = network
        usual = studies.usual
        self.is_return = is_return
        self.on_side = [usual.is_return(post) is is_return for post in range(len(network.posts))]
        joined = [(e.a, e.b) for e in network.edges if e.kind is EdgeKind.JOINT and self.on_side[e.a] is self.on_side[e.b]]
        self.bank_posts: dict[str, list[int]] = {}
        for tie in network.batteries:
            for post in (tie.pos, tie.neg):
                if self.on_side[post]:
                    self.bank_posts.setdefault(tie.bank, []).append(post)
        for posts in self.bank_posts.values():
            joined += [(posts[0], post) for post in posts]
        self.place = groups(len(network.posts), joined)
        live = set(live_edges(network, usual.state)) | {e.index for e in network.diodes}
        self.edges = [
            e for e in network.edges
            if e.kind not in (EdgeKind.JOINT, EdgeKind.SHIELD)
            and self.on_side[e.a] and self.on_side[e.b] and self.place[e.a] != self.place[e.b]
        ]  # fmt: skip
        self.closed = {e.index for e in self.edges if e.index in live}
        self.at: dict[int, list[Edge]] = {}
        for edge in self.edges:
            for post in (edge.a, edge.b):
                self.at.setdefault(self.place[post], []).append(edge)
        self.posts_at: dict[int, list[int]] = {}
        for post in range(len(network.posts)):
            if self.on_side[post]:
                self.posts_at.setdefault(self.place[post], []).append(post)
        self.owner: dict[int, str] = {}
        """The tree that a place belongs to, by the name of its root."""
        self.order: dict[int, int] = {}
        self.down: dict[int, list[Edge]] = {}
        self.through: dict[int, list[tuple[str, int]]] = {}
        self.used: set[int] = set()
        self.came_through: dict[int, str] = {}

    # How places are reached

    def reach(self, starts: Sequence[tuple[int, str]]) -> None:
        """Reach what can be reached from some places, over closed contacts first, then over open ones."""
        waiting: deque[int] = deque()
        for place, owner in starts:
            self._enter(place, owner)
            waiting.append(place)
        self._spread(waiting)
        while True:
            opened = [e for e in self.edges if e.index not in self.closed and self._is_frontier(e)]
            if not opened:
                return
            self._spread(deque(self._cross(opened[0])))

    def _is_frontier(self, edge: Edge) -> bool:
        return (self.place[edge.a] in self.owner) is not (self.place[edge.b] in self.owner)

    def _enter(self, place: int, owner: str) -> None:
        self.owner[place] = owner
        self.order[place] = len(self.order)

    def _cross(self, edge: Edge) -> list[int]:
        near, far = self.place[edge.a], self.place[edge.b]
        if near not in self.owner:
            near, far = far, near
        self._enter(far, self.owner[near])
        self._take(near, far, edge)
        return [far]

    def _take(self, near: int, far: int, edge: Edge) -> None:
        """Let a place be reached over an edge, and over the conductors that lie beside it."""
        self.down.setdefault(near, []).append(edge)
        self.used.add(edge.index)
        if edge.kind in (EdgeKind.CONDUCTOR, EdgeKind.BOND):
            self.used |= {e.index for e in self.beside(edge)}

    def beside(self, edge: Edge) -> list[Edge]:
        """Return the conductors that join the same two places as one, itself among them."""
        ends = {self.place[edge.a], self.place[edge.b]}
        return [
            e for e in self.at[self.place[edge.a]]
            if e.kind is edge.kind and {self.place[e.a], self.place[e.b]} == ends
        ]  # fmt: skip

    def _spread(self, waiting: deque[int]) -> None:
        while waiting:
            near = waiting.popleft()
            for edge in self.at.get(near, ()):
                far = self.place[edge.b] if self.place[edge.a] == near else self.place[edge.a]
                if edge.index in self.closed and far not in self.owner:
                    self._enter(far, self.owner[near])
                    self._take(near, far, edge)
                    waiting.append(far)

    # The feed side

    def feed(self) -> list[Node]:
        """Return the trees of the feed side."""
        starts = [(self.place[posts[0]], bank) for bank, posts in sorted(self.bank_posts.items())]
        self.reach(starts)
        self._pass_converters()
        roots = [self._bank(place, bank) for place, bank in starts]
        for source in self.network.sources:
            place = self.place[source.out]
            if self.on_side[source.out] and place not in self.owner:
                self.reach([(place, source.device)])
                self._pass_converters()
                roots.append(Node(Kind.JUNCTION, self.place_name(place), children=self._children(place)))
        return roots

    def _pass_converters(self) -> None:
        """Reach the nets behind a charge source or converter that nothing else reaches: an array behind its controller."""
        grown = True
        while grown:
            grown = False
            for device in self.boat.devices.values():
                if not isinstance(device.part, Source):
                    continue
                ends = [end.post for end in (*device.part.outputs, *device.part.inputs)]
                places = [
                    self.place[post] for end in ends
                    if self.on_side[post := self.network.index[f"{device.id}.{end}"]]
                ]  # fmt: skip
                near = next((place for place in places if place in self.owner), None)
                for far in places:
                    if near is not None and far not in self.owner:
                        self.through.setdefault(near, []).append((device.id, far))
                        self.came_through[far] = device.id
                        self.reach([(far, self.owner[near])])
                        grown = True

    def _bank(self, place: int, bank: str) -> Node:
        known = next(found for found in self.studies.banks if found.id == bank)
        strings = len(known.strings)
        count = sum(len(string) for string in known.strings)
        told = f"{known.voltage_v:g} V, {known.capacity_ah:g} Ah"
        note = "1 battery" if count == 1 else f"{count} batteries, {strings} {'string' if strings == 1 else 'strings'}"
        ids = tuple(tie.device for tie in self.network.batteries if tie.bank == bank)
        inside = [
            c.id for c in self.boat.conductors.values()
            if self.place[self.network.index[c.start]] == self.place[self.network.index[c.end]] == place
        ]  # fmt: skip
        return Node(Kind.BANK, bank, note, told, stands_for=(*ids, *inside, bank), children=self._children(place))

    def _children(self, place: int) -> list[Node]:
        """Return what hangs on a place: loads and sources there, then what is reached over it, then ties."""
        found = self._ends(place)
        for edge in self.down.get(place, ()):
            found += self._over(place, edge)
        found += self._ties(place)
        return found

    def _over(self, place: int, edge: Edge) -> list[Node]:
        far = self.place[edge.b] if self.place[edge.a] == place else self.place[edge.a]
        if edge.kind in (EdgeKind.CONDUCTOR, EdgeKind.BOND):
            return [self._arrive(far, tuple(e.part for e in self.beside(edge)))]
        node = self._element(edge)
        node.children = self._onward(far)
        return [node]

    def _onward(self, place: int) -> list[Node]:
        """Return what follows a device: what hangs on its far place, with the place itself where it needs a name."""
        if self._bus_at(place) or self._count(place) != 1:
            return [self._arrive(place, ())]
        return self._children(place)

    def _count(self, place: int) -> int:
        return len(self._ends(place, is_trial=True)) + len(self.down.get(place, ())) + len(self._loose(place))

    def _arrive(self, place: int, wires: tuple[str, ...]) -> Node:
        """Return the node at the end of some conductors."""
        buses = self._bus_at(place)
        children = self._children(place)
        if buses:
            node = self._bus(buses, children)
        elif len(children) == 1 and not children[0].wires:
            node = children[0]
        elif children:
            name = self.place_name(place)
            node = Node(Kind.JUNCTION, name, stands_for=tuple(self._devices_at(place)), children=children)
        else:
            node = Node(Kind.END, self.place_name(place), stands_for=tuple(self._devices_at(place)))
        node.wires = wires
        if not node.circuit and wires:
            node.circuit = self.boat.conductors[wires[0]].circuit
        return node

    def _devices_at(self, place: int) -> list[str]:
        names = (self.boat.device_of(self.network.posts[post]) for post in self.posts_at[place])
        return list(dict.fromkeys(device.id for device in names if device is not None))

    def _bus_at(self, place: int) -> list[str]:
        return [name for name in self._devices_at(place) if isinstance(self.boat.devices[name].part, Bus)]

    def _bus(self, buses: list[str], children: list[Node]) -> Node:
        parts = [self.boat.devices[name].part for name in buses]
        rating_a = min(part.rating_a for part in parts if isinstance(part, Bus))
        node = Node(Kind.BUS, " + ".join(buses), told=f"{rating_a:g} A", stands_for=tuple(buses), children=children)
        if any(self.boat.devices[name].returns for name in buses):
            rows = [(child, _rows(child)) for child in children]
            found_rows = [row for _, found in rows for row in found or ()]
            node.rows = sorted(found_rows, key=lambda row: not self.boat.devices[row.devices[0]].circuit)
            node.children = [child for child, found in rows if found is None]
        if node.rows:
            panel = Node(Kind.PANEL, node.name, told=node.told, stands_for=node.stands_for, rows=node.rows)
            if not node.children:
                return panel
            node.children = [panel, *node.children]
            node.rows = []
        return node

    def _element(self, edge: Edge) -> Node:
        device = self.boat.devices[edge.part]
        part = device.part
        if isinstance(part, Overcurrent):
            kind = Kind.BREAKER if part.is_breaker else Kind.FUSE
            return Node(kind, device.id, told=f"{part.rating_a:g} A", stands_for=(device.id,))
        if isinstance(part, Shunt):
            return Node(Kind.SHUNT, device.id, told=f"{part.rating_a:g} A shunt", stands_for=(device.id,))
        if edge.kind is EdgeKind.DIODE:
            return Node(Kind.DIODE, device.id, told="one way", stands_for=(device.id,))
        is_closed = edge.index in self.closed
        posts = getattr(part, "posts", ())
        ends = "" if len(posts) < 3 else " " + "–".join(self.network.posts[p].rpartition(".")[2] for p in (edge.a, edge.b))
        return Node(
            Kind.CLOSED if is_closed else Kind.OPEN, f"{device.id}{ends}", told="closed" if is_closed else "open",
            stands_for=(device.id,),
        )  # fmt: skip

    def _ends(self, place: int, *, is_trial: bool = False) -> list[Node]:
        """Return the loads and sources at a place, each with what is reached through it."""
        found: list[Node] = []
        here = set(self.posts_at.get(place, ()))
        outputs = {source.device for source in self.network.sources}
        inputs = {load.device for load in self.network.loads if load.is_input}
        names = [s.device for s in self.network.sources if s.out in here]
        names += [load.device for load in self.network.loads if load.feed in here]
        for name in dict.fromkeys(names):
            if name == self.came_through.get(place):
                continue
            if name in outputs:
                posts = [self.network.posts[p].rpartition(".")[2] for p in sorted(here) if self._is_of(p, name)]
                kind = Kind.CONVERTER if name in inputs else Kind.SOURCE
                node = Node(kind, name, told=f"at {', '.join(posts)}", stands_for=(name,))
            else:
                node = Node(Kind.LOAD, name, told=self._load_words(name), stands_for=(name,))
            if not is_trial:
                for device, far in self.through.get(place, ()):
                    if device == name:
                        node.children += self._onward(far)
                self._tell_circuit(node)
            found.append(node)
        return found

    def _is_of(self, post: int, device: str) -> bool:
        owner = self.boat.device_of(self.network.posts[post])
        return owner is not None and owner.id == device

    def _load_words(self, name: str) -> str:
        part = self.boat.devices[name].part
        circuit = self.circuit_of(name)
        current_a = circuit.current_a if circuit is not None else None
        if current_a is None and isinstance(part, Load):
            current_a = part.current_a
        return "" if current_a is None else f"{current_a:g} A"

    def circuit_of(self, device: str) -> Circuit | None:
        """Return the circuit of a load or source: its own, or that of the first conductor at it."""
        own = self.boat.devices[device].circuit
        if own in self.boat.circuits:
            return self.boat.circuits[own]
        return None

    def _tell_circuit(self, node: Node) -> None:
        circuit = self.circuit_of(node.name)
        if circuit is not None:
            node.circuit = circuit.id

    def _loose(self, place: int) -> list[Edge]:
        """Return the edges of a place that close a loop."""
        loose = [e for e in self.at.get(place, ()) if e.index not in self.used]
        return [e for e in loose if self.place[e.a] in self.owner and self.place[e.b] in self.owner]

    def _ties(self, place: int) -> list[Node]:
        found: list[Node] = []
        for edge in self._loose(place):
            far = self.place[edge.b] if self.place[edge.a] == place else self.place[edge.a]
            tie = Node(Kind.TIE, f"to {self.place_name(far)}", f"drawn at {self.owner[far]}")
            is_drawn_here = self.order[place] < self.order[far]
            if not is_drawn_here:
                tie.name = f"{edge.part}, drawn at {self.owner[far]}"
                tie.note = f"it leads to {self.place_name(far)}"
            elif edge.kind in (EdgeKind.CONDUCTOR, EdgeKind.BOND):
                tie.wires = (edge.part,)
            else:
                element = self._element(edge)
                element.children = [tie]
                tie = element
            found.append(tie)
        return found

    def place_name(self, place: int) -> str:
        """Return the name of a place: its bank, its bus, or its first post."""
        for bank, posts in self.bank_posts.items():
            if self.place[posts[0]] == place:
                return f"bank {bank}"
        buses = self._bus_at(place)
        return buses[0] if buses else min(self.network.posts[post] for post in self.posts_at[place])

    # The return side

    def back(self) -> Node:
        """Return the tree of the return side, without the branches that say nothing of protection or metering."""
        home = self.place[self.network.reference]
        self.reach([(home, self.place_name(home))])
        node = self._return(home, (), is_measured=False)
        node.note = "reference"
        return node

    def _return(self, place: int, wires: tuple[str, ...], *, is_measured: bool) -> Node:
        """Return the node of a place on the return side; `is_measured` beyond a shunt, where everything is drawn."""
        kept: list[Node] = []
        others: list[str] = self._returning(place)
        bonded: list[str] = []
        for edge in self.down.get(place, ()):
            far = self.place[edge.b] if self.place[edge.a] == place else self.place[edge.a]
            if edge.kind in (EdgeKind.CONDUCTOR, EdgeKind.BOND):
                node = self._return(far, tuple(e.part for e in self.beside(edge)), is_measured=is_measured)
            else:
                node = self._element(edge)
                beyond = self._return(far, (), is_measured=is_measured or edge.kind is EdgeKind.SHUNT)
                alone = beyond.kind is Kind.JUNCTION and not beyond.wires
                node.children = beyond.children if alone else [beyond]
            if is_measured or any(self._matters(found) for found in node.walk()):
                kept.append(node)
            else:
                (bonded if edge.kind is EdgeKind.BOND else others).append(self._end_name(far))
        ties = [tie for tie in self._ties(place) if is_measured or self._matters(tie)]
        children = [*kept, *ties]
        for found, words in ((others, "returns"), (bonded, "bonds")):
            names = sorted(dict.fromkeys(found))
            if names:
                told = f"{len(names)} {words if len(names) > 1 else words[:-1]}"
                children.append(Node(Kind.END, told, told=", ".join(names)))
        return self._return_node(place, wires, children)

    def _return_node(self, place: int, wires: tuple[str, ...], children: list[Node]) -> Node:
        bank = next((b for b, posts in self.bank_posts.items() if self.place[posts[0]] == place), "")
        buses = self._bus_at(place)
        devices = tuple(self._devices_at(place))
        metal = [name for name in devices if isinstance(self.boat.devices[name].part, Metal)]
        if bank:
            return Node(Kind.BANK, bank, "negative", wires=wires, children=children)
        if buses:
            node = self._bus(buses, [])
            node.kind, node.wires, node.children = Kind.BUS, wires, children
            return node
        if len(children) == 1 and not children[0].wires and children[0].kind is not Kind.END:
            children[0].wires = wires
            return children[0]
        name = " + ".join(metal) or self.place_name(place)
        return Node(Kind.JUNCTION if children else Kind.END, name, wires=wires, stands_for=devices, children=children)

    def _matters(self, node: Node) -> bool:
        if node.kind in (Kind.BANK, Kind.SHUNT, Kind.BUS):
            return True
        names = node.name.split(" + ")
        is_bond = bool(node.wires) and all(self.boat.conductors[w].is_bond for w in node.wires)
        return not is_bond and any(
            name in self.boat.devices and isinstance(self.boat.devices[name].part, Metal) for name in names
        )

    def _returning(self, place: int) -> list[str]:
        """Return the loads and sources that return at a place, but those that belong to a shunt."""
        here = set(self.posts_at.get(place, ()))
        names = [load.device for load in self.network.loads if load.back in here]
        names += [source.device for source in self.network.sources if source.back in here]
        return [name for name in dict.fromkeys(names) if not self.boat.devices[name].belongs_to]

    def _end_name(self, place: int) -> str:
        names = self._devices_at(place)
        return names[0] if names else self.place_name(place)


def _rows(branch: Node) -> list[Row] | None:
    """Return a branch of a panel as rows, one for each load on it; None where it is more than that."""
    rows: list[Row] = []
    waiting: list[tuple[Node, Row]] = [(branch, Row((), (), (), "", ""))]
    while waiting:
        node, row = waiting.pop()
        devices, switches = row.devices, row.switches
        if node.kind in (Kind.FUSE, Kind.BREAKER):
            devices = (*devices, node.name)
        elif node.kind in (Kind.CLOSED, Kind.OPEN):
            switches = (*switches, (node.stands_for[0], node.kind is Kind.CLOSED))
        elif node.kind not in (Kind.LOAD, Kind.SOURCE, Kind.JUNCTION) or (node.kind is not Kind.JUNCTION and node.children):
            return None
        circuit = node.circuit or row.circuit
        row = Row(devices, switches, (*row.wires, *node.wires), circuit, row.load)
        if node.kind in (Kind.LOAD, Kind.SOURCE):
            rows.append(Row(devices, switches, row.wires, circuit, node.name, node.kind is Kind.SOURCE))
        waiting.extend((child, row) for child in reversed(node.children))
    return rows if rows and all(row.devices for row in rows) else None
