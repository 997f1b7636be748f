"""Find what parts a bank from the boat: its battery switches, and its main devices."""

from __future__ import annotations

from checker.boat.hull import Boat
from checker.boat.parts import Overcurrent, Switch
from checker.network.graph import EdgeKind, Network
from checker.network.studies import Studies
from checker.network.walk import groups


def battery_switches(studies: Studies) -> tuple[str, ...]:
    """Return the hand-worked switches that part a bank's live side from the rest, in the order of their ids.

    A bank leads to them with nothing between; or with one overcurrent device between, where
    other devices lie behind the switch: one that turns a single load on and off is none.
    """
    boat, network = studies.boat, studies.network
    region = _regions(network)
    first = {region[post] for b in network.batteries for post in (b.pos, b.neg) if not studies.usual.is_return(post)}
    first -= {region[network.reference]}
    devices = [edge for edge in network.edges if edge.kind is EdgeKind.DEVICE]
    second = {region[edge.other(post)] for edge in devices for post in (edge.a, edge.b) if region[post] in first}
    distributed = {region[post] for edge in devices for post in (edge.a, edge.b)}
    found: list[str] = []
    for name in _by_hand(boat):
        for edge in network.edges_of.get(name, ()):
            for near, far in ((edge.a, edge.b), (edge.b, edge.a)):
                leads_on = region[near] in second and region[far] in distributed and region[far] not in first
                if edge.kind is EdgeKind.CONTACT and (region[near] in first or leads_on):
                    found.append(name)
    return tuple(dict.fromkeys(found))


def main_devices(studies: Studies) -> tuple[str, ...]:
    """Return the first overcurrent devices behind the banks under which other devices stand."""
    upper = {pair.upper for pair, _, _, _ in studies.selectivity}
    return tuple(
        device.id
        for device in studies.boat.devices.values()
        if isinstance(device.part, Overcurrent) and device.id in upper and not studies.is_behind_device(device.id)
    )


def _by_hand(boat: Boat) -> list[str]:
    """Return the hand-worked switches that are no branch circuit's own."""
    return [d.id for d in boat.devices.values() if isinstance(d.part, Switch) and d.part.by_hand and not d.circuit]


def _regions(network: Network) -> list[int]:
    """Return for each post the region it is in, shape (posts,): devices, contacts and diodes part regions."""
    parting = (EdgeKind.DEVICE, EdgeKind.CONTACT, EdgeKind.DIODE)
    return groups(len(network.posts), ((e.a, e.b) for e in network.edges if e.kind not in parting))
