"""Run the campaign and count: what was planted, what was found where it was planted, what else was found.

python -m tests.campaign.tally                       the first place of every planter, in both boats
python -m tests.campaign.tally --places 5 --seed 3   up to five places each, drawn at random
python -m tests.campaign.tally --places all          every place
python -m tests.campaign.tally --together 200        and 200 boats with three faults each
python -m tests.campaign.tally CON-04 PRO            only these faults or groups
"""

from __future__ import annotations

import argparse
import os
import random
import sys
from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import Any

import yaml

if __package__ in (None, ""):
    sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from tests.campaign.planting import (
    DESIGNS,
    FAULTS,
    TRAPS,
    Design,
    Harvest,
    Plant,
    Planter,
    Row,
    harvest,
    load_planters,
    merged,
)

CATALOGUE = Path(__file__).with_name("fault_catalogue.yaml")
EVERY_PLACE = 1_000_000
FAULTS_ON_ONE_BOAT = 3
DRAWS = 50
"""How often faults are drawn for one boat before it is given up."""
SOUND = "sound arrangements and twins"
"""The group of what must stay silent: the catalogue's, and twins of faults that are just not at fault."""


@dataclass(frozen=True)
class Sown:
    """Hold one plant: the faults or sound arrangements that it stands for, and the planter that made it."""

    ids: tuple[str, ...]
    planter: str
    design: str
    plant: Plant
    is_sound: bool = False


@dataclass(frozen=True)
class Crop:
    """Hold what came of one plant."""

    sown: Sown
    harvest: Harvest

    def __str__(self) -> str:
        return f"{', '.join(self.sown.ids)} in {self.sown.design}, {self.sown.planter}: {self.harvest}"


@dataclass
class Count:
    """Count the plants of one kind of fault, or of a group."""

    planted: int = 0
    found: int = 0
    missed: int = 0
    misplaced: int = 0
    extra: int = 0

    def add(self, crop: Harvest) -> None:
        """Count one plant; of a sound arrangement `found` counts those that stayed silent."""
        self.planted += 1
        self.found += crop.is_as_planted
        self.missed += bool(crop.missing)
        self.misplaced += bool(crop.misplaced)
        self.extra += bool(crop.extra)

    def cells(self) -> tuple[int, ...]:
        """Return the figures in the order of the columns."""
        return self.planted, self.found, self.missed, self.misplaced, self.extra


def catalogue() -> dict[str, Any]:
    """Return the catalogue of faults and sound arrangements."""
    data: dict[str, Any] = yaml.safe_load(CATALOGUE.read_text(encoding="utf-8"))
    return data


def by_planter(kind: dict[str, list[Planter]]) -> dict[Planter, tuple[str, ...]]:
    """Return every planter with the ids that it is registered for, in the order of the first."""
    ids: dict[Planter, list[str]] = {}
    for name, planters in sorted(kind.items()):
        for planter in planters:
            ids.setdefault(planter, []).append(name)
    return {planter: tuple(names) for planter, names in ids.items()}


def sow(
    kind: dict[str, list[Planter]], design: Design, places: int, seed: int | None, only: Sequence[str]
) -> list[Sown]:
    """Return some places of every planter: the first ones, or with a seed ones drawn at random."""
    chosen: list[Sown] = []
    for planter, ids in by_planter(kind).items():
        if only and not any(name.startswith(tuple(only)) for name in ids):
            continue
        plants = list(_first(planter(design), places if seed is None else EVERY_PLACE))
        name = getattr(planter, "__name__", "")
        if seed is not None and len(plants) > places:
            drawn = random.Random(f"{seed} {name} {design.name}")
            plants = [plants[index] for index in sorted(drawn.sample(range(len(plants)), places))]
        chosen += [Sown(ids, name, design.name, plant, kind is TRAPS) for plant in plants]
    return chosen


def _first(plants: Iterable[Plant], most: int) -> Iterator[Plant]:
    for number, plant in enumerate(plants):
        if number >= most:
            return
        yield plant


def reap(design: Design, sown: Sequence[Sown], workers: int) -> list[Crop]:
    """Plant everything and return what came of it."""
    crops = harvest(design, [one.plant for one in sown], workers=workers)
    return [Crop(one, crop) for one, crop in zip(sown, crops, strict=True)]


