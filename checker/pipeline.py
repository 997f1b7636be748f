"""Run the stages in order: the one module that knows them all."""

from __future__ import annotations

import contextlib
import datetime
import gc
from collections.abc import Callable, Collection, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

from checker.boat.aboard import Aboard, aboard_of
from checker.boat.assemble import Assembly, Subject, assemble
from checker.boat.build import build_boat
from checker.boat.catalogue import Catalogue, read_catalogue
from checker.boat.hull import Boat
from checker.boat.parts import Overcurrent
from checker.checks.catalogue import CHECKS
from checker.checks.check import Case, Check, House
from checker.checks.house import HouseRules, read_house
from checker.errors import UsageError
from checker.finding import Card, Outcome, Verdict
from checker.limits.entered import Entered, read_entered
from checker.limits.formulas import resistivity_ohm_mm2_per_m, study_figures
from checker.limits.limit_set import (
    NO_CHANGES,
    NO_TABLES,
    TABLES,
    LimitSet,
    limit_set_ids,
    load_limit_set,
    read_limit_set,
)
from checker.limits.marks import Marks, table_marks
from checker.network.flow import Copper
from checker.network.studies import Coppers, Studies
from checker.output.aboard import Aboard as NamedAboard
from checker.output.aboard import named_aboard
from checker.reading.cards import FILE_CARDS
from checker.reading.document import Fault
from checker.reading.words import nearest
from checker.reading.yard_files import YardFiles, read_yard
from checker.result.cards import RESULT_CARDS
from checker.result.fleet import Gatherer
from checker.result.gather import news_order, pass_order, tightest
from checker.result.measured_cards import MEASURED_CARDS
from checker.result.model import EnteredTable, FleetResult, SetUse, SubjectResult
from checker.result.sheet import plan
from checker.result.sheet_file import Sheet, read_sheets
from checker.result.signing import content_mark, tables_mark
from checker.result.sisters import lengths_of
from checker.result.store import Store, study_name
from checker.result.studied import Studied, Written, read_study, written

Progress = Callable[[int, int], None]
StudyKey = str


FEWEST_FOR_WORKERS = 8
"""Distinct boats below which starting worker processes costs more than it saves."""


def all_cards() -> tuple[Card, ...]:
    """Return the cards of everything that can be found, in report order."""
    return (*FILE_CARDS, *(check.card for check in CHECKS), *RESULT_CARDS, *MEASURED_CARDS)


def check_fleet(
    folder: Path,
    *,
    today: datetime.date,
    only: Collection[str] = (),
    workers: int = 1,
    progress: Progress | None = None,
    lists_passes: bool = True,
    plans_tests: bool = False,
    store: Store | None = None,
) -> FleetResult:
    """Check a yard's fleet: every hull, and every legal option set of every class.

    Args:
        folder: The yard's repository.
        today: The day on which waivers are judged.
        only: Ids of the hulls to check; empty for the whole fleet.
        workers: How many processes study boats side by side; the result does not depend on it.
        progress: Called with the number of boats studied and their total.
        lists_passes: Whether the result holds each pass and what is aboard, as reports need, or only numbers.
        plans_tests: Whether the test of every hull is planned, or only of those that have a sheet or a signature.
        store: Studies of earlier runs; the result does not depend on them.

    Raises:
        FleetNotFoundError: If the folder holds no yard.
        UsageError: If `only` names a hull that is not in the fleet.
    """
    with _collector_off():
        return check_files(
            read_yard(folder), today=today, only=only, workers=workers, progress=progress,
            lists_passes=lists_passes, plans_tests=plans_tests, store=store,
        )  # fmt: skip


def check_files(
    files: YardFiles,
    *,
    today: datetime.date,
    only: Collection[str] = (),
    workers: int = 1,
    progress: Progress | None = None,
    lists_passes: bool = True,
    plans_tests: bool = False,
    store: Store | None = None,
) -> FleetResult:
    """Check a fleet whose files have been read; see `check_fleet`."""
    with _collector_off():
        # What is kept has its passes, whatever this run needs: the next one may report.
        fleet = _assembled(files, lists_passes=lists_passes or store is not None, plans_tests=plans_tests)
        subjects = _chosen(fleet.assembly, files, only)
        keys = fleet.keys(subjects)
        studied = dict(zip(keys, _study_all(fleet, keys, workers, progress, store, lists_passes), strict=True))
        if store is not None and not only:
            store.tidy()
        return _gathered(fleet, subjects, studied, today, only)


