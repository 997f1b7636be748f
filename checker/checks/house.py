"""Read a yard's own rules from its yard file: limits, levels, what may stay live.

A yard may tighten what it likes. What it loosens is not refused, but told: each change is kept
with the clause that it departs from, and the reports print it on their first page.
"""

from __future__ import annotations

from collections.abc import Collection, Sequence
from dataclasses import dataclass, field

from checker.boat.entry import Entry
from checker.boat.patch import Patched
from checker.checks.check import Check, House, HouseChange
from checker.finding import Basis, Level
from checker.limits.citation import Citation
from checker.limits.entered import Entered
from checker.limits.house_figures import COMMON, HouseFigureError, changed_figure
from checker.limits.limit_set import NO_TABLES, always_on_rule, limit_set_ids
from checker.limits.table_file import CommonChanges, common_table
from checker.reading.document import Document, Fault
from checker.reading.words import shown

SetChanges = dict[str, dict[str, dict[str, object]]]
"""By limit set and table, the figures that the yard's own rules change."""


@dataclass(frozen=True, slots=True)
class HouseRules:
    """Hold a yard's own rules: for the checks, for its limit sets, and what is wrong with them."""

    house: House = field(default_factory=House)
    of_sets: SetChanges = field(default_factory=dict)
    faults: tuple[Fault, ...] = ()


def read_house(
    document: Document | None, checks: Sequence[Check], circuits: Collection[str], entered: Entered
) -> HouseRules:
    """Return a yard's own rules.

    Args:
        document: The yard file, if it keeps its schema.
        checks: All checks; the level of each may be changed.
        circuits: The circuits of all classes.
        entered: The tables that the yard has entered.
    """
    if document is None or not isinstance(document.data, dict):
        return HouseRules()
    faults: list[Fault] = []
    top = Entry(Patched(document.data, (document.places,)), (), document.data, faults)
    house = Entry(top._source, ("house",), top.fields("house"), faults)
    always_on = Entry(top._source, ("house", "always_on"), house.fields("always_on"), faults)
    figures = [
        (owner, change)
        for owner in sorted(house.fields("limits"))
        for change in _figures(house, owner, entered)
    ]  # fmt: skip
    levels = _levels(house, {check.id: check for check in checks})
    services, live = _services(always_on), _circuits(always_on, circuits)
    of_sets: SetChanges = {}
    for owner, (change, value) in figures:
        of_sets.setdefault(owner, {}).setdefault(change.table, {})[change.what.partition(".")[2]] = value
    common = of_sets.pop(COMMON, {})
    changes = [*(change for _, (change, _) in figures), *levels, *services, *live, *_critical(house)]
    return HouseRules(
        House(
            drop_critical=house.items("drop_critical"),
            next_smaller_awg=house.text("metric_sizes") == "next-smaller-awg",
            next_smaller_mm2=house.text("gauge_sizes") == "next-smaller-mm2",
            levels={change.check: Level(change.new) for change in levels},
            always_on_services={change.part: change.reason for change in services},
            always_on_circuits={change.part: change.reason for change in live},
            common=CommonChanges(tuple((t, f, v) for t, row in sorted(common.items()) for f, v in sorted(row.items()))),
            changes=tuple(sorted(changes, key=_order)),
            at_sets={name: top.at("limit_sets", index) for index, name in enumerate(top.items("limit_sets"))},
        ),
        of_sets,
        tuple(faults),
    )


def _order(change: HouseChange) -> tuple[object, ...]:
    """Put what is loosened first, and of this before all else what departs from a law."""
    sets = ("", *limit_set_ids())
    return (not change.is_loosened, not change.is_of_law, sets.index(change.limit_set), change.kind, change.what)


