"""Write networks as netlists and have ngspice solve them: a second opinion on every solved current.

Nothing of the solver under test is used here: connections, islands and resistances are reckoned
anew from the graph. A battery is a voltage source behind a resistor, whatever has a resistance is
a resistor, whatever has none is a voltage source of 0 V (which also tells its current), a load is a
current source, one of constant power a behavioural one. Many circuits share one run of ngspice.
"""

from __future__ import annotations

import copy
import shutil
import subprocess
import tempfile
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field
from pathlib import Path

import pytest

from checker.network.conditions import Draw, Feed
from checker.network.graph import Edge, EdgeKind, LoadTie, Network

NGSPICE = shutil.which("ngspice")
needs_ngspice = pytest.mark.skipif(NGSPICE is None, reason="ngspice is not installed: no second opinion on currents")
# Beside a resistance of 0.1 milliohm the last digit of a voltage is a nanoampere, and tolerances that ask for more
# digits than a double has find no operating point. Newton's last step is far smaller than the tolerance that ends it.
OPTIONS = ".options reltol={0} abstol=1e-8 vntol={0} gmin=1e-15 pivrel=0.9 itl1=2000"
ATTEMPTS = ((False, "1e-10"), (True, "1e-12"), (True, "1e-10"))
"""Whether loads of constant power start at their nominal voltage, which helps near the most that a network can feed
but leaves a trace of the guess in the answer; and the tolerance."""

Vectors = dict[str, float]


def joined(size: int, pairs: Iterable[tuple[int, int]]) -> list[int]:
    """Return for each of `size` posts a post that stands for all it is joined to."""
    beside: list[list[int]] = [[] for _ in range(size)]
    for a, b in pairs:
        beside[a].append(b)
        beside[b].append(a)
    found = [-1] * size
    for start in range(size):
        waiting = [start] if found[start] < 0 else []
        while waiting:
            post = waiting.pop()
            if found[post] < 0:
                found[post] = start
                waiting += beside[post]
    return found


