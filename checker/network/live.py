"""Find the posts that a battery keeps live with no overcurrent device between."""

from __future__ import annotations

from checker.network.graph import EdgeKind, Network
from checker.network.potentials import Potentials
from checker.network.states import places, places_beyond


def unprotected_live_posts(network: Network, potentials: Potentials) -> frozenset[int]:
    """Return the ungrounded posts that a battery reaches over conductors, contacts and diodes alone."""
    place = places(network, potentials.state, (EdgeKind.DEVICE,))
    starts = {
        place[post]
        for battery in network.batteries
        for post in (battery.pos, battery.neg)
        if not potentials.is_return(post)
    }
    reached = places_beyond(network, place, starts)
    return frozenset(p for p in range(len(network.posts)) if place[p] in reached and not potentials.is_return(p))
