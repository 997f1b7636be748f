"""Decide for every ungrounded conductor, over all states, how it stands to what could feed it.

Three checks tell three kinds of trouble from this one study: nothing opens a fault; the
device that does stands too far off; what stands there lets more through than the conductor
allows.
"""

from __future__ import annotations

import math
from enum import Enum
from functools import cached_property
from typing import NamedTuple

from checker.boat.hull import Conductor
from checker.checks.bearing import SIZING
from checker.checks.check import Case
from checker.checks.roles import BANK, EXEMPTIONS, PIGTAIL, protection_exemption, role_holds
from checker.network.exposure import ExposureStudy
from checker.network.graph import Edge, EdgeKind
from checker.network.potentials import Potentials
from checker.network.runs import HAS_LENGTH_OR_OPENS, Run, unprotected_runs
from checker.network.states import SwitchState, live_edges, places
from checker.network.walk import Neighbours, neighbours, path_between

PROTECTION = (*SIZING, EXEMPTIONS, "distance", "device_rating")
"""The tables of a limit set that say what protects a conductor, and from how far off."""

UNKNOWN_ALLOWED_A = 1e12
"""Stands for "finite" where the table has no row: only an unlimited feed is then a fault."""


class Kind(Enum):
    """Say how a conductor stands to its feeds; the first figure of the value is how grave that is."""

    EXEMPT = (0, 0)
    PROTECTED = (1, 0)
    SHORT = (1, 1)  # ahead of a device, near enough
    NO_FIGURE = (2, 0)
    NO_REASON = (2, 1)  # near enough only if the reason were written
    RATING = (3, 0)
    STEP = (3, 1)
    DOUBLE = (3, 2)
    FAR = (4, 0)
    OPEN = (4, 1)

    @property
    def gravity(self) -> int:
        """Return 3 or more for a fault."""
        return self.value[0]


class Feeding(NamedTuple):
    """Hold the verdict on one conductor under one limit set, in the state where it is worst."""

    kind: Kind
    conductor: Conductor
    reaching_a: float
    allowed_a: float
    state: SwitchState
    terms: tuple[tuple[str, float], ...] = ()
    run: Run | None = None
    limit_m: float = 0.0
    note: str = ""


def feedings(case: Case) -> list[Feeding]:
    """Return the verdict on every conductor that is not at the reference's potential, in order."""
    if "feedings" not in case.memo:
        case.memo["feedings"] = _feedings(case)
    found: list[Feeding] = case.memo["feedings"]
    return found


def _feedings(case: Case) -> list[Feeding]:
    worst: dict[str, Feeding] = {}
    exempt = {c.id: told for c in case.boat.conductors.values() if (told := protection_exemption(case, c))}
    allowed = {
        c.id: UNKNOWN_ALLOWED_A if (a := case.bearings.allowed_a(c)) is None else a
        for c in case.boat.conductors.values()
    }
    for potentials, study in zip(case.studies.potentials, case.studies.exposures, strict=True):
        view = _State(case, potentials, study, allowed, exempt)
        for edge in case.studies.network.edges:
            if edge.kind in (EdgeKind.CONDUCTOR, EdgeKind.BOND) and edge.index in study.exposures:
                found = view.feeding(edge)
                known = worst.get(edge.part)
                if known is None or _rank(found) > _rank(known):
                    worst[edge.part] = found
    return [worst[part] for part in sorted(worst)]


def _rank(feeding: Feeding) -> tuple[object, ...]:
    """Order the verdicts of several states: a fault of normal operation is told before a worse abnormal one."""
    length_m = feeding.run.length_m if feeding.run else 0.0
    is_normal_fault = feeding.kind.gravity >= 3 and feeding.state.is_normal
    return (feeding.kind.gravity, is_normal_fault, feeding.kind.value, length_m, feeding.reaching_a)