def study_part(
    folder: Path, store: Store, *, part: int, of: int, workers: int = 1, progress: Progress | None = None
) -> int:
    """Study each `of`-th distinct boat from the `part`-th on, and keep the studies; return how many boats that are.

    A run over the whole fleet with the studies of all parts tells what a run without any tells.

    Raises:
        FleetNotFoundError: If the folder holds no yard.
    """
    with _collector_off():
        fleet = _assembled(read_yard(folder), lists_passes=True)
        keys = fleet.keys(fleet.assembly.subjects)[part - 1 :: of]
        _study_all(fleet, keys, workers, progress, store, lists_passes=False)
        return len(keys)


@dataclass(frozen=True, slots=True)
class OpenHull:
    """Hold one hull with its studies, for what shows more than a result holds; passes are in `result`.

    `limits` are the sets that it is judged by, `written` is the data of its own file.
    """

    studies: Studies
    result: SubjectResult
    fleet: FleetResult
    limits: tuple[LimitSet, ...]
    aboard: NamedAboard
    written: Mapping[str, Any]


def open_hull(folder: Path, hull: str, *, today: datetime.date, plans_tests: bool = False) -> OpenHull:
    """Check one hull, and return its boat and studies beside what was found.

    Args:
        folder: The yard's repository.
        hull: The hull's id.
        today: The day on which waivers are judged.
        plans_tests: Whether its test is planned even if it has no sheet and no signature.

    Raises:
        FleetNotFoundError: If the folder holds no yard.
        UsageError: If there is no such hull, or it cannot be studied.
    """
    with _collector_off():
        files = read_yard(folder)
        fleet = _assembled(files, lists_passes=True, plans_tests=plans_tests)
        subjects = _chosen(fleet.assembly, files, [hull])
        keys = fleet.keys(subjects)
        studies, studied = fleet.bench.open(keys[0]) if keys else (None, Studied())
        found = _gathered(fleet, subjects, dict.fromkeys(keys, studied), today, [hull])
        if studies is None:
            first = next(iter(found.file_outcomes), None)
            told = f" ({first.at}: {first.fault})" if first is not None else ""
            raise UsageError(f"{hull} cannot be studied: mend the faults of its files first{told}")
        source = fleet.assembly.content[keys[0]].data
        aboard = named_aboard(hull, studies.boat, source, [document.data for document in files.parts])
        written = next(d.data for d in files.hulls if isinstance(d.data, dict) and d.data.get("hull") == hull)
        limits = tuple(fleet.bench.limit_set(use.id) for use in studied.sets)
        return OpenHull(studies, found.subjects[0], found, limits, aboard, written)


def _gathered(
    fleet: _Fleet, subjects: list[Subject], studied: dict[StudyKey, Studied], today: datetime.date,
    only: Collection[str],
) -> FleetResult:  # fmt: skip
    """Bring the studies of some subjects together with waivers, sheets and the faults of files."""
    tables = {key: tables_mark(fleet.marks, study.sets, fleet.rules.house.changes) for key, study in studied.items()}
    result = Gatherer(
        fleet.files, fleet.assembly, subjects, studied, fleet.faults, today, only, fleet.rules.house,
        fleet.sheets, tables, all_cards(), fleet.bench.as_fitted,
    ).result()  # fmt: skip
    return replace(result, marks=fleet.marks, sizes=_sizes(fleet.files))


