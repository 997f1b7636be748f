"""Gather the studies of one boat; each is made once, when a check first asks for it."""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

from checker.boat.hull import Boat
from checker.boat.parts import Overcurrent
from checker.network.bank import Bank, study_banks
from checker.network.buses import BusFlow, study_buses
from checker.network.conditions import Operation, operations
from checker.network.coordination import Pair, curve_of, device_pairs, selective_up_to_a
from checker.network.cranking import bank_conductors, cranking_conductors, take_off_conductors
from checker.network.demand import BankCurrent, bank_currents
from checker.network.exposure import ExposureStudy, study_exposure
from checker.network.faults import FarEnd, FaultLevels, far_ends
from checker.network.flow import Copper, Flow, Grid
from checker.network.graph import EdgeKind, Network, SourceTie, build_network
from checker.network.ladder import Rung, build_ladder
from checker.network.losses import Diverted, all_off_state, cut_off_sources, diverted_currents, live_loads
from checker.network.metering import Metering, study_metering
from checker.network.potentials import Potentials, study_potentials
from checker.network.returns import ReturnExposure, study_returns
from checker.network.solved import SolvedConditions, solve_operations
from checker.network.states import States, SwitchState, live_edges, places, study_states
from checker.network.supply import SupplyWay, study_supply
from checker.network.walk import groups


@dataclass(frozen=True, slots=True)
class Coppers:
    """Hold the resistivities at which currents, largest faults and smallest faults are reckoned."""

    working: Copper
    cold: Copper
    hot: Copper


MOST_SMALLER_STATES = 16


def _joins_banks(network: Network, potentials: Potentials) -> bool:
    """Tell whether two banks are in parallel on one ungrounded net."""
    banks: dict[int, set[str]] = {}
    for battery in network.batteries:
        if not potentials.is_return(battery.pos):
            banks.setdefault(potentials.net[battery.pos], set()).add(battery.bank)
    return any(len(names) > 1 for names in banks.values())


def _margin(row: tuple[Pair, float | None, float, str]) -> float:
    """Return the share of the prospective current up to which a pair is selective."""
    _, up_to_a, prospective_a, _ = row
    return math.inf if up_to_a is None or not prospective_a else up_to_a / prospective_a