def first_crops(make: Callable[[], Design], *, sound: bool = False) -> tuple[Crop, ...]:
    """Return what came of the first place of every planter of faults, or of sound arrangements; reaped once."""
    return _first_crops(make, sound)


@cache
def _first_crops(make: Callable[[], Design], sound: bool) -> tuple[Crop, ...]:
    load_planters()
    design = make()
    return tuple(reap(design, sow(TRAPS if sound else FAULTS, design, 1, None, ()), workers=os.cpu_count() or 1))


# --- several faults on one boat


def touched(change: Row) -> set[tuple[str, ...]]:
    """Return the entries that a change touches: section and id, and of a trunk circuit each conductor."""
    found: set[tuple[str, ...]] = set()
    for section, rows in change.items():
        for name, row in rows.items() if isinstance(rows, dict) else ():
            inner = set(row) if isinstance(row, dict) else set()
            if section == "circuits" and inner == {"conductors"}:
                found |= {(section, name, "conductors", wire) for wire in row["conductors"]}
            else:
                found.add((section, name))
    return found


def together(crops: Sequence[Crop], boats: int, seed: int) -> list[Sown]:
    """Draw boats that carry several faults of different groups in different entries, each of which was found alone.

    What one fault lets follow may follow here too, and what is found of each alone may be told
    in other words; so a boat is as planted if every planted fault is found, and nothing else is
    but what was found of one of them, or may follow. One fault can hide another all the same: a
    main fuse left out, the sum of two fuses.
    """
    drawn = random.Random(seed)
    sound = [crop for crop in crops if crop.harvest.is_as_planted and crop.sown.plant.change and crop.sown.plant.finds]
    fit = [crop for crop in sound if not _is_alone(crop)]
    found: list[Sown] = []
    for _ in range(boats * DRAWS if len(fit) >= FAULTS_ON_ONE_BOAT else 0):
        some = drawn.sample(fit, FAULTS_ON_ONE_BOAT)
        if len(found) == boats:
            break
        if not any(_meet(a.sown, b.sown) for i, a in enumerate(some) for b in some[:i]):
            found.append(_on_one_boat(some))
    return found


def _on_one_boat(some: Sequence[Crop]) -> Sown:
    plants = [crop.sown.plant for crop in some]
    follows = {check for crop in some for check in crop.sown.plant.follows}
    follows |= {outcome.check for crop in some for outcome, _ in crop.harvest.findings}
    whole = Plant(
        merged(*(plant.change for plant in plants)),
        finds=[one for plant in plants for one in plant.finds],
        follows=sorted(follows),
        parts={name: row for plant in plants for name, row in plant.parts.items()},
        options=plants[0].options,
    )
    ids = tuple(sorted({name for crop in some for name in crop.sown.ids}))
    return Sown(ids, " + ".join(crop.sown.planter for crop in some), some[0].sown.design, whole)


def _meet(one: Sown, other: Sown) -> bool:
    """Tell whether two faults are of one group, touch one entry, or one touches what the other is found at."""
    if {name[:3] for name in one.ids} & {name[:3] for name in other.ids}:
        return True
    if list(one.plant.options) != list(other.plant.options) or set(one.plant.parts) & set(other.plant.parts):
        return True
    if _conductors(one.plant.change) & _conductors(other.plant.change):
        return True
    entries, others = touched(one.plant.change), touched(other.plant.change)
    names, other_names = ({name for entry in some for name in entry[1:]} for some in (entries, others))
    is_at_names = any(_owner(part) in other_names for _, part in one.plant.finds)
    is_at_others = any(_owner(part) in names for _, part in other.plant.finds)
    return bool(names & other_names - {"conductors"}) or is_at_names or is_at_others


def _conductors(change: Row) -> set[str]:
    """Return the conductors that a change writes, in whatever circuit: an id stands once aboard."""
    found = {*change.get("conductors", {}), *change.get("bonds", {})}
    rows = [row for row in change.get("circuits", {}).values() if isinstance(row, dict)]
    return found.union(*(row.get("conductors") or {} for row in rows))


