"""Make the trees of the feed side: one for each bank, then those of sources and loads that no bank reaches."""

from __future__ import annotations

from checker.boat.hull import Circuit
from checker.boat.parts import Load, Source
from checker.network.graph import Edge
from checker.network.studies import Studies
from checker.output.drawing.elements import bus_node, element_node, tie_nodes
from checker.output.drawing.reach import CONDUCTING, Side
from checker.output.drawing.tree import MOST_LEVELS, Kind, Node, too_deep


def feed_trees(studies: Studies) -> list[Node]:
    """Return the trees of the feed side of a boat, in its first normal state."""
    return _Feed(studies).trees()


class _Feed:
    """Hold the feed side while its trees are made."""

    def __init__(self, studies: Studies) -> None:
        self._side = Side(studies, is_return=False)
        self._outputs = {source.device for source in studies.network.sources}
        self._inputs = {load.device for load in studies.network.loads if load.is_input}

    def trees(self) -> list[Node]:
        """Return the trees of the feed side."""
        starts = [(self._side.place[posts[0]], bank) for bank, posts in sorted(self._side.bank_posts.items())]
        self._side.reach(starts)
        self._pass_converters()
        roots = [self._bank(place, bank) for place, bank in starts]
        network = self._side.network
        others = [(source.out, source.device) for source in network.sources]
        others += [(load.feed, load.device) for load in network.loads]
        for post, name in others:
            place = self._side.place[post]
            if self._side.on_side[post] and place not in self._side.owner:
                self._side.reach([(place, name)])
                self._pass_converters()
                roots.append(
                    Node(Kind.JUNCTION, self._side.place_name(place), "no bank", children=self._children(place))
                )
        return roots

    def _pass_converters(self) -> None:
        """Reach the nets behind a converter that nothing else reaches: an array behind its controller."""
        grown = True
        while grown:
            grown = False
            for device in self._side.boat.devices.values():
                if not isinstance(device.part, Source):
                    continue
                ends = [end.post for end in (*device.part.outputs, *device.part.inputs)]
                places = [
                    self._side.place[post] for end in ends
                    if self._side.on_side[post := self._side.network.index[f"{device.id}.{end}"]]
                ]  # fmt: skip
                near = next((place for place in places if place in self._side.owner), None)
                for far in places:
                    if near is not None and far not in self._side.owner:
                        self._side.through.setdefault(near, []).append((device.id, far))
                        self._side.came_through[far] = device.id
                        self._side.reach([(far, self._side.owner[near])], self._side.level[near] + 1)
                        grown = True

    def _bank(self, place: int, bank: str) -> Node:
        known = next(found for found in self._side.studies.banks if found.id == bank)
        strings = len(known.strings)
        count = sum(len(string) for string in known.strings)
        told = f"{known.voltage_v:g} V, {known.capacity_ah:g} Ah"
        note = "1 battery" if count == 1 else f"{count} batteries, {strings} {'string' if strings == 1 else 'strings'}"
        ids = tuple(tie.device for tie in self._side.network.batteries if tie.bank == bank)
        inside = [
            c.id for c in self._side.boat.conductors.values()
            if {self._side.place[self._side.network.index[end]] for end in (c.start, c.end)} == {place}
        ]  # fmt: skip
        return Node(Kind.BANK, bank, note, told, stands_for=(*ids, *inside, bank), children=self._children(place))

    def _children(self, place: int) -> list[Node]:
        """Return what hangs on a place: loads and sources there, then what is reached over it, then ties."""
        found = self._ends(place)
        for edge in self._side.down.get(place, ()):
            found += self._over(place, edge)
        found += tie_nodes(self._side, place)
        return found

    def _over(self, place: int, edge: Edge) -> list[Node]:
        far = self._side.beyond(place, edge)
        if self._side.level[far] > MOST_LEVELS:
            return [too_deep(edge.part)]
        if edge.kind in CONDUCTING:
            return [self._arrive(far, tuple(e.part for e in self._side.beside(edge)))]
        node = element_node(self._side, edge, place)
        node.children = self._onward(far)
        return [node]

    def _onward(self, place: int) -> list[Node]:
        """Return what follows a device: what hangs on its far place, with the place itself where it needs a name."""
        if self._side.bus_at(place) or self._count(place) != 1:
            return [self._arrive(place, ())]
        return self._children(place)

    def _count(self, place: int) -> int:
        return (
            len(self._ends(place, is_trial=True)) + len(self._side.down.get(place, ())) + len(self._side.loose(place))
        )

    def _arrive(self, place: int, wires: tuple[str, ...]) -> Node:
        """Return the node at the end of some conductors."""
        buses = self._side.bus_at(place)
        children = self._children(place)
        if buses:
            node = bus_node(self._side, buses, children)
        elif len(children) == 1 and not children[0].wires:
            node = children[0]
        elif children:
            name = self._side.place_name(place)
            node = Node(Kind.JUNCTION, name, stands_for=tuple(self._side.devices_at(place)), children=children)
        else:
            node = Node(Kind.END, self._side.place_name(place), stands_for=tuple(self._side.devices_at(place)))
        node.wires = wires
        if not node.circuit and wires:
            node.circuit = self._side.boat.conductors[wires[0]].circuit
        return node

    def _ends(self, place: int, *, is_trial: bool = False) -> list[Node]:
        """Return the loads and sources at a place, each with what is reached through it."""
        found: list[Node] = []
        here = set(self._side.posts_at.get(place, ()))
        names = [s.device for s in self._side.network.sources if s.out in here]
        names += [load.device for load in self._side.network.loads if load.feed in here]
        for name in dict.fromkeys(names):
            if name == self._side.came_through.get(place):
                continue
            if name in self._outputs:
                posts = [self._side.network.posts[p].rpartition(".")[2] for p in sorted(here) if self._is_of(p, name)]
                kind = Kind.CONVERTER if name in self._inputs else Kind.SOURCE
                node = Node(kind, name, told=f"at {', '.join(posts)}", stands_for=(name,))
            else:
                node = Node(Kind.LOAD, name, told=self._load_words(name), stands_for=(name,))
            if not is_trial:
                for device, far in self._side.through.get(place, ()):
                    if device == name:
                        node.children += self._onward(far)
                self._tell_circuit(node)
            found.append(node)
        return found

    def _is_of(self, post: int, device: str) -> bool:
        owner = self._side.boat.device_of(self._side.network.posts[post])
        return owner is not None and owner.id == device

    def _load_words(self, name: str) -> str:
        part = self._side.boat.devices[name].part
        circuit = self._circuit_of(name)
        current_a = circuit.current_a if circuit is not None else None
        if current_a is None and isinstance(part, Load):
            current_a = part.current_a
        return "" if current_a is None else f"{current_a:g} A"

    def _circuit_of(self, device: str) -> Circuit | None:
        """Return the circuit of a load or source: its own, or that of the first conductor at it."""
        own = self._side.boat.devices[device].circuit
        if own in self._side.boat.circuits:
            return self._side.boat.circuits[own]
        return None

    def _tell_circuit(self, node: Node) -> None:
        circuit = self._circuit_of(node.name)
        if circuit is not None:
            node.circuit = circuit.id
