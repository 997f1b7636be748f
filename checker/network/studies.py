"""Gather the studies of one boat; each is made once, when a check first asks for it."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

from checker.boat.hull import Boat
from checker.network.buses import BusFlow, study_buses
from checker.network.conditions import Operation, operations
from checker.network.cranking import bank_conductors, cranking_conductors, take_off_conductors
from checker.network.demand import BankCurrent, bank_currents
from checker.network.exposure import ExposureStudy, study_exposure
from checker.network.flow import Copper
from checker.network.graph import EdgeKind, Network, build_network
from checker.network.metering import Metering, study_metering
from checker.network.potentials import Potentials, study_potentials
from checker.network.returns import ReturnExposure, study_returns
from checker.network.solved import SolvedConditions, solve_operations
from checker.network.states import States, SwitchState, live_edges, study_states
from checker.network.supply import SupplyWay, study_supply
from checker.network.walk import groups


@dataclass(frozen=True, slots=True)
class Coppers:
    """Hold the resistivities at which currents, largest faults and smallest faults are reckoned."""

    working: Copper
    cold: Copper
    hot: Copper


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
    def operations(self) -> tuple[Operation, ...]:
        """Return every operating condition, ready to be solved."""
        return operations(self.boat, self.network)

    @cached_property
    def conditions(self) -> SolvedConditions:
        """Return every operating condition solved."""
        return solve_operations(self.network, self.operations, self.coppers.working)

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