@dataclass
class Netlist:
    """Write one network in one switch state; `closed` are contacts (switch, post, post).

    Of the diodes those in `conducting` carry current, as a drop and a resistance; whether that is
    right `diode_faults` tells from ngspice's answer. `scale_ohm` multiplies the resistance of single
    edges: to show that it would be noticed.
    """

    network: Network
    closed: frozenset[tuple[str, str, str]]
    ohm_mm2_per_m: float
    is_full: bool
    conducting: frozenset[int] = frozenset()
    scale_ohm: dict[int, float] = field(default_factory=dict)

    def __post_init__(self) -> None:
        """Write batteries and edges."""
        net = self.network
        self.live = [edge for edge in net.edges if self._is_live(edge)]
        self.cells = [(b, b.full if self.is_full else b.low) for b in net.batteries]
        self.ohm = {edge.index: self._ohm(edge) for edge in self.live}
        size = len(net.posts)
        pairs = [(edge.a, edge.b) for edge in self.live] + [(b.pos, b.neg) for b, cell in self.cells if cell]
        self.island = joined(size, pairs)
        self.powered = {self.island[b.pos] for b, cell in self.cells if cell}
        self.lines: list[str] = []
        self.guesses: list[str] = []
        self.knees: list[tuple[int, int, float]] = []
        self.has_loop: set[int] = set()  # edges in places where edges without resistance form a loop
        self._write_edges()
        for number, (battery, cell) in enumerate(self.cells):
            if cell:
                self.lines.append(f"vb{number} b{number} {self.node(battery.neg)} {cell.emf_v!r}")
                self.lines.append(f"rb{number} b{number} {self.node(battery.pos)} {cell.resistance_ohm!r}")
        self.held: dict[int, LoadTie] = {}

    def node(self, post: int) -> str:
        """Return the node of a post."""
        return "0" if post == self.network.reference else f"n{post}"

    def _is_live(self, edge: Edge) -> bool:
        if edge.kind is EdgeKind.DIODE:
            return edge.index in self.conducting
        if edge.kind is EdgeKind.SHIELD:  # no known resistance: nothing may rest on it
            return False
        if edge.kind is not EdgeKind.CONTACT:
            return True
        ends = (self.network.posts[post].rsplit(".", 1)[-1] for post in (edge.a, edge.b))
        return (edge.part, *ends) in self.closed

    def _ohm(self, edge: Edge) -> float:
        ohm = self.ohm_mm2_per_m * edge.length_m / edge.area_mm2 if edge.area_mm2 else edge.resistance_ohm
        return ohm * self.scale_ohm.get(edge.index, 1.0)

    def _write_edges(self) -> None:
        free = [edge for edge in self.live if self.ohm[edge.index] == 0]
        places = joined(len(self.network.posts), ((edge.a, edge.b) for edge in free))
        root = list(range(len(self.network.posts)))
        looped = set()
        for edge in free:
            if root[edge.a] == root[edge.b]:  # it closes a loop: nothing tells how much it carries
                looped.add(places[edge.a])
                continue
            old, new = root[edge.a], root[edge.b]
            root = [new if r == old else r for r in root]
            self.lines.append(f"vz{edge.index} {self.node(edge.a)} {self.node(edge.b)} 0")
        self.has_loop = {edge.index for edge in free if places[edge.a] in looped}
        for edge in self.live:
            if self.ohm[edge.index] > 0 and edge.a != edge.b:
                start = self.node(edge.a)
                if edge.drop_v:
                    self.lines.append(f"vd{edge.index} {start} d{edge.index} {edge.drop_v!r}")
                    start = f"d{edge.index}"
                self.lines.append(f"r{edge.index} {start} {self.node(edge.b)} {self.ohm[edge.index]!r}")

    def add(self, draws: Sequence[Draw], feeds: Sequence[Feed]) -> None:
        """Write loads and sources; what no battery can feed draws nothing.

        A source whose island has no battery (a solar array) gives its current into the input of a
        converter, written as a voltage source: it takes whatever comes.
        """
        home = self.island[self.network.reference]
        for number, draw in enumerate(draws):
            is_fed = self.island[draw.feed] in self.powered and self.island[draw.back] == self.island[draw.feed]
            if is_fed and draw.current_a:
                self.lines.append(self._load(number, draw))
        for number, feed in enumerate(feeds):
            island = self.island[feed.out]
            inputs = [t for t in self.network.loads if t.is_input and self.island[t.feed] == island and island != home]
            if island not in self.powered:
                if not inputs or self.island[inputs[0].back] != self.island[feed.back]:
                    continue
                self.held[island] = inputs[0]
            elif self.island[feed.back] != island:
                continue
            self.lines.append(f"is{number} {self.node(feed.back)} {self.node(feed.out)} {feed.current_a!r}")
        for island, tie in sorted(self.held.items()):
            self.lines.append(f"vh{island} {self.node(tie.feed)} {self.node(tie.back)} {tie.voltage_v!r}")

    def _load(self, number: int, draw: Draw) -> str:
        feed, back = self.node(draw.feed), self.node(draw.back)
        if draw.model == "constant-current":
            return f"il{number} {feed} {back} {draw.current_a!r}"
        if draw.model == "resistive":
            return f"rl{number} {feed} {back} {draw.nominal_v / draw.current_a!r}"
        # Below half its nominal voltage the load is written as a resistor that meets P = U·I there, so that
        # ngspice finds its way from 0 V, and so that a network that cannot feed it shows less than that half.
        power_w, knee_v = draw.current_a * draw.nominal_v, draw.nominal_v / 2
        volts = f"(V({feed})-V({back}))"
        load = (
            f"bl{number} {feed} {back} I = {volts} > {knee_v!r} ? {power_w!r}/{volts} : {volts}*{power_w / knee_v**2!r}"
        )
        self.knees.append((draw.feed, draw.back, knee_v))
        if feed != "0":
            self.guesses.append(f".nodeset v({feed})={draw.nominal_v!r}")
        return load

    def shorted(self, post: int, other: int) -> Netlist:
        """Return the netlist with two posts joined by a source of 0 V; the vector i(vf) is the current of the fault."""
        found = copy.copy(self)
        found.lines = [*self.lines, f"vf {self.node(post)} {self.node(other)} 0"]
        return found

    def text(self, title: str = "", attempt: tuple[bool, str] = ATTEMPTS[0]) -> str:
        """Return the whole netlist; whatever floats is tied to the ground by one resistor, which carries nothing."""
        ties = [(tie.feed, tie.back) for tie in self.held.values()]
        whole = joined(len(self.network.posts), [*enumerate(self.island), *ties])
        loose = sorted(set(whole) - {whole[self.network.reference]})
        ground = [f"rt{post} {self.node(post)} 0 1" for post in loose]
        is_guided, tolerance = attempt
        guesses = self.guesses if is_guided else []
        return "\n".join([title, *self.lines, *ground, *guesses, OPTIONS.format(tolerance), ".end", ""])

    # --- what ngspice says

    def volts(self, found: Vectors) -> list[float]:
        """Return the voltage of every post."""
        return [
            0.0 if post == self.network.reference else found.get(f"v(n{post})", 0.0)
            for post in range(len(self.network.posts))
        ]

    def is_past_knee(self, found: Vectors) -> bool:
        """Tell whether a load of constant power has half its nominal voltage or less."""
        volts = self.volts(found)
        return any(volts[feed] - volts[back] <= knee_v for feed, back, knee_v in self.knees)

    def currents_a(self, found: Vectors) -> dict[int, float]:
        """Return the current of every live edge that has one."""
        volts = self.volts(found)
        return {
            edge.index: found[f"i(vz{edge.index})"]
            if self.ohm[edge.index] == 0
            else (volts[edge.a] - volts[edge.b] - edge.drop_v) / self.ohm[edge.index]
            for edge in self.live
            if edge.index not in self.has_loop
        }

    def diode_faults(self, found: Vectors) -> list[str]:
        """Return the diodes that carry current backward, or block what would flow forward."""
        volts, currents = self.volts(found), self.currents_a(found)
        wrong = []
        for edge in self.network.diodes:
            forward_v = volts[edge.a] - volts[edge.b] - edge.drop_v
            if edge.index in self.conducting:
                if currents[edge.index] < -1e-6:
                    wrong.append(f"{edge.part} carries {currents[edge.index]!r} A")
            elif self.island[edge.a] == self.island[edge.b] and forward_v > 1e-6:
                wrong.append(f"{edge.part} blocks {forward_v!r} V")
        return wrong

    def battery_currents(self, found: Vectors) -> dict[str, float]:
        """Return what each battery gives."""
        return {b.device: -found[f"i(vb{number})"] for number, (b, cell) in enumerate(self.cells) if cell}


