"""Add up what each bank gives or takes in each operating condition.

With the loads' and sources' currents given, Kirchhoff's current law fixes the current of a
bank that is alone on its island of ungrounded nets, without solving a network. Where two
banks share an island, each is bounded by the sum of both.
"""

from __future__ import annotations

from dataclasses import dataclass

from checker.boat.hull import Boat, Condition
from checker.boat.parts import Load, Source, Switch
from checker.network.graph import Network
from checker.network.potentials import Potentials, study_potentials
from checker.network.states import SwitchState


@dataclass(frozen=True, slots=True)
class BankCurrent:
    """Hold a bank's current in one condition: the size of it, given or taken, in ampere."""

    bank: str
    condition: str
    current_a: float
    short_time_s: float | None
    is_bound: bool


def condition_state(boat: Boat, condition: Condition) -> SwitchState:
    """Return the switch state of a condition: switches as named, contactors open unless closed by it."""
    closed: set[tuple[str, str, str]] = set()
    named = dict(condition.switches)
    for device in boat.devices.values():
        if not isinstance(device.part, Switch):
            continue
        states = dict(device.part.states)
        if device.id in named:
            chosen = named[device.id]
        elif device.id in condition.closed or device.part.by_hand:
            chosen = max(states, key=lambda name: (len(states[name]), name))
        else:
            chosen = min(states, key=lambda name: (len(states[name]), name))
        closed |= {(device.id, a, b) for a, b in states[chosen]}
    return SwitchState(condition.id, True, frozenset(closed), condition.id)


def bank_currents(boat: Boat, network: Network) -> tuple[BankCurrent, ...]:
    """Return the current of every bank in every condition, in the order of conditions and banks."""
    found: list[BankCurrent] = []
    known: dict[frozenset[tuple[str, str, str]], Potentials] = {}
    for condition in boat.conditions.values():
        state = condition_state(boat, condition)
        if state.closed not in known:
            known[state.closed] = study_potentials(network, state)
        found += _in_condition(boat, network, condition, known[state.closed])
    return tuple(found)


def _in_condition(boat: Boat, network: Network, condition: Condition, potentials: Potentials) -> list[BankCurrent]:
    drawn: dict[int, float] = {}
    for name, current_a in condition.loads_a:
        post = _feed_post(boat, network, name, is_load=True)
        drawn[potentials.net[post]] = drawn.get(potentials.net[post], 0.0) + current_a
    for name, current_a in condition.sources_a:
        post = _feed_post(boat, network, name, is_load=False)
        drawn[potentials.net[post]] = drawn.get(potentials.net[post], 0.0) - current_a
    tops: dict[int, set[str]] = {}
    for bank, net in _bank_nets(network, potentials):
        tops.setdefault(net, set()).add(bank)
    return [
        BankCurrent(bank, condition.id, abs(drawn.get(net, 0.0)), condition.short_time_s, len(banks) > 1)
        for net, banks in sorted(tops.items())
        for bank in sorted(banks)
    ]


def _bank_nets(network: Network, potentials: Potentials) -> list[tuple[str, int]]:
    """Return each bank with the ungrounded net of its highest post."""
    highest: dict[str, tuple[float, int]] = {}
    for battery in network.batteries:
        volts = potentials.above_reference(battery.pos) or 0.0
        if volts > highest.get(battery.bank, (float("-inf"), 0))[0]:
            highest[battery.bank] = (volts, potentials.net[battery.pos])
    return [(bank, net) for bank, (_, net) in sorted(highest.items())]


def _feed_post(boat: Boat, network: Network, name: str, *, is_load: bool) -> int:
    """Return the post at which a named load draws or a named source feeds."""
    if name in boat.circuits:
        name = boat.circuits[name].load
    if name in network.index:
        return network.index[name]
    device = boat.devices[name]
    part = device.part
    if isinstance(part, Load):
        return network.index[f"{name}.{part.feed_post}"]
    assert isinstance(part, Source)
    return network.index[f"{name}.{part.outputs[0].post}"]
