"""Plant faults of the catalogue into two sound yards, and say what must be found and what may follow.

A planter is a generator: given a design it yields every place where it can plant its fault, as
a merge patch that a hull carries as an as-built change. The campaign takes the first place of
each; its long form takes places at random. A sound arrangement is planted in the same way, and
must stay silent.

    @fault("CON-04")
    def thin_single(design: Design) -> Iterator[Plant]:
        for path, name, row in design.conductors():
            if row["size"] == "16 AWG" and "role" not in row:
                yield Plant(at(*path, {"size": "18 AWG"}), finds=[("minimum-size", name)], line="18 AWG")
"""

from __future__ import annotations

import hashlib
import importlib
import json
import pkgutil
import tempfile
from collections.abc import Callable, Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from functools import cache
from pathlib import Path
from typing import Any

import yaml

from checker.finding import Outcome, Verdict
from checker.pipeline import check_fleet
from tests.small_yard import SOUND, TODAY

ROOT = Path(__file__).resolve().parents[2]
Row = dict[str, Any]
Finds = tuple[str, str]
"""Check and part."""
ANYTHING = "*"
"""Stands in `follows` for every check: of a boat with a shorted battery nothing else can be said."""
OWN_FILE = "the hull's file"
"""The part of a fault of the hull's own file, whatever number the hull gets."""


@dataclass(frozen=True)
class Plant:
    """Describe one planted fault or sound arrangement.

    `finds` are the check and part of what must be found, `line` a text that the line pointed at
    must hold, `state` a text that the state named must hold. `follows` are checks that may
    speak as well, since what they find follows physically; say why beside each. `parts` are new
    parts; `options` the options of the hull.

    A fault of the fleet is planted by whole `files` beside those of the class, without a change:
    hulls, options, waivers. Such a plant has a yard of its own, and all that is found there
    counts; `on` is then a text that the id of every hull or option set must hold that has what
    must be found.
    """

    change: Row
    finds: Sequence[Finds] = ()
    line: str = ""
    state: str = ""
    follows: Sequence[str] = ()
    parts: Mapping[str, Row] = field(default_factory=dict)
    options: Sequence[str] = ()
    files: Mapping[str, str] = field(default_factory=dict)
    on: str = ""


def at(*steps: Any) -> Row:
    """Return a mapping nested under keys; the last step is the innermost mapping."""
    *keys, value = steps
    for key in reversed(keys):
        value = {key: value}
    assert isinstance(value, dict)
    return value


def merged(*patches: Row) -> Row:
    """Return several merge patches as one."""
    whole: Row = {}
    for patch in patches:
        _merge(whole, patch)
    return whole


def _merge(into: Row, patch: Row) -> None:
    for key, value in patch.items():
        if isinstance(value, dict) and isinstance(into.get(key), dict):
            _merge(into[key], value)
        else:
            into[key] = json.loads(json.dumps(value))


class Design:
    """Show the class and parts of a sound yard, to pick places from."""

    def __init__(self, name: str, class_id: str, revision: int, files: Mapping[str, str]) -> None:
        self.name = name
        self.class_id = class_id
        self.revision = revision
        self.files = files
        self.data: Row = {}
        self.parts: Row = {}
        for path, text in sorted(files.items()):
            if path.startswith(f"classes/{class_id}/") and "/options/" not in path:
                _merge(self.data, yaml.safe_load(text))
            elif path.startswith("parts/"):
                _merge(self.parts, yaml.safe_load(text).get("parts") or {})

    @property
    def is_small(self) -> bool:
        """Tell whether this is the minimal boat; otherwise it is the example class."""
        return self.name == "small"

    def section(self, name: str) -> Row:
        """Return a section of the class, empty where it has none."""
        found: Row = self.data.get(name) or {}
        return found

    def devices(self, kind: str = "") -> Iterator[tuple[str, Row, Row]]:
        """Yield the id, row and part of the devices written in `devices`, of one kind of part or of all."""
        for name, row in sorted(self.section("devices").items()):
            part = self.parts[row["part"]]
            if kind in ("", part["kind"]):
                yield name, row, part

    def branches(self) -> Iterator[tuple[str, Row, Row]]:
        """Yield the id, row and load part of the branch circuits."""
        for name, row in sorted(self.section("circuits").items()):
            if "load" in row:
                yield name, row, self.parts[row["load"]]

    def conductors(self) -> Iterator[tuple[tuple[str, ...], str, Row]]:
        """Yield the path, id and row of the conductors that are written one by one, bonds left out."""
        for circuit, row in sorted(self.section("circuits").items()):
            for name, wire in sorted((row.get("conductors") or {}).items()):
                yield ("circuits", circuit, "conductors", name), name, wire
        for name, wire in sorted(self.section("conductors").items()):
            yield ("conductors", name), name, wire

    def part_like(self, part_id: str, changes: Row) -> tuple[str, dict[str, Row]]:
        """Return the id of a new part that differs from a known one, and the parts to add.

        A change to None takes the fact away.
        """
        row = {**self.parts[part_id], **changes}
        row = {key: value for key, value in row.items() if value is not None}
        made = hashlib.sha256(json.dumps([part_id, row], sort_keys=True).encode()).hexdigest()[:6]
        return f"{part_id}-{made}", {f"{part_id}-{made}": row}

    def refit(self, device: str, changes: Row) -> tuple[Row, dict[str, Row]]:
        """Return the change that gives a device a part with other facts, and the parts to add."""
        name, parts = self.part_like(self.section("devices")[device]["part"], changes)
        return at("devices", device, {"part": name}), parts