class _State:
    """Judge conductors in one switch state."""

    def __init__(
        self,
        case: Case,
        potentials: Potentials,
        study: ExposureStudy,
        allowed: dict[str, float],
        exempt: dict[str, str],
    ) -> None:
        self._case = case
        self._state = potentials.state
        self._study = study
        self._allowed = allowed
        self._exempt = exempt
        # A pigtail needs no device of its own, but its length counts into the run that it is a piece of.
        freed = [name for name in exempt if case.boat.conductors[name].role != PIGTAIL]
        self._runs = unprotected_runs(case.studies.network, potentials, study, allowed, freed)
        # Pieces ahead of others: they are judged where their run ends.
        onward = [(run, name) for run in self._runs.values() if run.device for name in run.conductors[:-1]]
        self._onward = {name for _, name in onward}
        self._near_onward = {name for run, name in onward if run.length_m <= self._limit_m(run) * (1 + 1e-9)}
        self._place = places(case.studies.network, potentials.state, HAS_LENGTH_OR_OPENS, over_diodes=True)

    def feeding(self, edge: Edge) -> Feeding:
        """Return how one conductor stands."""
        conductor = self._case.boat.conductors[edge.part]
        exposure = self._study.exposures[edge.index]
        found = Feeding(Kind.PROTECTED, conductor, exposure.worst_a, self._allowed[edge.part], self._state)
        if edge.part in self._exempt:
            return found._replace(kind=Kind.EXEMPT, note=self._exempt[edge.part])
        if exposure.worst_a <= found.allowed_a * (1 + 1e-9):
            return found._replace(kind=Kind.NO_FIGURE) if found.allowed_a == UNKNOWN_ALLOWED_A else found
        if conductor.role == BANK and role_holds(self._case, conductor):
            note = "part of its bank: its length counts into what leaves the bank"
            return found._replace(kind=Kind.EXEMPT, note=note)
        return self._beyond(edge, found)

    def _beyond(self, edge: Edge, found: Feeding) -> Feeding:
        """Judge a conductor that more can reach than it may stand behind."""
        run = self._runs[edge.part]
        limit_m = self._limit_m(run)
        if run.device and run.length_m <= limit_m * (1 + 1e-9):
            return self._near(run, limit_m, found)
        exposure = self._study.exposures[edge.index]
        node = edge.a if exposure.at_a >= exposure.at_b else edge.b
        terms = tuple(self._study.terms(edge, node))
        found = found._replace(run=run, limit_m=limit_m, terms=terms)
        kind = Kind.FAR if run.device else Kind.OPEN
        if not math.isinf(found.reaching_a):
            kind = self._finite_kind(edge, node, terms, found.allowed_a)
        is_onward = not run.device and edge.part in self._onward
        if is_onward and (kind is not Kind.RATING or edge.part in self._near_onward):
            note = "its length is judged at the device it leads to"
            return found._replace(kind=Kind.SHORT, terms=(), limit_m=0.0, note=note)
        return found._replace(kind=kind)

    def _near(self, run: Run, limit_m: float, found: Feeding) -> Feeding:
        rule = self._case.limits.distance
        reason = any(self._case.boat.conductors[name].place_reason for name in run.conductors)
        near = found._replace(kind=Kind.SHORT, run=run, limit_m=limit_m)
        if rule.needs_reason and run.length_m > rule.open_m * (1 + 1e-9) and not reason:
            return near._replace(kind=Kind.NO_REASON)
        return near

    def _limit_m(self, run: Run) -> float:
        """Return how long a run may be: longer where all of it lies in a sheath or enclosure."""
        rule = self._case.limits.distance
        conductors = [self._case.boat.conductors[name] for name in run.conductors]
        if not all(c.enclosed_m >= c.length_m * (1 - 1e-9) for c in conductors):
            return rule.open_m
        if run.is_from_battery and rule.battery_enclosed_m is not None:
            return rule.battery_enclosed_m
        return rule.enclosed_m

    def _finite_kind(self, edge: Edge, node: int, terms: tuple[tuple[str, float], ...], allowed_a: float) -> Kind:
        """Tell one device too large from several that add up, and from a step to a thinner size."""
        if len(terms) > 1 and terms[0][1] <= allowed_a * (1 + 1e-9):
            return Kind.DOUBLE
        device = terms[0][0] if terms else ""
        if device not in self._case.boat.devices:
            return Kind.RATING  # a source of limited output is too strong for its own lead
        index = self._case.studies.network.index
        posts = [index[f"{device}.{post}"] for post in ("line", "load") if f"{device}.{post}" in index]
        at_device = any(self._place[post] == self._place[node] for post in posts)
        return Kind.RATING if at_device or not self._steps_down(edge, node, posts, terms[0][1]) else Kind.STEP

    def _steps_down(self, edge: Edge, node: int, posts: list[int], rating_a: float) -> bool:
        """Tell whether a conductor between a device and this one suits the device: else the device is too large."""
        way = path_between(self._ways, node, posts, frozenset((edge.part,)))
        if way is None:
            return True
        return any(self._allowed[e.part] >= rating_a * (1 - 1e-9) for e in way if e.part in self._allowed)

    @cached_property
    def _ways(self) -> Neighbours:
        """Return what conducts at each post with every device taken out."""
        network = self._case.studies.network
        live = [i for i in live_edges(network, self._state) if network.edges[i].kind is not EdgeKind.DEVICE]
        return neighbours(network, [*live, *(edge.index for edge in network.diodes)])
