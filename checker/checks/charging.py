"""Say what several checks of charging ask: states, outputs, the banks that sources charge."""

from __future__ import annotations

from checker.boat.hull import Device
from checker.boat.parts import Battery, Source
from checker.checks.check import Case, Place
from checker.network.bank import Bank
from checker.network.graph import LoadTie, SourceTie
from checker.network.potentials import Potentials
from checker.network.sensing import Tops, bank_tops
from checker.network.starting import cranking_motors, start_banks


def at_device(device: Device, state: str = "") -> Place:
    """Return the place of a device."""
    return Place(device.id, device.at, device.circuit, state)


def normal_states(case: Case) -> list[Potentials]:
    """Return the potentials of the normal states that are studied; of all of them if none is normal."""
    found = [one for one in case.studies.potentials if one.state.is_normal]
    return found or list(case.studies.potentials)


def tops_of_banks(case: Case) -> Tops:
    """Return the topmost posts of each bank."""
    if "bank tops" not in case.memo:
        case.memo["bank tops"] = bank_tops(case.studies.network, case.studies.banks)
    found: Tops = case.memo["bank tops"]
    return found


def source_part(case: Case, name: str) -> Source:
    """Return the part of a source."""
    part = case.boat.devices[name].part
    assert isinstance(part, Source)
    return part


def output_name(case: Case, source: SourceTie) -> str:
    """Return the name of an output: its device's, with the post where the device has several."""
    return source.device if len(source_part(case, source.device).outputs) == 1 else f"{source.device}.{source.post}"


def listed(names: list[str] | tuple[str, ...]) -> str:
    """Print some names; of many the first three."""
    return ", ".join(names) if len(names) <= 4 else f"{', '.join(names[:3])} and {len(names) - 3} more"


def batteries(case: Case, bank: Bank) -> list[Battery]:
    """Return the battery parts of a bank."""
    parts = [case.boat.devices[name].part for string in bank.strings for name in string]
    return [part for part in parts if isinstance(part, Battery)]


def chemistries(case: Case, bank: Bank) -> set[str]:
    """Return what the batteries of a bank are made of."""
    return {part.chemistry for part in batteries(case, bank)}


def motors(case: Case) -> tuple[LoadTie, ...]:
    """Return the cranking motors."""
    if "cranking motors" not in case.memo:
        studies = case.studies
        case.memo["cranking motors"] = cranking_motors(case.boat, studies.network, studies.cranking)
    found: tuple[LoadTie, ...] = case.memo["cranking motors"]
    return found


def cranking_banks(case: Case) -> tuple[str, ...]:
    """Return the banks that crank an engine."""
    if "start banks" not in case.memo:
        found = start_banks(case.boat, motors(case), normal_states(case), case.studies.banks, tops_of_banks(case))
        case.memo["start banks"] = found
    kept: tuple[str, ...] = case.memo["start banks"]
    return kept