def _figures(house: Entry, owner: str, entered: Entered) -> list[tuple[HouseChange, object]]:
    """Return the changed figures of one limit set, or of the tables that belong to none, with their new values."""
    found: list[tuple[HouseChange, object]] = []
    before: dict[str, object] = {}
    top = Entry(house._source, ("house", "limits"), house.fields("limits"), house._faults)
    for row in top.entries(owner):
        try:
            value = row.data.get("value")
            change = changed_figure(owner, row.id, value, entered.get(owner, NO_TABLES), before)
        except HouseFigureError as error:
            check, at = ("unknown-reference", row.at()) if error.is_unknown else ("bad-value", row.at("value"))
            row.fault(check, at, error.fault, error.remedy)
            continue
        before[row.id] = value
        told = HouseChange(
            kind="limit",
            what=row.id,
            old=_printed(change.old),
            new=_printed(value),
            reason=row.text("reason"),
            clause=_clause(change.citation),
            basis=change.citation.basis,
            is_loosened=change.is_loosened,
            limit_set="" if owner == COMMON else owner,
            table=change.table,
            at=row.at("value"),
        )
        found.append((told, value))
    return found


def _printed(value: object) -> str:
    return f"{value:g}" if isinstance(value, (int, float)) else shown(str(value))


def _clause(citation: Citation) -> str:
    """Name a citation, and say where it is no document."""
    basis = citation.basis
    return citation.text if basis in (Basis.LAW, Basis.STANDARD) else f"{citation.text}, {basis.value}"


def _levels(house: Entry, checks: dict[str, Check]) -> list[HouseChange]:
    """Return the checks whose findings the yard tells at another level."""
    found: list[HouseChange] = []
    for row in house.entries("levels"):
        if row.id not in checks:
            row.unknown("check", row.id, row.at(), checks)
            continue
        card, level = checks[row.id].card, Level(row.text("level"))
        if level is card.level:
            row.fault("bad-value", row.at("level"), f"findings of {row.id} are at level {level.value} already",
                      "take it out")  # fmt: skip
            continue
        found.append(
            HouseChange(
                kind="level",
                what=f"level of {row.id}",
                old=card.level.value,
                new=level.value,
                reason=row.text("reason"),
                clause=card.citation,
                basis=card.basis,
                is_loosened=level.rank > card.level.rank,
                check=row.id,
                at=row.at("level"),
            )
        )
    return found


def _services(always_on: Entry) -> list[HouseChange]:
    """Return the services that may stay live by the yard's own rule."""
    known = always_on_rule().services
    found: list[HouseChange] = []
    for name in sorted(always_on.fields("services")):
        if name in known:
            at = always_on.key_at("services", name)
            always_on.fault("bad-value", at, f"service {name} may stay live already", "take it out")
        else:
            found.append(_stays_live(always_on, "service", name, ("services", name)))
    return found


def _circuits(always_on: Entry, circuits: Collection[str]) -> list[HouseChange]:
    """Return the circuits that may stay live by the yard's own rule."""
    found: list[HouseChange] = []
    for name in sorted(always_on.fields("circuits")):
        if name not in circuits:
            always_on.unknown("circuit", name, always_on.key_at("circuits", name), circuits)
        else:
            found.append(_stays_live(always_on, "circuit", name, ("circuits", name)))
    return found


def _stays_live(always_on: Entry, what: str, name: str, steps: tuple[str, str]) -> HouseChange:
    citation = common_table("always_on").citation()
    return HouseChange(
        kind="always on",
        what=f"{what} {name}",
        part=name,
        old="switched off",
        new="may stay live",
        reason=always_on.fields(steps[0])[name],
        clause=_clause(citation),
        basis=citation.basis,
        is_loosened=True,
        table="always_on",
        at=always_on.key_at(*steps),
    )


def _critical(house: Entry) -> list[HouseChange]:
    """Return that services are held to the critical group of the voltage drop as well."""
    named = house.items("drop_critical")
    if not named:
        return []
    return [
        HouseChange(
            kind="drop group",
            what="drop_critical",
            old="in the general group",
            new=f"{', '.join(named)} in the critical group",
            reason="",
            clause="voltage-drop groups of the limit sets",
            basis=Basis.YARD_RULE,
            is_loosened=False,
            at=house.at("drop_critical"),
        )
    ]