@dataclass(frozen=True, slots=True)
class _Fleet:
    """Hold a fleet that was read and assembled, and what studies its boats."""

    files: YardFiles
    assembly: Assembly
    rules: HouseRules
    bench: _Bench
    faults: list[Fault]
    marks: Marks
    sheets: dict[str, Sheet]
    has_sound_parts: bool

    def keys(self, subjects: Sequence[Subject]) -> list[StudyKey]:
        """Return the distinct boats of some subjects; none can be built while a part is faulty."""
        return list(dict.fromkeys(subject.key for subject in subjects)) if self.has_sound_parts else []

    def study_name(self, key: StudyKey) -> str:
        """Return a name made of everything that the study of a boat rests on, positions of its data included.

        Files of other classes matter as far as the house rules do, which may name their circuits.
        """
        files, class_id = self.files, self.bench.class_of(key)
        shared = [files.yard, *files.parts, *files.limits, *files.classes[class_id], *files.options.get(class_id, [])]
        names = sorted({document.file for document in shared if document} | {self.assembly.written_in.get(key, "")})
        sums = [f"{name} {files.sums[name]}" for name in names if name]
        planned = str(self.bench.is_planned(key))
        return study_name([key, class_id, planned], [repr(self.rules.house)], sums)


def _assembled(files: YardFiles, *, lists_passes: bool, plans_tests: bool = False) -> _Fleet:
    assembly = assemble(files)
    catalogue, part_faults = _catalogue(files)
    entered, table_faults = read_entered(files.limits, files.faulty)
    rules = _house(files, assembly, entered)
    sets = _limit_sets(entered, rules)
    hulls = [subject for subject in assembly.subjects if subject.is_hull]
    written = {str(d.data.get("hull")) for d in files.hulls if isinstance(d.data, dict)}
    sheets, sheet_faults = read_sheets([d for d in files.sheets if d.file not in files.faulty], written)
    planned = frozenset(s.key for s in hulls if plans_tests or s.id in sheets or s.signed is not None)
    bench = _Bench(assembly, catalogue, rules.house, _adopted(files), sets, lists_passes=lists_passes, planned=planned)
    faults = [*files.faults, *assembly.faults, *part_faults, *table_faults, *rules.faults, *sheet_faults]
    return _Fleet(files, assembly, rules, bench, faults, table_marks(entered), sheets, not part_faults)


@contextlib.contextmanager
def _collector_off() -> Iterator[None]:
    """Keep the garbage collector out: everything built here lives to the end of the run."""
    was_on = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if was_on:
            gc.enable()


def _catalogue(files: YardFiles) -> tuple[Catalogue, list[Fault]]:
    faulty = files.faulty
    if any(document.file in faulty for document in files.parts):
        return {}, []  # told already; whatever rests on the parts was not assembled
    return read_catalogue(files.parts)


def _house(files: YardFiles, assembly: Assembly, entered: Entered) -> HouseRules:
    yard = files.yard
    if yard is None or yard.file in files.faulty:
        return HouseRules()  # its faults are told; what it changes cannot be trusted
    circuits = {name for boat in assembly.content.values() for name in boat.data.get("circuits", {})}
    return read_house(yard, CHECKS, circuits, entered)


def _limit_sets(entered: Entered, rules: HouseRules) -> dict[str, LimitSet]:
    """Return every limit set, with the tables that the yard enters and under the yard's own rules."""
    return {
        name: read_limit_set(TABLES / name, entered.get(name, NO_TABLES), rules.of_sets.get(name, NO_CHANGES))
        if name in entered or name in rules.of_sets
        else load_limit_set(name)
        for name in limit_set_ids()
    }


def _adopted(files: YardFiles) -> tuple[str, ...]:
    data = files.yard.data if files.yard and isinstance(files.yard.data, dict) else {}
    named = data.get("limit_sets", [])
    return tuple(name for name in limit_set_ids() if isinstance(named, list) and name in named)


def _sizes(files: YardFiles) -> tuple[tuple[str, str], ...]:
    """Return how the yard lets one kind of conductor size speak for the other."""
    data = files.yard.data if files.yard and isinstance(files.yard.data, dict) else {}
    house = data.get("house")
    rules = house if isinstance(house, dict) else {}
    return tuple((name, rules[name]) for name in ("gauge_sizes", "metric_sizes") if isinstance(rules.get(name), str))


def _chosen(assembly: Assembly, files: YardFiles, only: Collection[str]) -> list[Subject]:
    if not only:
        return assembly.subjects
    hulls = {subject.id for subject in assembly.subjects if subject.is_hull}
    in_files = {str(d.data["hull"]) for d in files.hulls if isinstance(d.data, dict) and "hull" in d.data}
    for name in only:
        if name not in hulls | in_files:
            meant = nearest(name, hulls | in_files)
            raise UsageError(f"there is no hull {name}" + (f"; did you mean {meant}?" if meant else ""))
    return [subject for subject in assembly.subjects if subject.is_hull and subject.id in only]


