"""Tell on a hull's page how it is protected from each bank down, and what each circuit loses."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence

from checker.boat.hull import Circuit
from checker.boat.parts import Overcurrent
from checker.checks.words import ampere, measured, percent
from checker.finding import Outcome, Verdict
from checker.network.ladder import Rung
from checker.output.pages.dossier import Dossier
from checker.output.pages.drawings import Drawn
from checker.output.pages.html import Content, Markup, Section, TableCell, grouped_table, paragraph, table, tag
from checker.output.pages.style import deep
from checker.output.text import far_words, flow_words, selective_words
from checker.result.fleet_view import headroom_fraction
from checker.result.gather import natural

MOST_PLOTTED = 3
_DROPS = ("voltage-drop", "voltage-drop-from-bank")


def ladder(dossier: Dossier) -> Section:
    """Tell every device with what it faces, each under the one above it."""
    groups: list[tuple[str, list[Sequence[TableCell]]]] = []
    for rung in dossier.subject.ladder:
        if rung.depth == 1 and (not groups or groups[-1][0] != f"from {rung.above}"):
            groups.append((f"from {rung.above}", []))
        groups[-1][1].append(_rung_row(rung, dossier))
    headings = ("device", "under", "rating, part", "serves", "conductor nearest its limit", "can flow there",
                "short circuit at the far end", "selectivity")  # fmt: skip
    told: Content = (
        grouped_table("rungs", "Protection from each bank or source down", headings, groups)
        if groups else paragraph("No overcurrent device is aboard.")
    )  # fmt: skip
    return Section("ladder", "Protection, from each bank down", (told,), is_wide=True)


def _rung_row(rung: Rung, dossier: Dossier) -> tuple[TableCell, ...]:
    nearest = dossier.subject.tightest.get(rung.device)
    protects = ""
    if nearest is not None and nearest.measure is not None:
        value, limit = measured(nearest.measure)
        protects = f"{nearest.part}: {value} of {limit} allowed"
    return (
        tag("span", rung.device, class_=deep(rung.depth)), rung.above, f"{ampere(rung.rating_a)}, {rung.part}",
        ", ".join(rung.serves), protects, flow_words(rung), far_words(rung), selective_words(rung),
    )  # fmt: skip


def one_line(drawn: Drawn) -> Section:
    """Show the one-line drawing."""
    picture = drawn.one_line
    name = "drawing one-line in-pieces" if picture.pieces else "drawing one-line"
    frame = tag("div", picture.whole, class_=name, tabindex="0", role="group", aria_label="One-line drawing")
    told: list[Content] = [tag("figure", frame)]
    if picture.pieces:
        words = f"It takes {len(picture.pieces)} sheets, row by row: lay them so that what two of them show meets."
        told += [paragraph(words, class_="on-paper"), *(tag("div", one, class_="piece") for one in picture.pieces)]
    return Section("one-line", "One-line drawing", tuple(told), is_wide=picture.is_wide)


def circuits(dossier: Dossier) -> Section:
    """Tell each circuit's drop of its own and from its bank, and its smallest headroom."""
    headings = ("circuit", "name", "current", "own device", "sizes", "drop of its own", "drop from the bank",
                "smallest headroom of all")  # fmt: skip
    rows = [_circuit_row(dossier, circuit) for circuit in _in_order(dossier)]
    return Section("circuits", "Circuits: drop and headroom", (
        paragraph("Of several limit sets the one that leaves least is told. Headroom is what is left of a limit, as a "
                  "share of it. What is picked from a row of sizes (gauges, ratings) has none to tell."),
        table("circuit-table", "Drop and headroom by circuit", headings, rows)
        if rows else paragraph("No circuit is aboard."),
    ), is_wide=True)  # fmt: skip


def _in_order(dossier: Dossier) -> list[Circuit]:
    return sorted(dossier.boat.circuits.values(), key=lambda circuit: natural(circuit.id))


def _circuit_row(dossier: Dossier, circuit: Circuit) -> tuple[str, ...]:
    device = dossier.boat.devices.get(circuit.device)
    rating = f" {ampere(device.part.rating_a)}" if device and isinstance(device.part, Overcurrent) else ""
    wires = [dossier.boat.conductors[name] for name in circuit.conductors if name in dossier.boat.conductors]
    sizes = sorted({wire.size for wire in wires}, key=lambda size: -size.area_mm2)
    own = _of_circuit(dossier, circuit)
    least = min(own, key=headroom, default=None)
    return (
        circuit.id, circuit.name, "" if circuit.current_a is None else ampere(circuit.current_a),
        f"{circuit.device}{rating}", ", ".join(size.text for size in sizes),
        *(_drop_words([o for o in own if (o.check, o.part) == (check, circuit.id)]) for check in _DROPS),
        "" if least is None else f"{percent(headroom(least))}: {least.check} at {least.part}{_standing(least)}",
    )  # fmt: skip


def _of_circuit(dossier: Dossier, circuit: Circuit) -> list[Outcome]:
    """Return what was held against a limit in a circuit and has headroom to tell."""
    own = (o for o in dossier.subject.outcomes if circuit.id in (o.circuit, o.part))
    return [o for o in own if headroom_fraction(o) is not None]


def headroom(outcome: Outcome) -> float:
    """Return the headroom of an outcome, the largest there is where it has none to tell."""
    fraction = headroom_fraction(outcome)
    return math.inf if fraction is None else fraction


def _drop_words(outcomes: Sequence[Outcome]) -> str:
    worst = min(outcomes, key=headroom, default=None)
    if worst is None or worst.measure is None:
        return "not asked"
    value, limit = measured(worst.measure)
    return f"{value} of {limit}, headroom {headroom(worst) * 100:.1f} %{_standing(worst)}"


def _standing(outcome: Outcome) -> str:
    """Tell in words what is no plain pass."""
    if outcome.verdict is Verdict.PASSED:
        return " (thin)" if outcome.is_thin else ""
    return " (FINDING)" if outcome.verdict is Verdict.FINDING else f" ({outcome.verdict.value})"


def worst_circuits(dossier: Dossier) -> list[str]:
    """Return the circuits that lose most of what they may lose, the worst first."""
    found: list[tuple[float, Circuit]] = []
    for circuit in _in_order(dossier):
        drops = [headroom(o) for o in dossier.by_part.get(circuit.id, ()) if o.check in _DROPS]
        if drops and min(drops) < math.inf:
            found.append((min(drops), circuit))
    found.sort(key=lambda row: (row[0], natural(row[1].id)))
    return [circuit.id for _, circuit in found[:MOST_PLOTTED]]


def plots(drawn: Drawn) -> Iterator[Section]:
    """Show the plots of the worst circuits, if there are any."""
    if not drawn.plots:
        return
    shown = (_plot(title, svg) for title, svg in drawn.plots)
    yield Section("plots", "Plots of the circuits with the least headroom in voltage", (
        paragraph("How the devices in series open, and where the voltage is lost."),
        *shown,
    ))  # fmt: skip


def _plot(title: str, svg: Markup) -> Markup:
    return tag("figure", tag("div", svg, class_="drawing plot", tabindex="0", role="group", aria_label=title))
