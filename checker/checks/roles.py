"""Decide which conductors an exemption frees, and from what; each frees from one rule only.

A role is declared by the yard, with a reason, and held against the boat where it can be.
"""

from __future__ import annotations

from checker.boat.hull import Conductor
from checker.checks.check import Case

CRANKING = "cranking"
PIGTAIL = "pigtail"
BANK = "bank"
EXEMPTIONS = "exemptions"
"""The table of a limit set that says which roles are exempt from what."""
ELECTRONIC_SERVICES = frozenset(("electronics", "radio", "sense", "gauges", "alarm"))


def role_holds(case: Case, conductor: Conductor) -> bool:
    """Tell whether what is known of the boat bears out a conductor's declared role."""
    if conductor.role == CRANKING:
        return conductor.id in case.studies.cranking
    if conductor.role == BANK:
        return conductor.id in case.studies.bank_conductors
    if conductor.role == PIGTAIL:
        return not case.limits.lacks([EXEMPTIONS]) and conductor.length_m < case.limits.exemptions.pigtail_below_m
    return bool(conductor.role)


def exempt_as(case: Case, conductor: Conductor, roles: tuple[str, ...], figure: str) -> str:
    """Return why one of some roles frees a conductor, or an empty text."""
    if conductor.role in roles and role_holds(case, conductor):
        citation = case.limits.exemptions.citation_of(figure)
        return f"exempt as {conductor.role} ({citation.clause})"
    return ""


def size_exemption(case: Case, conductor: Conductor) -> str:
    """Return why a conductor is free of the minimum size, or an empty text; nothing is exempt without the table."""
    if case.limits.lacks([EXEMPTIONS]):
        return ""
    rule = case.limits.exemptions
    told = exempt_as(case, conductor, rule.roles, "roles")
    if told:
        return told
    current_a = continuous_a(case, conductor)
    if is_electronic(case, conductor) and current_a is not None and current_a < rule.electronic_below_a:
        return f"exempt as electronic circuit below {rule.electronic_below_a:g} A ({rule.citation.clause})"
    return ""


def is_electronic(case: Case, conductor: Conductor) -> bool:
    """Tell whether a conductor belongs to an electronic circuit."""
    circuit = case.boat.circuits.get(conductor.circuit)
    return conductor.role == "sense" or (circuit is not None and circuit.service in ELECTRONIC_SERVICES)


def protection_exemption(case: Case, conductor: Conductor) -> str:
    """Return why a conductor needs no overcurrent device, or an empty text."""
    rule = case.limits.exemptions
    return exempt_as(case, conductor, rule.protection_exempt_roles, "protection_exempt_roles")


def continuous_a(case: Case, conductor: Conductor) -> float | None:
    """Return the continuous current of a conductor: its own, else its circuit's; None if none is written."""
    if conductor.current_a is not None:
        return conductor.current_a
    circuit = case.boat.circuits.get(conductor.circuit)
    return None if circuit is None else circuit.current_a