def ngspice(netlists: Sequence[Netlist]) -> list[Vectors | None]:
    """Have ngspice find all operating points in one run; return the vectors of each, by name, or None.

    Those that it does not find, or finds past the knee of a load of constant power although there
    may be another on this side of it, are tried again in another way.
    """
    found: list[Vectors | None] = [None] * len(netlists)
    left = list(range(len(netlists)))
    for attempt in ATTEMPTS:
        for number, vectors in zip(left, _run([netlists[n] for n in left], attempt) if left else (), strict=True):
            found[number] = vectors or found[number]
        answers = [(number, found[number]) for number in left]
        left = [number for number, answer in answers if answer is None or netlists[number].is_past_knee(answer)]
    return found


def _run(netlists: Sequence[Netlist], attempt: tuple[bool, str]) -> list[Vectors | None]:
    assert NGSPICE is not None
    titles = [f"c{number}" for number in range(len(netlists))]
    with tempfile.TemporaryDirectory() as scratch:
        folder = Path(scratch)
        steps = ["* all circuits in one run", ".control", "set filetype=ascii", "set appendwrite"]
        for title, netlist in zip(titles, netlists, strict=True):
            (folder / f"{title}.cir").write_text(netlist.text(title, attempt), encoding="ascii")
            steps += [f"source {title}.cir", "op", "write out.raw", "destroy all", "remcirc"]
        (folder / "run.sp").write_text("\n".join([*steps, "quit", ".endc", ".end", ""]), encoding="ascii")
        subprocess.run([NGSPICE, "-b", "run.sp"], cwd=folder, capture_output=True, check=False)
        raw = folder / "out.raw"
        found = dict(read_raw(raw.read_text(encoding="ascii"))) if raw.exists() else {}
    return [found.get(title) for title in titles]


def solved(netlists: Sequence[Netlist]) -> list[Vectors]:
    """Have ngspice solve all netlists in one run; none may fail."""
    found = ngspice(netlists)
    assert None not in found, f"ngspice found no operating point: {netlists[found.index(None)].text()}"
    return [vectors for vectors in found if vectors is not None]


def read_raw(text: str) -> list[tuple[str, Vectors]]:
    """Read a raw file of operating points written as text: title and vectors of each."""
    plots: list[tuple[str, Vectors]] = []
    for part in text.split("Title: ")[1:]:
        title, rest = part.split("\n", 1)
        head, values = rest.split("\nValues:\n")
        if "Plotname: Operating Point" not in head:
            continue
        names = [line.split("\t")[2] for line in head.split("Variables:\n")[1].splitlines()]
        numbers = [float(line.split("\t")[-1]) for line in values.splitlines() if line.strip()]
        plots.append((title, dict(zip(names, numbers, strict=True))))
    return plots