class _Bench:
    """Hold what is needed to study any boat of the fleet."""

    def __init__(
        self,
        assembly: Assembly,
        catalogue: Catalogue,
        house: House,
        adopted: tuple[str, ...],
        sets: Mapping[str, LimitSet],
        *,
        lists_passes: bool,
        planned: frozenset[StudyKey],
    ) -> None:
        self._lists_passes = lists_passes
        self._planned = planned
        self._content = assembly.content
        self._class_of = {subject.key: subject.class_id for subject in assembly.subjects}
        self._catalogue = catalogue
        self._house = house
        self._adopted = adopted
        self._sets = sets

    def class_of(self, key: StudyKey) -> str:
        """Return the class of a boat."""
        return self._class_of[key]

    def is_planned(self, key: StudyKey) -> bool:
        """Tell whether the test of a boat is planned with its study."""
        return key in self._planned

    def limit_set(self, name: str) -> LimitSet:
        """Return a limit set, with the tables that the yard enters and under the yard's own rules."""
        return self._sets[name]

    def study(self, key: StudyKey) -> Studied:
        """Build one boat, study it, and hold it against every limit set that it is judged by."""
        return self.open(key)[1]

    def open(self, key: StudyKey) -> tuple[Studies | None, Studied]:
        """Study one boat, and return its studies too; None where it could not be built."""
        boat, faults = build_boat(self._content[key], self._class_of[key], self._catalogue)
        if boat is None:
            return None, Studied(faults=tuple(faults))
        sets = _judged_by(boat, self._adopted, self._sets)
        limits = tuple(self._sets[use.id] for use in sets)
        studies = study_boat(boat)
        outcomes = run_checks(studies, limits, self._house)
        passed = [outcome for outcome in outcomes if outcome.verdict is Verdict.PASSED]
        ladder = studies.ladder
        is_planned = self.is_planned(key)
        aboard = aboard_of(boat) if self._lists_passes or is_planned else Aboard()
        return studies, Studied(
            news=news_order(outcomes),
            passes=pass_order(passed) if self._lists_passes else (),
            passed=len(passed),
            thin=sum(outcome.is_thin for outcome in passed),
            sets=sets,
            ladder=ladder,
            tightest=tightest(ladder, outcomes),
            lengths=lengths_of(boat),
            aboard=aboard,
            steps=plan(Case(studies, limits[0], limits, self._house)) if is_planned and limits else (),
            content=content_mark(aboard) if is_planned else "",
        )

    def as_fitted(self, key: StudyKey, device: str, rating_a: float) -> list[Outcome]:
        """Return the findings that a boat would have if a device aboard had another rating, and has not."""
        boat, _ = build_boat(self._content[key], self._class_of[key], self._catalogue)
        if boat is None:
            return []
        limits = tuple(self._sets[use.id] for use in _judged_by(boat, self._adopted, self._sets))
        before = {_named(outcome) for outcome in run_checks(study_boat(boat), limits, self._house)}
        there = boat.devices[device]
        assert isinstance(there.part, Overcurrent)
        made = next((member for member in there.part.series if member.rating_a == rating_a), there.part)
        fitted = replace(there, part=replace(made, rating_a=rating_a, series=there.part.series))
        other = replace(boat, devices={**boat.devices, device: fitted})
        return [o for o in run_checks(study_boat(other), limits, self._house)
                if o.verdict is Verdict.FINDING and _named(o) not in before]  # fmt: skip

    def study_to_keep(self, key: StudyKey) -> Studied | Written:
        """Study one boat and write the study down; one that could not be built is not to be kept."""
        studied = self.study(key)
        return studied if studied.faults else written(studied)


def _named(outcome: Outcome) -> tuple[object, ...]:
    return (outcome.verdict, outcome.check, outcome.part, outcome.limit_set)


def study_boat(boat: Boat) -> Studies:
    """Return the studies of a boat, none of them made yet."""
    figures = study_figures()
    temperatures_c = (figures.flow_copper_c, figures.cold_copper_c, figures.hot_copper_c)
    return Studies(boat, Coppers(*(Copper(resistivity_ohm_mm2_per_m(t)) for t in temperatures_c)))


