"""Hold what a one-line drawing shows: trees of nodes, from each bank or source down.

Posts that nothing drawn stands between are one place. A place is reached by the fewest parts
from a bank, over closed contacts first, so that every part has its level and no line needs to
cross another. What closes a loop is drawn once, and named at both of its ends.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field
from enum import Enum

MOST_LEVELS = 40
"""Parts in series beyond this many are told, not drawn."""


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
    DIODE_BACK = "diode towards the left"
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


def too_deep(part: str) -> Node:
    """Return the end of a branch that has more levels than a drawing shows."""
    return Node(Kind.TIE, f"goes on over {part}", f"more than {MOST_LEVELS} parts in series", stands_for=(part,))


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


def panel_rows(branch: Node) -> list[Row] | None:
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
        elif node.kind not in (Kind.LOAD, Kind.SOURCE, Kind.JUNCTION) or (
            node.kind is not Kind.JUNCTION and node.children
        ):
            return None
        circuit = node.circuit or row.circuit
        row = Row(devices, switches, (*row.wires, *node.wires), circuit, row.load)
        if node.kind in (Kind.LOAD, Kind.SOURCE):
            rows.append(Row(devices, switches, row.wires, circuit, node.name, node.kind is Kind.SOURCE))
        waiting.extend((child, row) for child in reversed(node.children))
    return rows if rows and all(row.devices for row in rows) else None
