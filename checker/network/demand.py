"""Add up what each bank gives or takes in each operating condition.

With the loads' and sources' currents given, Kirchhoff's current law fixes the current of a
bank that is alone on its island of ungrounded nets, without solving a network. Where two
banks share an island, or diodes lead to several, each is bounded by the sum of both.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from checker.network.conditions import Operation
from checker.network.graph import Network
from checker.network.potentials import Potentials, study_potentials
from checker.network.states import leading_to, places_beyond


@dataclass(frozen=True, slots=True)
class BankCurrent:
    """Hold a bank's current in one condition: the size of it, given or taken, in ampere."""

    bank: str
    condition: str
    current_a: float
    short_time_s: float | None
    is_bound: bool


def bank_currents(network: Network, operations: Sequence[Operation]) -> tuple[BankCurrent, ...]:
    """Return the current of every bank in every condition, in the order of conditions and banks."""
    found: list[BankCurrent] = []
    known: dict[frozenset[tuple[str, str, str]], Potentials] = {}
    for operation in operations:
        closed = operation.state.closed
        if closed not in known:
            known[closed] = study_potentials(network, operation.state)
        found += _in_condition(network, operation, known[closed])
    return tuple(found)


def _in_condition(network: Network, operation: Operation, potentials: Potentials) -> list[BankCurrent]:
    banks_at = {net for _, net in _bank_nets(network, potentials)}
    least: dict[int, float] = {}
    most: dict[int, float] = {}

    def add(nets: Iterable[int], low_a: float, high_a: float) -> None:
        """Add what a bank may have to give; where several may, each gives all or nothing."""
        several = len(banks_at.intersection(nets)) > 1
        for net in nets:
            least[net] = least.get(net, 0.0) + (min(0.0, low_a) if several else low_a)
            most[net] = most.get(net, 0.0) + (max(0.0, high_a) if several else high_a)

    for draw in operation.draws:
        add(_behind(network, potentials, potentials.net[draw.feed]), draw.current_a, draw.current_a)
    for feed in operation.feeds:
        beyond = places_beyond(network, potentials.net, [potentials.net[feed.out]])
        add(beyond, -feed.current_a, -feed.current_a if feed.holds_v is None else 0.0)
    tops: dict[int, set[str]] = {}
    for bank, net in _bank_nets(network, potentials):
        tops.setdefault(net, set()).add(bank)
    condition = operation.condition
    found: list[BankCurrent] = []
    for net, banks in sorted(tops.items()):
        low_a, high_a = least.get(net, 0.0), most.get(net, 0.0)
        is_bound = len(banks) > 1 or low_a != high_a
        for bank in sorted(banks):
            current_a = max(abs(low_a), abs(high_a))
            found.append(BankCurrent(bank, condition.id, current_a, condition.short_time_s, is_bound))
    return found


def _behind(network: Network, potentials: Potentials, net: int) -> set[int]:
    """Return a net and those that feed it through diodes; which of them does is not asked, so each is bounded."""
    diodes = leading_to(network, potentials.net, [net])
    return {net} | {potentials.net[network.edges[index].a] for index in diodes}


def _bank_nets(network: Network, potentials: Potentials) -> list[tuple[str, int]]:
    """Return each bank with the ungrounded net of its highest post."""
    highest: dict[str, tuple[float, int]] = {}
    for battery in network.batteries:
        volts = potentials.above_reference(battery.pos) or 0.0
        if volts > highest.get(battery.bank, (float("-inf"), 0))[0]:
            highest[battery.bank] = (volts, potentials.net[battery.pos])
    return [(bank, net) for bank, (_, net) in sorted(highest.items())]
