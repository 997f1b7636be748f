"""Make the tree of the return side: from the reference to banks, shunts, buses and the engine, and not every return."""

from __future__ import annotations

from checker.boat.parts import Metal
from checker.network.graph import EdgeKind
from checker.network.studies import Studies
from checker.output.drawing.elements import bus_node, element_node, tie_nodes
from checker.output.drawing.reach import CONDUCTING, Side
from checker.output.drawing.tree import MOST_LEVELS, Kind, Node, too_deep


def return_tree(studies: Studies) -> Node:
    """Return the tree of the return side of a boat, in its first normal state.

    Beyond a shunt everything is drawn: what is there is not metered.
    """
    return _Return(studies).tree()


class _Return:
    """Hold the return side while its tree is made."""

    def __init__(self, studies: Studies) -> None:
        self._side = Side(studies, is_return=True)

    def tree(self) -> Node:
        """Return the tree of the return side, without the branches that say nothing of protection or metering."""
        home = self._side.place[self._side.network.reference]
        self._side.reach([(home, self._side.place_name(home))])
        node = self._return(home, (), is_measured=False)
        node.note = "reference"
        return node

    def _return(self, place: int, wires: tuple[str, ...], *, is_measured: bool) -> Node:
        """Return the node of a place on the return side; `is_measured` beyond a shunt, where everything is drawn."""
        kept: list[Node] = []
        others: list[str] = self._returning(place)
        bonded: list[str] = []
        for edge in self._side.down.get(place, ()):
            far = self._side.beyond(place, edge)
            if self._side.level[far] > MOST_LEVELS:
                node = too_deep(edge.part)
            elif edge.kind in CONDUCTING:
                node = self._return(far, tuple(e.part for e in self._side.beside(edge)), is_measured=is_measured)
            else:
                node = element_node(self._side, edge, place)
                beyond = self._return(far, (), is_measured=is_measured or edge.kind is EdgeKind.SHUNT)
                alone = beyond.kind is Kind.JUNCTION and not beyond.wires
                node.children = beyond.children if alone else [beyond]
            if is_measured or any(self._matters(found) for found in node.walk()):
                kept.append(node)
            else:
                (bonded if edge.kind is EdgeKind.BOND else others).append(self._end_name(far))
        ties = [tie for tie in tie_nodes(self._side, place) if is_measured or self._matters(tie)]
        children = [*kept, *ties]
        for found, words in ((others, "returns"), (bonded, "bonds")):
            names = sorted(dict.fromkeys(found))
            if names:
                told = f"{len(names)} {words if len(names) > 1 else words[:-1]}"
                children.append(Node(Kind.END, told, told=", ".join(names)))
        return self._return_node(place, wires, children)

    def _return_node(self, place: int, wires: tuple[str, ...], children: list[Node]) -> Node:
        bank = next((b for b, posts in self._side.bank_posts.items() if self._side.place[posts[0]] == place), "")
        buses = self._side.bus_at(place)
        devices = tuple(self._side.devices_at(place))
        metal = [name for name in devices if isinstance(self._side.boat.devices[name].part, Metal)]
        if bank:
            return Node(Kind.BANK, bank, "negative", wires=wires, children=children)
        if buses:
            node = bus_node(self._side, buses, [])
            node.kind, node.wires, node.children = Kind.BUS, wires, children
            return node
        if len(children) == 1 and not children[0].wires and children[0].kind is not Kind.END:
            children[0].wires = wires
            return children[0]
        name = " + ".join(metal) or self._side.place_name(place)
        return Node(Kind.JUNCTION if children else Kind.END, name, wires=wires, stands_for=devices, children=children)

    def _matters(self, node: Node) -> bool:
        if node.kind in (Kind.BANK, Kind.SHUNT, Kind.BUS):
            return True
        names = node.name.split(" + ")
        is_bond = bool(node.wires) and all(self._side.boat.conductors[w].is_bond for w in node.wires)
        return not is_bond and any(
            name in self._side.boat.devices and isinstance(self._side.boat.devices[name].part, Metal) for name in names
        )

    def _returning(self, place: int) -> list[str]:
        """Return the loads and sources that return at a place, but those that belong to a shunt."""
        here = set(self._side.posts_at.get(place, ()))
        names = [load.device for load in self._side.network.loads if load.back in here]
        names += [source.device for source in self._side.network.sources if source.back in here]
        return [name for name in dict.fromkeys(names) if not self._side.boat.devices[name].belongs_to]

    def _end_name(self, place: int) -> str:
        names = self._side.devices_at(place)
        return names[0] if names else self._side.place_name(place)