def run_checks(
    studies: Studies, limits: tuple[LimitSet, ...], house: House, checks: Sequence[Check] = CHECKS
) -> list[Outcome]:
    """Hold one boat against limit sets; checks that rest on none run once."""
    if not limits:
        return []
    first = Case(studies, limits[0], limits, house)
    outcomes: list[Outcome] = []
    for check in checks:
        for one in limits if check.is_per_set else limits[:1]:
            outcomes += check.look(first.under(one))
    return outcomes


def _judged_by(boat: Boat, adopted: tuple[str, ...], sets: Mapping[str, LimitSet]) -> tuple[SetUse, ...]:
    """Return the limit sets that bind a boat by its own facts, and those its yard adopts."""
    uses: list[SetUse] = []
    for name in limit_set_ids():
        limits = sets[name]
        petrol = [e.id for e in boat.engines if e.fuel == "petrol" and e.mounting != "outboard"]
        if boat.generator_fuel == "petrol":
            petrol.append("generator")
        if limits.applies.binds_petrol_inboard and petrol:
            why = f"binds: petrol engine aboard that is no outboard ({', '.join(petrol)})"
        elif name in adopted:
            why = "adopted by the yard"
        else:
            continue
        uses.append(
            SetUse(
                name, limits.title, why, limits.from_memory_count, limits.caution, _entered_tables(limits),
                limits.not_entered,
            )
        )  # fmt: skip
    return tuple(uses)


def _entered_tables(limits: LimitSet) -> tuple[EnteredTable, ...]:
    """Return the tables that the yard has entered, each with where it was read."""
    found: list[EnteredTable] = []
    for table, file in limits.entered:
        citation = getattr(limits, table).citation
        found.append(
            EnteredTable(
                table, citation.document, citation.clause, citation.edition, citation.page, citation.basis.value, file
            )
        )
    return tuple(found)


def _study_all(
    fleet: _Fleet, keys: list[StudyKey], workers: int, progress: Progress | None, store: Store | None,
    lists_passes: bool,
) -> list[Studied]:  # fmt: skip
    """Study boats, but for those whose study was kept; return the studies in the order of the keys."""
    found: dict[StudyKey, Studied] = {}
    names = {key: fleet.study_name(key) for key in keys} if store is not None else {}
    for key, name in names.items():
        if store is not None and (kept := store.take(name, lists_passes=lists_passes)):
            found[key] = kept
    missing = [key for key in keys if key not in found]
    for key, one in zip(missing, _studies(fleet.bench, missing, workers, keeps=store is not None), strict=True):
        if isinstance(one, Written):
            found[key] = read_study(one, lists_passes=lists_passes)
            if store is not None:
                store.keep(names[key], one)
        else:
            found[key] = one
        if progress is not None:
            progress(len(found), len(keys))
    return [found[key] for key in keys]


def _studies(bench: _Bench, keys: list[StudyKey], workers: int, *, keeps: bool) -> Iterator[Studied | Written]:
    """Study boats; where studies are kept, as bytes: to write them is left to the workers too."""
    work = bench.study_to_keep if keeps else bench.study
    if workers <= 1 or len(keys) < FEWEST_FOR_WORKERS:
        yield from map(work, keys)
        return
    import multiprocessing
    from concurrent.futures import ProcessPoolExecutor

    # A forked worker has the assembled fleet already; elsewhere it is sent once to each.
    method = "fork" if "fork" in multiprocessing.get_all_start_methods() else None
    context = multiprocessing.get_context(method)
    with ProcessPoolExecutor(workers, context, _enter_worker, (work,)) as pool:
        yield from pool.map(_study_in_worker, keys, chunksize=max(1, len(keys) // (workers * 4)))


_work_of_worker: Callable[[StudyKey], Studied | Written] | None = None
"""Set once in each worker process, which has no other way to keep what its parent gave it."""


def _enter_worker(work: Callable[[StudyKey], Studied | Written]) -> None:
    global _work_of_worker
    gc.disable()
    _work_of_worker = work


def _study_in_worker(key: StudyKey) -> Studied | Written:
    assert _work_of_worker is not None
    return _work_of_worker(key)
