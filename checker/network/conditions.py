"""Turn an operating condition into a switch state and the currents that loads draw and sources feed."""

from __future__ import annotations

from dataclasses import dataclass

from checker.boat.hull import Boat, Condition
from checker.boat.parts import Load, Source, Switch
from checker.network.graph import Network
from checker.network.states import SwitchState

CONSTANT_CURRENT, CONSTANT_POWER, RESISTIVE = "constant-current", "constant-power", "resistive"
HOLDING = "holding"
"""A source that holds its voltage: no model of a load, but solved like one of negative current."""


@dataclass(frozen=True, slots=True)
class Draw:
    """Hold one load in one condition: its posts, its current at nominal voltage, and its model."""

    name: str
    feed: int
    back: int
    current_a: float
    nominal_v: float
    model: str


@dataclass(frozen=True, slots=True)
class Feed:
    """Hold one source in one condition: current out of its post, back into its return.

    With `holds_v` the current is the most that it gives: it gives no more than holds that voltage.
    """

    name: str
    out: int
    back: int
    current_a: float
    holds_v: float | None = None


@dataclass(frozen=True, slots=True)
class Operation:
    """Hold a condition ready to be solved."""

    condition: Condition
    state: SwitchState
    draws: tuple[Draw, ...]
    feeds: tuple[Feed, ...]


def operations(boat: Boat, network: Network) -> tuple[Operation, ...]:
    """Return every condition of a boat ready to be solved, in order."""
    return tuple(
        Operation(
            condition,
            condition_state(boat, condition),
            (
                *(_draw(boat, network, name, amps) for name, amps in condition.loads_a),
                *_taken(boat, network, condition),
            ),
            tuple(
                _feed(boat, network, name, amps, dict(condition.holds_v).get(name))
                for name, amps in condition.sources_a
            ),
        )
        for condition in boat.conditions.values()
    )


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


def _draw(boat: Boat, network: Network, name: str, current_a: float) -> Draw:
    owner = (boat.circuits[name].load or name) if name in boat.circuits else name
    device = boat.devices.get(owner)
    if device is not None and isinstance(device.part, Load):
        part = device.part
        ends = network.index[f"{owner}.{part.feed_post}"], network.index[f"{owner}.{part.return_post}"]
        return Draw(name, *ends, current_a, part.voltage_v, part.model)
    if device is not None and isinstance(device.part, Source):  # what it draws while it stands by
        end = device.part.outputs[0]
        ends = network.index[f"{owner}.{end.post}"], network.index[f"{owner}.{end.return_post}"]
        return Draw(name, *ends, current_a, end.voltage_v, CONSTANT_CURRENT)
    source, post = name.rsplit(".", 1)
    converter = boat.devices[source].part
    assert isinstance(converter, Source)
    entry = next(end for end in converter.inputs if end.post == post)
    ends = network.index[name], network.index[f"{source}.{entry.return_post}"]
    return Draw(name, *ends, current_a, entry.voltage_v, CONSTANT_CURRENT)


def _taken(boat: Boat, network: Network, condition: Condition) -> tuple[Draw, ...]:
    """Return what converters take in while they give, where the condition does not say it itself.

    As much of the input's largest current as of the output's is given, at constant power: a
    converter draws more as its bank sinks.
    """
    found: list[Draw] = []
    said = {name.rsplit(".", 1)[0] for name, _ in condition.loads_a if name not in boat.devices}
    for name, current_a in condition.sources_a:
        owner = name if name in boat.devices else name.rsplit(".", 1)[0]
        part = boat.devices[owner].part
        assert isinstance(part, Source)
        if owner in said or len(part.inputs) != 1:
            continue
        post = part.outputs[0].post if name == owner else name.rsplit(".", 1)[1]
        most_a = next(end.max_a for end in part.outputs if end.post == post)
        (entry,) = part.inputs
        ends = network.index[f"{owner}.{entry.post}"], network.index[f"{owner}.{entry.return_post}"]
        amps = entry.max_a * current_a / most_a if most_a else 0.0
        found.append(Draw(f"{owner}.{entry.post} for {post}", *ends, amps, entry.voltage_v, CONSTANT_POWER))
    return tuple(found)


def _feed(boat: Boat, network: Network, name: str, current_a: float, holds_v: float | None) -> Feed:
    owner = name if name in boat.devices else name.rsplit(".", 1)[0]
    part = boat.devices[owner].part
    assert isinstance(part, Source)
    post = part.outputs[0].post if name == owner else name.rsplit(".", 1)[1]
    end = next(end for end in part.outputs if end.post == post)
    ends = network.index[f"{owner}.{post}"], network.index[f"{owner}.{end.return_post}"]
    return Feed(name, *ends, current_a, holds_v)
