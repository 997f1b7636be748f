"""Make tests/campaign/coverage.yaml anew: what finds each fault of the catalogue, and where it is planted.

    python -m tests.campaign.coverage

Run it after a change of a card's `catalogue`, of a planter or of the catalogue; a test compares
what it makes with what is kept.
"""

from __future__ import annotations

import sys
from pathlib import Path

if __package__ in (None, ""):
    sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from checker.pipeline import all_cards
from tests.campaign.planting import DESIGNS, FAULTS, TRAPS, Planter, load_planters
from tests.campaign.tally import by_planter, catalogue

COVERAGE = Path(__file__).with_name("coverage.yaml")
HEAD = "# What finds each fault, and where the campaign plants it. Made by `python -m tests.campaign.coverage`.\n"

NOT_DECIDED: dict[str, str] = {}
"""Faults that cannot be decided, with the reason."""

MECHANISMS = {
    "FLT-03": "every legal set of options is studied by every check",
    "FLT-08": "a hull's own parts are studied by every check",
    "FLT-10": "every legal set of options is studied by every check",
    "FLT-11": "which limit sets bind is derived from each boat's own facts",
}
"""Faults that no check is made for, since the way that boats are studied finds them by whichever check is touched."""


def checks_of(fault: str) -> list[str]:
    """Return the checks whose cards say that they find a fault."""
    return sorted(card.id for card in all_cards() if fault in card.catalogue)


def planters_of(kind: dict[str, list[Planter]], name: str) -> list[str]:
    """Return the planters of a fault or sound arrangement, by module and name."""
    return sorted(f"{_module(planter)}.{_name(planter)}" for planter in kind.get(name, ()))


def _module(planter: Planter) -> str:
    return str(getattr(planter, "__module__", "")).rpartition(".")[2]


def _name(planter: Planter) -> str:
    return str(getattr(planter, "__name__", ""))


def coverage_text() -> str:
    """Return the whole file."""
    load_planters()
    lines = [HEAD + "faults:"]
    for row in catalogue()["faults"]:
        name = row["id"]
        lines.append(f"  {name}:  # {row['title']}")
        if name in NOT_DECIDED:
            lines.append(f'    not_decided: "{NOT_DECIDED[name]}"')
            continue
        if name in MECHANISMS:
            lines.append(f'    mechanism: "{MECHANISMS[name]}"')
        lines += _list("checks", checks_of(name)) + _list("planted", planters_of(FAULTS, name))
    lines.append("sound_arrangements:")
    for row in catalogue()["traps"]:
        lines.append(f"  {row['id']}:  # {row['title']}")
        lines += _list("planted", planters_of(TRAPS, row["id"]))
    return "\n".join(lines) + "\n"


def _list(key: str, names: list[str]) -> list[str]:
    if not names:
        return []
    whole = f"    {key}: [{', '.join(names)}]"
    return [whole] if len(whole) <= 116 else [f"    {key}:", *(f"      - {name}" for name in names)]


def plants_claimed_by_no_card() -> list[str]:
    """Return planters that register for a fault though no check that they expect claims it."""
    load_planters()
    told: list[str] = []
    for planter, names in by_planter(FAULTS).items():
        first = next((plant for make in DESIGNS for plant in planter(make())), None)
        expected = {check for check, _ in first.finds} if first else set()
        for name in names:
            if name not in MECHANISMS and not expected & set(checks_of(name)):
                told.append(
                    f"{_name(planter)}: {name} is claimed by {checks_of(name)}, but it plants {sorted(expected)}"
                )
    return told


if __name__ == "__main__":
    COVERAGE.write_text(coverage_text(), encoding="utf-8")