@cache
def small() -> Design:
    """Return the minimal boat."""
    files = {name: text for name, text in SOUND.files.items() if not name.startswith("hulls/")}
    return Design("small", "skiff", 2, files)


@cache
def example() -> Design:
    """Return the class of the example fleet."""
    folder = ROOT / "fleet_example"
    paths = [p for p in folder.rglob("*.yaml") if p.relative_to(folder).parts[0] in ("classes", "parts", "yard.yaml")]
    files = {p.relative_to(folder).as_posix(): p.read_text(encoding="utf-8") for p in sorted(paths)}
    return Design("example", "tindral-36", 4, files)


DESIGNS: tuple[Callable[[], Design], ...] = (small, example)

Planter = Callable[[Design], Iterable[Plant]]
FAULTS: dict[str, list[Planter]] = {}
TRAPS: dict[str, list[Planter]] = {}


def fault(*ids: str) -> Callable[[Planter], Planter]:
    """Register a planter of one or more faults of the catalogue."""
    return _register(FAULTS, ids)


def trap(*ids: str) -> Callable[[Planter], Planter]:
    """Register a planter of one or more sound arrangements of the catalogue."""
    return _register(TRAPS, ids)


def _register(into: dict[str, list[Planter]], ids: Sequence[str]) -> Callable[[Planter], Planter]:
    def keep(planter: Planter) -> Planter:
        for name in ids:
            into.setdefault(name, []).append(planter)
        return planter

    return keep


def load_planters() -> None:
    """Import every module of planters, so that FAULTS and TRAPS are whole."""
    for name in sorted(m.name for m in pkgutil.iter_modules([str(Path(__file__).parent)])):
        if name.startswith("plants_"):
            importlib.import_module(f"tests.campaign.{name}")


# --- planting and judging

HULLS_AT_ONCE = 120
"""A run holds every pass of its boats, so that a long campaign is checked in several."""


@dataclass(frozen=True)
class Harvest:
    """Hold what came of one plant: what was found, with the text of the line pointed at."""

    plant: Plant
    findings: tuple[tuple[Outcome, str], ...]
    hull_is_studied: bool
    subjects: tuple[tuple[Finds, str], ...] = ()
    """Of a fault of the fleet: each check and part that was found, with the hull or option set."""

    @property
    def missing(self) -> list[Finds]:
        """Return what had to be found and was not."""
        known = {(outcome.check, outcome.part) for outcome, _ in self.findings}
        return [wanted for wanted in self.plant.finds if tuple(wanted) not in known]

    @property
    def misplaced(self) -> list[str]:
        """Return what was found at another line or in another state than it should be."""
        told: list[str] = []
        for outcome, line in self.findings:
            if (outcome.check, outcome.part) not in [tuple(wanted) for wanted in self.plant.finds]:
                continue
            if self.plant.line not in line:
                told.append(f"{outcome.check} at {outcome.at}: {line!r}")
            if self.plant.state not in outcome.state:
                told.append(f"{outcome.check} in state {outcome.state!r}")
        wanted = [tuple(one) for one in self.plant.finds]
        told += [
            f"{found[0]} on {name}" for found, name in self.subjects if found in wanted and self.plant.on not in name
        ]
        return told

    @property
    def extra(self) -> list[str]:
        """Return what was found and neither was planted nor follows."""
        wanted = {tuple(one) for one in self.plant.finds}
        if ANYTHING in self.plant.follows:
            return []
        return [
            f"{outcome.check} {outcome.part}: {outcome.fault}"
            for outcome, _ in self.findings
            if (outcome.check, outcome.part) not in wanted and outcome.check not in self.plant.follows
        ]

    @property
    def is_as_planted(self) -> bool:
        """Tell whether exactly what was planted is found, where it was planted."""
        return not (self.missing or self.misplaced or self.extra)

    def __str__(self) -> str:
        """Tell what was planted as the author of a yard would write it, and what came of it, one fact a line."""
        plant = self.plant
        rows = ["planted:", *_indented({"parts": dict(plant.parts)} if plant.parts else {})]
        rows += _indented({"options": list(plant.options)} if plant.options else {}) + _indented(plant.change)
        for name, text in plant.files.items():
            rows += [f"    {name}:", *(f"      {line}" for line in text.splitlines())]
        rows += [f"  missing: {check} at {part}" for check, part in self.missing]
        rows += [f"  misplaced: {one}" for one in self.misplaced] + [f"  extra: {one}" for one in self.extra]
        if self.missing:
            rows += [f"  found: {outcome.check} at {outcome.part}: {outcome.fault}" for outcome, _ in self.findings]
        return "\n  ".join(rows)


