"""Write the trunk of a hull as Mermaid text for Markdown: banks, sources, devices, buses and panels, each one node.

Where the whole is more than a forge shows in one diagram, it is split, a part of the tree each.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence

from checker.boat.hull import Boat
from checker.network.studies import Studies
from checker.output.drawing.feed_tree import feed_trees
from checker.output.drawing.lettering import legible
from checker.output.drawing.tree import Kind, Node

MOST_EDGES, MOST_CHARACTERS = 400, 40_000
_LONGEST = 60
_SHAPES = {
    Kind.BANK: ("[[", "]]"), Kind.BUS: ("[", "]"), Kind.JUNCTION: ("((", "))"), Kind.PANEL: ("[", "]"),
    Kind.SOURCE: ("([", "])"), Kind.CONVERTER: ("([", "])"), Kind.TIE: (">", "]"),
}  # fmt: skip


def trunk_markdown(studies: Studies, hull: str) -> str:
    """Return the trunk of a hull as Markdown with one Mermaid diagram or several."""
    trees = feed_trees(studies)
    parts = [trees] if _fits(studies.boat, trees) else list(_split(studies.boat, trees))
    lines = [f"# Trunk of {_plain(hull)}", ""]
    state = studies.usual.state
    lines += [f"Drawn in state {_plain(state.id)}: {_plain(state.words)}. Panels are one node each.", ""]
    if len(parts) > 1:
        lines += [f"In {len(parts)} diagrams, since one would be too large to be shown.", ""]
    for part in parts:
        lines += ["```mermaid", *_diagram(studies.boat, part), "```", ""]
    lines += ["It certifies nothing: local codes, the licensed edition of a standard and the surveyor decide.", ""]
    return "\n".join(lines)


def _fits(boat: Boat, trees: Sequence[Node]) -> bool:
    lines = _diagram(boat, trees)
    return sum("---" in line for line in lines) <= MOST_EDGES and sum(len(x) + 1 for x in lines) <= MOST_CHARACTERS


def _split(boat: Boat, trees: Sequence[Node]) -> Iterator[list[Node]]:
    """Yield parts that fit: a tree each, and of a tree too large its branches, each under the node that it hangs on."""
    for tree in trees:
        if _fits(boat, [tree]):
            yield [tree]
            continue
        held: list[Node] = []
        for child in tree.children:
            if held and not _fits(boat, [_with(tree, [*held, child])]):
                yield [_with(tree, held)]
                held = []
            if _fits(boat, [_with(tree, [child])]):
                held.append(child)
            else:
                yield from _split(boat, [child])
        if held:
            yield [_with(tree, held)]


def _with(node: Node, children: list[Node]) -> Node:
    """Return a node as it is, but with other children."""
    return Node(node.kind, node.name, node.note, node.told, node.wires, node.circuit, children=children)


def _diagram(boat: Boat, trees: Sequence[Node]) -> list[str]:
    lines = ["flowchart LR"]
    edges: list[str] = []
    number = 0
    for tree in trees:
        waiting: list[tuple[Node, str]] = [(tree, "")]
        while waiting:
            node, above = waiting.pop()
            number += 1
            name = f"n{number}"
            opening, closing = _SHAPES.get(node.kind, ("[", "]"))
            lines.append(f'  {name}{opening}"{_label(_words(node))}"{closing}')
            if above:
                wire = f'|"{_label(_wire(boat, node))}"|' if node.wires else ""
                edges.append(f"  {above} ---{wire} {name}")
            waiting.extend((child, name) for child in reversed(node.children))
    return lines + edges


def _wire(boat: Boat, node: Node) -> str:
    first = boat.conductors[node.wires[0]]
    count = f"{len(node.wires)} x " if len(node.wires) > 1 else ""
    return f"{node.wires[0]} {count}{first.size.text}"


def _words(node: Node) -> str:
    rows = f"{len(node.rows)} branches" if node.kind is Kind.PANEL else ""
    kind = node.kind.value if node.kind in (Kind.BANK, Kind.PANEL, Kind.FUSE, Kind.BREAKER, Kind.SHUNT) else ""
    return " ".join(filter(None, (kind, node.name, node.told, rows)))


def _label(text: str) -> str:
    """Return text as the label of a node: nothing in it is syntax, and it does not grow without bound."""
    text = legible(text)
    text = text if len(text) <= _LONGEST else text[: _LONGEST - 1] + "…"
    for sign, written in (("#", "#35;"), (";", "#59;"), ('"', "#quot;"), ("<", "&lt;"), (">", "&gt;"), ("`", "'")):
        # The sign for # is written first and holds a ; of its own, which must stay.
        text = _semicolons(text) if sign == ";" else text.replace(sign, written)
    return text


def _semicolons(text: str) -> str:
    return "#35;".join(piece.replace(";", "#59;") for piece in text.split("#35;"))


def _plain(text: str) -> str:
    """Return text that Markdown shows as it is."""
    return "".join(f"\\{c}" if c in "\\`*_{}[]<>()#+-.!|@&~" else c for c in legible(text))