class Studies:
    """Hold a boat, its graph, and what is known about it in every state that must be studied."""

    def __init__(self, boat: Boat, coppers: Coppers | None = None) -> None:
        self.boat = boat
        self._coppers = coppers

    @property
    def coppers(self) -> Coppers:
        """Return the resistivities; the studies of voltages and faults cannot do without them."""
        if self._coppers is None:
            raise ValueError("no resistivity was given")
        return self._coppers

    @cached_property
    def network(self) -> Network:
        """Return the graph."""
        return build_network(self.boat)

    @cached_property
    def states(self) -> States:
        """Return the switch states to study, normal ones first."""
        return study_states(self.boat)

    @cached_property
    def potentials(self) -> tuple[Potentials, ...]:
        """Return nets and voltages, one record a state."""
        return tuple(study_potentials(self.network, state) for state in self.states.kept)

    @cached_property
    def exposures(self) -> tuple[ExposureStudy, ...]:
        """Return what can reach each conductor, one record a state."""
        return tuple(study_exposure(self.network, potentials) for potentials in self.potentials)

    @cached_property
    def returns(self) -> tuple[dict[str, ReturnExposure], ...]:
        """Return what failed loads can send through return conductors, one record a state."""
        return tuple(study_returns(self.network, potentials) for potentials in self.potentials)

    @cached_property
    def buses(self) -> tuple[tuple[BusFlow, ...], ...]:
        """Return what can flow through each bus, one record a state."""
        pairs = zip(self.potentials, self.exposures, strict=True)
        return tuple(study_buses(self.boat, self.network, potentials, study) for potentials, study in pairs)

    @cached_property
    def metering(self) -> tuple[tuple[Metering, ...], ...]:
        """Return what each shunt meters, one record a state."""
        return tuple(study_metering(self.boat, self.network, state) for state in self.states.kept)

    @cached_property
    def banks(self) -> tuple[Bank, ...]:
        """Return the structure of every bank."""
        return study_banks(self.boat, self.network, self.usual)

    @cached_property
    def all_off(self) -> Potentials:
        """Return nets and voltages with every switch off."""
        return study_potentials(self.network, all_off_state(self.boat))

    @cached_property
    def live_when_off(self) -> frozenset[str]:
        """Return the loads that stay live with every switch off."""
        return live_loads(self.network, self.all_off)

    @cached_property
    def cut_off_sources(self) -> list[tuple[SourceTie, SwitchState]]:
        """Return the sources that some switch state parts from every battery."""
        sound = [*self.states.every, all_off_state(self.boat)] if not self.boat.switch_rows else self.states.every
        return cut_off_sources(self.network, sound)

    def diverted(self, heavy_a: float) -> list[Diverted]:
        """Return what other paths carry once a heavy return is open."""
        if "diverted" not in self.network.memo:
            solved = [s for s in self.conditions.solved if isinstance(s.full, Flow)]
            flows = [s.full for s in solved if isinstance(s.full, Flow)]
            self.network.memo["diverted"] = diverted_currents(
                self.network, [s.operation for s in solved], flows, self.coppers.working, heavy_a
            )
        found: list[Diverted] = self.network.memo["diverted"]
        return found

    @cached_property
    def operations(self) -> tuple[Operation, ...]:
        """Return every operating condition, ready to be solved."""
        return operations(self.boat, self.network)

    @cached_property
    def conditions(self) -> SolvedConditions:
        """Return every operating condition solved."""
        return solve_operations(self.network, self.operations, self.coppers.working)

    @cached_property
    def fault_levels(self) -> tuple[FaultLevels, ...]:
        """Return the largest fault currents, one record a state: cold copper, full batteries."""
        return tuple(
            FaultLevels(Grid(self.network, potentials.state, self.coppers.cold, is_full=True), potentials)
            for potentials in self.potentials
        )

    @cached_property
    def far_ends(self) -> dict[str, FarEnd]:
        """Return for each device its far end, in the state where least flows: hot copper, low batteries."""
        worst: dict[str, FarEnd] = {}
        studied = {p.state: study for p, study in zip(self.potentials, self.exposures, strict=True)}
        for potentials in self._leanest:
            grid = Grid(self.network, potentials.state, self.coppers.hot, is_full=False)
            for name, far in far_ends(grid, potentials, studied.get(potentials.state)).items():
                if name not in worst or far.current_a < worst[name].current_a * (1 - 1e-9):
                    worst[name] = far
        return worst

    @property
    def _leanest(self) -> list[Potentials]:
        """Return states in which least may flow: normal ones, and conditions that close what these do not."""
        known = [potentials for potentials in self.potentials if potentials.state.is_normal] or [self.usual]
        if any(_joins_banks(self.network, potentials) for potentials in known):
            # With two banks in parallel more flows than with either alone: the smaller states count too.
            closed = {potentials.state.closed for potentials in known}
            smaller = [state for state in self.states.every if state.is_normal and state.closed not in closed]
            known += [study_potentials(self.network, state) for state in smaller[:MOST_SMALLER_STATES]]
        for operation in self.operations:
            closed_now = operation.state.closed
            if not any(closed_now <= p.state.closed or p.state.closed <= closed_now for p in known):
                known.append(study_potentials(self.network, operation.state))
        return known

    @cached_property
    def selectivity(self) -> tuple[tuple[Pair, float | None, float, str], ...]:
        """Return each pair of devices in series with the current up to which it is selective, and the prospective one.

        In the normal state where the pair comes off worst; None where a part has no band. An
        emergency link is closed by hand for minutes: what it would feed is no matter of selectivity.
        """
        worst: dict[tuple[str, str], tuple[Pair, float | None, float, str]] = {}
        curves = {d.id: curve_of(self.boat, d) for d in self.boat.devices.values() if isinstance(d.part, Overcurrent)}
        rows = zip(self.potentials, self.exposures, self.fault_levels, strict=True)
        for potentials, study, levels in rows:
            if not potentials.state.is_normal:
                continue
            for pair in device_pairs(self.boat, self.network, potentials, study):
                upper, lower = curves[pair.upper], curves[pair.lower]
                prospective_a = levels.largest_a(pair.post)
                up_to_a = None
                if upper.is_known and lower.is_known and prospective_a:
                    up_to_a = selective_up_to_a(upper, lower, prospective_a)
                row = (pair, up_to_a, prospective_a, self.state_words(potentials.state))
                key = (pair.upper, pair.lower)
                if key not in worst or _margin(row) < _margin(worst[key]) - 1e-9:
                    worst[key] = row
        return tuple(worst[key] for key in sorted(worst))

    @cached_property
    def without_figures(self) -> tuple[str, ...]:
        """Return the batteries that lack the EMF or resistance that a solved network needs."""
        return tuple(b.device for b in self.network.batteries if b.full is None or b.low is None)

    @cached_property
    def ladder(self) -> tuple[Rung, ...]:
        """Return the protection from each bank down, in the first normal state."""
        is_known = not self.without_figures
        return build_ladder(
            self.boat,
            self.network,
            self.usual,
            self.exposures[0],
            self.fault_levels[0] if is_known else None,
            self.far_ends if is_known else {},
            self.selectivity if is_known else (),
        )

    def is_behind_device(self, name: str) -> bool:
        """Tell whether another device stands between a device and every bank, in every state."""
        edge = self.network.edges_of[name][0]
        return all(
            math.isfinite(max(study.exposures[edge.index].at_a, study.exposures[edge.index].at_b))
            for study in self.exposures
            if edge.index in study.exposures
        )

    @cached_property
    def sole_devices(self) -> dict[str, str]:
        """Return each device that serves one load and nothing else, with that load."""
        region = places(self.network, self.usual.state, (EdgeKind.DEVICE,), over_diodes=True)
        found: dict[str, str] = {}
        ends: dict[int, list[str]] = {}
        for edge in self.network.edges:
            if edge.kind is EdgeKind.DEVICE:
                for post in (edge.a, edge.b):
                    ends.setdefault(region[post], []).append(edge.part)
        loads: dict[int, list[str]] = {}
        for load in self.network.loads:
            loads.setdefault(region[load.feed], []).append(load.device)
        banks = {region[post] for battery in self.network.batteries for post in (battery.pos, battery.neg)}
        for place, devices in ends.items():
            if len(devices) == 1 and len(loads.get(place, ())) == 1 and place not in banks:
                found[devices[0]] = loads[place][0]
        return found

    @cached_property
    def bank_currents(self) -> tuple[BankCurrent, ...]:
        """Return the current of every bank in every condition."""
        return bank_currents(self.network, self.operations)

    @cached_property
    def supply(self) -> dict[str, SupplyWay]:
        """Return the way of every circuit to its bank in the first normal state."""
        return study_supply(self.boat, self.network, self.potentials[0], self.take_offs)

    @cached_property
    def cranking(self) -> frozenset[str]:
        """Return the conductors that feed a cranking motor."""
        return cranking_conductors(self.boat, self.network)

    @cached_property
    def places(self) -> list[int]:
        """Return for each post the place it is at: posts with no conductor or metal between them share one."""
        conductors = (EdgeKind.CONDUCTOR, EdgeKind.BOND, EdgeKind.SHIELD)
        metal = {joint.id for joint in self.boat.joints}
        edges = (self.network.edges[i] for i in live_edges(self.network, self.usual.state))
        free = ((e.a, e.b) for e in edges if e.kind not in conductors and e.part not in metal)
        return groups(len(self.network.posts), free)

    @cached_property
    def bank_conductors(self) -> frozenset[str]:
        """Return the conductors that belong to a bank."""
        return bank_conductors(self.boat, self.network)

    @cached_property
    def take_offs(self) -> frozenset[str]:
        """Return the bank conductors, and those that join a bank to its collectors."""
        return take_off_conductors(self.boat, self.network)

    @property
    def usual(self) -> Potentials:
        """Return the potentials of the first normal state."""
        return self.potentials[0]

    def state_words(self, state: SwitchState) -> str:
        """Tell a state to an electrician: its name, whether it is abnormal, and its switches."""
        kind = "" if state.is_normal else " (abnormal)"
        return f"{state.id}{kind}: {state.words}"
