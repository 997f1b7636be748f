"""Judge what a yard claims: switch states that can exist, and roles that free a conductor."""

from __future__ import annotations

from collections.abc import Iterator

from checker.checks.check import Case, Place, Told, at_conductor, check
from checker.checks.roles import BANK, CRANKING, EXEMPTIONS, PIGTAIL, role_holds
from checker.finding import Basis, Level, Outcome
from checker.network.states import MOST_STATES

NEEDS_REASON = ("inside-housing", "resistance", "communication", "navigation-electronics")


@check(
    title="Every switch combination is told: normal, abnormal or forbidden",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="a combination that nobody thought of is studied by nobody",
    level=Level.WARNING,
)
def unlisted_state(case: Case) -> Iterator[Outcome]:
    """Does the table of switch states cover every combination of the switches that it names?

    Without a table every combination is taken to be normal; too many are not studied.
    """
    states, at = case.studies.states, case.boat.at
    if states.are_too_many:
        told = Told(f"more than {MOST_STATES} switch states can exist", "name those that do under “states”")
        yield unlisted_state.found(case, Place("states", at), told)
    elif states.unlisted:
        at = case.boat.switch_rows[0].at
        told = Told(
            f"no row covers: {'; '.join(states.unlisted[:4])}" + ("; …" if len(states.unlisted) > 4 else ""),
            "add a row for it: normal, abnormal, or forbidden with its reason",
            inputs=(("unlisted", "; ".join(states.unlisted)),),
        )
        yield unlisted_state.found(case, Place("states", at), told)
    else:
        yield unlisted_state.passed(case, Place("states", at))


@check(
    title="A role that frees a conductor is borne out",
    basis=Basis.LAW,
    citation="33 CFR § 183.425(g), § 183.455(e)",
    why="a role written to silence a finding leaves a conductor without its protection",
    catalogue=("PRO-01", "CON-04"),
    per_set=True,
)
def role_claim(case: Case) -> Iterator[Outcome]:
    """Does the boat bear out the roles that conductors are given?

    A cranking conductor lies between a battery and a motor, a bank conductor between batteries
    of one bank or its collectors; a pigtail is shorter than 7 in;
    a role that the data cannot show has a reason written.
    """
    for conductor in case.boat.conductors.values():
        if conductor.role not in (BANK, CRANKING, PIGTAIL, *NEEDS_REASON):
            continue
        place = at_conductor(conductor, conductor.at)
        if conductor.role in NEEDS_REASON and not conductor.role_reason:
            told = Told(f"role {conductor.role} has no reason", "add “reason”", inputs=(("role", conductor.role),))
            yield role_claim.found(case, place, told)
        elif conductor.role == PIGTAIL and case.limits.lacks([EXEMPTIONS]):
            fault = f"how long a pigtail may be under {case.limits.id} is not entered"
            file = f"{EXEMPTIONS}.yaml in limits/{case.limits.id}/, from your licensed copy"
            yield role_claim.not_assessed(case, place, fault, file)
        elif not role_holds(case, conductor) and conductor.id not in case.studies.take_offs:
            why = {
                CRANKING: "it does not lie between a battery and a motor with nothing but switches between",
                BANK: "it does not lie between batteries of one bank with nothing but such conductors between",
                PIGTAIL: f"it is {conductor.length_m:.3f} m long",
            }[conductor.role]
            told = Told(f"role {conductor.role} does not hold: {why}", "take the role out",
                        inputs=(("role", conductor.role),))  # fmt: skip
            yield role_claim.found(case, place, told)
        else:
            yield role_claim.passed(case, place)