def _indented(data: Row) -> list[str]:
    return [f"    {line}" for line in _dump(data).splitlines()] if data else []


def harvest(design: Design, plants: Sequence[Plant], *, workers: int = 1) -> list[Harvest]:
    """Plant each on a hull of its own, check them all in one run, and return what was found of each.

    A fault of the fleet is checked in a run of its own.
    """
    on_hulls = [plant for plant in plants if not plant.files]
    batches = [on_hulls[first : first + HULLS_AT_ONCE] for first in range(0, len(on_hulls), HULLS_AT_ONCE)]
    found = iter([crop for batch in batches for crop in _harvest_of_hulls(design, batch, workers)])
    return [_harvest_of_yard(design, plant) if plant.files else next(found) for plant in plants]


def _harvest_of_yard(design: Design, plant: Plant) -> Harvest:
    files = {**design.files, **plant.files}
    if plant.parts:
        files["parts/planted.yaml"] = _dump({"parts": dict(plant.parts)})
    with tempfile.TemporaryDirectory() as name:
        _write(Path(name), files)
        result = check_fleet(Path(name), today=TODAY)
    lines = {path: text.splitlines() for path, text in files.items()}
    outcomes: dict[tuple[object, ...], Outcome] = {}
    subjects: list[tuple[Finds, str]] = []
    for outcome in result.file_outcomes:
        outcomes.setdefault((outcome.check, outcome.part, outcome.at, outcome.limit_set), outcome)
    for subject in result.subjects:
        for outcome in subject.news:
            if outcome.verdict is Verdict.FINDING:
                outcomes.setdefault((outcome.check, outcome.part, outcome.at, outcome.limit_set), outcome)
                subjects.append(((outcome.check, outcome.part), subject.id))
    told = [
        (o, _line(lines, o)) for o in outcomes.values() if o.verdict is Verdict.FINDING and o.check != "not-studied"
    ]
    return Harvest(plant, tuple(told), bool(result.subjects), tuple(subjects) if plant.on else ())


def _write(folder: Path, files: Mapping[str, str]) -> None:
    for path, text in files.items():
        (folder / path).parent.mkdir(parents=True, exist_ok=True)
        (folder / path).write_text(text, encoding="utf-8")


def _harvest_of_hulls(design: Design, plants: Sequence[Plant], workers: int) -> list[Harvest]:
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        files = dict(design.files)
        parts = {part: row for plant in plants for part, row in plant.parts.items()}
        if parts:
            files["parts/planted.yaml"] = _dump({"parts": parts})
        for number, plant in enumerate(plants):
            files[f"hulls/seed-{number}.yaml"] = _dump(_hull(design, number, plant))
        _write(folder, files)
        ids = [f"SEED-{number}" for number in range(len(plants))]
        result = check_fleet(folder, today=TODAY, only=ids, workers=workers)
        lines = {path: text.splitlines() for path, text in files.items()}
    subjects = {subject.id: subject for subject in result.subjects}
    found: list[Harvest] = []
    for number, plant in enumerate(plants):
        file = f"hulls/seed-{number}.yaml"
        own = [o for o in result.file_outcomes if o.at.file == file and o.check != "not-studied"]
        own = [o._replace(part=OWN_FILE) if o.part == file else o for o in own]
        subject = subjects.get(f"SEED-{number}")
        outcomes = [*own, *(subject.news if subject else ())]
        told = [(o, _line(lines, o)) for o in outcomes if o.verdict is Verdict.FINDING]
        found.append(Harvest(plant, tuple(told), subject is not None))
    strays = [o for o in result.file_outcomes if not o.at.file.startswith("hulls/") and o.check != "not-studied"]
    assert not strays, [f"{o.at}: {o.fault}" for o in strays]
    return found


def _hull(design: Design, number: int, plant: Plant) -> Row:
    hull: Row = {
        "hull": f"SEED-{number}", "class": design.class_id, "revision": design.revision, "status": "in-build",
        "options": list(plant.options),
    }  # fmt: skip
    if plant.change:
        hull["changes"] = {"SEED": {"what": "planted by the campaign", "state": "recorded", "set": plant.change}}
    return hull


def _dump(data: Row) -> str:
    data = json.loads(json.dumps(data))  # a part held twice would be written as an alias, which yards may not
    return yaml.safe_dump(data, sort_keys=False, allow_unicode=True, width=1000, default_flow_style=False)


def _line(lines: Mapping[str, list[str]], outcome: Outcome) -> str:
    return lines[outcome.at.file][outcome.at.line - 1].strip() if outcome.at.file in lines else ""