def _owner(part: str) -> str:
    """Return the entry that a part of a finding belongs to: P11 for "P11.out", P3 for "P3 under F-PANEL"."""
    return part.split(" ", maxsplit=1)[0].split(".", maxsplit=1)[0]


def _is_alone(crop: Crop) -> bool:
    """Tell whether a fault leaves nothing to say about the rest of its boat: a faulty file, shorted batteries."""
    checks = {outcome.check for outcome, _ in crop.harvest.findings}
    return not crop.harvest.hull_is_studied or bool(checks & {"dead-short", "battery-loop", "working-point"})


# --- the tally


def tally(crops: Iterable[Crop]) -> dict[str, Count]:
    """Count the crops by fault."""
    counts: dict[str, Count] = {}
    for crop in crops:
        for name in crop.sown.ids:
            counts.setdefault(name, Count()).add(crop.harvest)
    return counts


def table(crops: Sequence[Crop]) -> list[str]:
    """Return the tally by group and in total, as lines."""
    known = {row["id"]: row["group"] for row in catalogue()["faults"]}
    by_group: dict[str, Count] = {}
    kinds: dict[str, set[str]] = {}
    for crop in crops:
        groups = {name: SOUND if crop.sown.is_sound else known[name] for name in crop.sown.ids}
        for group in set(groups.values()):
            by_group.setdefault(group, Count()).add(crop.harvest)
        for name, group in groups.items():
            kinds.setdefault(group, set()).add(name)
    order = [*dict.fromkeys(known.values()), SOUND]
    lines = [f"{'group':38}{'kinds':>7}{'planted':>9}{'as planted':>12}{'missed':>8}{'misplaced':>11}{'extra':>7}"]
    for group in order:
        if group in by_group:
            lines.append(_line(group, len(kinds[group]), by_group[group]))
    whole = Count()
    for crop in crops:
        whole.add(crop.harvest)
    lines.append(_line("boats in all", sum(len(names) for names in kinds.values()), whole))
    return lines


def _line(name: str, kinds: int, count: Count) -> str:
    planted, found, missed, misplaced, extra = count.cells()
    return f"{name:38}{kinds:>7}{planted:>9}{found:>12}{missed:>8}{misplaced:>11}{extra:>7}"


def campaign(
    places: int, seed: int | None, workers: int, only: Sequence[str] = (), boats: int = 0,
    designs: Sequence[Callable[[], Design]] = DESIGNS,
) -> tuple[list[Crop], list[Crop]]:  # fmt: skip
    """Run the campaign; return the crops of the single faults and sound arrangements, and those of several."""
    load_planters()
    single: list[Crop] = []
    several: list[Crop] = []
    for make in designs:
        design = make()
        sown = [one for kind in (FAULTS, TRAPS) for one in sow(kind, design, places, seed, only)]
        crops = reap(design, sown, workers)
        single += crops
        if boats:
            several += reap(design, together(crops, boats, seed or 0), workers)
    return single, several


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the campaign as the command line asks; return 1 if anything is not as planted."""
    parser = argparse.ArgumentParser(prog="python -m tests.campaign.tally", description=(__doc__ or "").split("\n")[0])
    parser.add_argument("only", nargs="*", help="faults or groups: CON-04, PRO")
    parser.add_argument("--places", default="1", help="places of each planter, or “all”")
    parser.add_argument("--seed", type=int, help="draw the places at random")
    parser.add_argument("--workers", type=int, default=1, help="processes that study boats side by side")
    parser.add_argument("--together", type=int, default=0, metavar="BOATS", help="boats with several faults each")
    given = parser.parse_args(arguments)
    places = EVERY_PLACE if given.places == "all" else int(given.places)
    single, several = campaign(places, given.seed, given.workers, given.only, given.together)
    wrong = [crop for crop in (*single, *several) if not crop.harvest.is_as_planted]
    sys.stdout.write("".join(f"{crop}\n" for crop in wrong))
    sys.stdout.write("".join(f"{line}\n" for line in table(single)))
    if several:
        sys.stdout.write("".join(f"{line}\n" for line in ("", "several faults on one boat", *table(several))))
    return 1 if wrong else 0


if __name__ == "__main__":
    sys.exit(main())
