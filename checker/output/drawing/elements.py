"""Make the nodes that both sides of a drawing have: devices and switches, buses, and what closes a loop."""

from __future__ import annotations

from checker.boat.parts import Bus, Overcurrent, Shunt
from checker.network.graph import Edge, EdgeKind
from checker.output.drawing.reach import CONDUCTING, Side
from checker.output.drawing.tree import Kind, Node, panel_rows


def bus_node(side: Side, buses: list[str], children: list[Node]) -> Node:
    """Return the node of a bus; what hangs on a bus with positions becomes rows of a panel where it can."""
    parts = [side.boat.devices[name].part for name in buses]
    rating_a = min(part.rating_a for part in parts if isinstance(part, Bus))
    node = Node(Kind.BUS, " + ".join(buses), told=f"{rating_a:g} A", stands_for=tuple(buses), children=children)
    if any(side.boat.devices[name].returns for name in buses):
        rows = [(child, panel_rows(child)) for child in children]
        found_rows = [row for _, found in rows for row in found or ()]
        node.rows = sorted(found_rows, key=lambda row: not side.boat.devices[row.devices[0]].circuit)
        node.children = [child for child, found in rows if found is None]
    if node.rows:
        panel = Node(Kind.PANEL, node.name, told=node.told, stands_for=node.stands_for, rows=node.rows)
        if not node.children:
            return panel
        node.children = [panel, *node.children]
        node.rows = []
    return node


def element_node(side: Side, edge: Edge, place: int) -> Node:
    """Return the node of a device, shunt, diode or contact that is drawn from a place on."""
    device = side.boat.devices[edge.part]
    part = device.part
    if isinstance(part, Overcurrent):
        kind = Kind.BREAKER if part.is_breaker else Kind.FUSE
        return Node(kind, device.id, told=f"{part.rating_a:g} A", stands_for=(device.id,))
    if isinstance(part, Shunt):
        return Node(Kind.SHUNT, device.id, told=f"{part.rating_a:g} A shunt", stands_for=(device.id,))
    if edge.kind is EdgeKind.DIODE:
        kind = Kind.DIODE if side.place[edge.a] == place else Kind.DIODE_BACK
        return Node(kind, device.id, told="one way", stands_for=(device.id,))
    is_closed = edge.index in side.closed
    posts = getattr(part, "posts", ())
    ends = "" if len(posts) < 3 else " " + "-".join(side.network.posts[p].rpartition(".")[2] for p in (edge.a, edge.b))
    return Node(
        Kind.CLOSED if is_closed else Kind.OPEN, f"{device.id}{ends}", told="closed" if is_closed else "open",
        stands_for=(device.id,),
    )  # fmt: skip


def tie_nodes(side: Side, place: int) -> list[Node]:
    """Return what closes a loop at a place: drawn at the end that was reached first, named at the other."""
    found: list[Node] = []
    for edge in side.loose(place):
        far = side.beyond(place, edge)
        tie = Node(Kind.TIE, f"to {side.place_name(far)}", f"drawn at {side.owner[far]}")
        is_drawn_here = side.order[place] < side.order[far]
        if not is_drawn_here:
            name = edge.part if edge.kind in CONDUCTING else element_node(side, edge, place).name
            tie.name = f"{name}, drawn at {side.owner[far]}"
            tie.note = f"it leads to {side.place_name(far)}"
        elif edge.kind in CONDUCTING:
            tie.wires = (edge.part,)
        else:
            element = element_node(side, edge, place)
            element.children = [tie]
            tie = element
        found.append(tie)
    return found
