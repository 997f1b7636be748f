"""Ask what hangs behind one overcurrent device together, and which loads can be fed one without the other."""

from __future__ import annotations

from collections.abc import Iterable

from checker.boat.hull import Boat
from checker.boat.parts import Load, Overcurrent, Switch
from checker.network.graph import EdgeKind, LoadTie, Network
from checker.network.states import SwitchState, live_edges, places
from checker.network.walk import Neighbours, neighbours, path_between


def loads_of_one_device(network: Network, state: SwitchState) -> dict[str, tuple[str, ...]]:
    """Return for each load what hangs behind the same devices with it, itself left out.

    A load with no device between it and a battery is not in the answer.
    """
    region = places(network, state, (EdgeKind.DEVICE,), over_diodes=True)
    banks = {region[post] for battery in network.batteries for post in (battery.pos, battery.neg)}
    members: dict[int, list[str]] = {}
    for load in network.loads:
        members.setdefault(region[load.feed], []).append(load.device)
    return {
        load.device: tuple(sorted({name for name in members[region[load.feed]] if name != load.device}))
        for load in network.loads
        if region[load.feed] not in banks
    }


class Parting:
    """Tell which of two loads can be fed without the other, by what a hand can open."""

    def __init__(self, boat: Boat, network: Network, states: Iterable[SwitchState]) -> None:
        self._boat = boat
        self._tops = [b.pos for b in network.batteries]
        self._feeds = {load.device: load for load in network.loads}
        diodes = [edge.index for edge in network.diodes]
        self._at: list[Neighbours] = [neighbours(network, [*live_edges(network, s), *diodes]) for s in states]

    def is_fed_alone(self, lit: str, dark: str) -> bool:
        """Tell whether one load is fed while another is not: in some state, or with one thing more open."""
        part = self._boat.devices[dark].part
        if isinstance(part, Load) and part.has_own_switch:
            return True
        first, second = self._feeds[lit], self._feeds[dark]
        return any(self._are_parted(at, first, second) for at in self._at)

    def _are_parted(self, at: Neighbours, lit: LoadTie, dark: LoadTie) -> bool:
        if path_between(at, lit.feed, self._tops) is None:
            return False
        way = path_between(at, dark.feed, self._tops)
        if way is None:
            return True
        opened = dict.fromkeys(edge.part for edge in way if self._can_open(edge.part))
        return any(
            path_between(at, dark.feed, self._tops, frozenset((part,))) is None
            and path_between(at, lit.feed, self._tops, frozenset((part,))) is not None
            for part in opened
        )

    def _can_open(self, part: str) -> bool:
        """Tell whether a part is a breaker or has contacts; a fuse is drawn, not switched."""
        device = self._boat.devices.get(part)
        if device is None:
            return False
        return isinstance(device.part, Switch) or (isinstance(device.part, Overcurrent) and device.part.is_breaker)
