"""Run the stages in order: the one module that knows them all."""

from __future__ import annotations

import contextlib
import datetime
import gc
from collections.abc import Callable, Collection, Iterator, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

from checker import __version__
from checker.boat.assemble import Assembly, ClassDesign, Subject, assemble
from checker.boat.build import build_boat
from checker.boat.catalogue import Catalogue, read_catalogue
from checker.boat.hull import Boat
from checker.checks.catalogue import CHECKS
from checker.checks.check import Case, Check, House, HouseChange
from checker.checks.house import HouseRules, read_house
from checker.errors import UsageError
from checker.finding import NOWHERE, Card, Level, Outcome, Verdict
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
from checker.network.flow import Copper
from checker.network.studies import Coppers, Studies
from checker.reading.cards import FILE_CARDS
from checker.reading.document import Fault
from checker.reading.words import nearest
from checker.reading.yard_files import YardFiles, read_yard
from checker.result.cards import CLASS_REVISION, NOT_STUDIED, RESULT_CARDS
from checker.result.gather import news_order, pass_order, tightest
from checker.result.model import EnteredTable, FleetResult, SetUse, Study, SubjectResult
from checker.result.sisters import far_lengths, lengths_of
from checker.result.store import Store, study_name
from checker.result.studied import Studied, Written, read_study, written
from checker.result.waiver_file import read_waivers
from checker.result.waivers import Waiver, apply_waivers, unmatched

Progress = Callable[[int, int], None]
StudyKey = str


FEWEST_FOR_WORKERS = 8
"""Distinct boats below which starting worker processes costs more than it saves."""


def all_cards() -> tuple[Card, ...]:
    """Return the cards of everything that can be found, in report order."""
    return (*FILE_CARDS, *(check.card for check in CHECKS), *RESULT_CARDS)


def check_fleet(
    folder: Path,
    *,
    today: datetime.date,
    only: Collection[str] = (),
    workers: int = 1,
    progress: Progress | None = None,
    lists_passes: bool = True,
    store: Store | None = None,
) -> FleetResult:
    """Check a yard's fleet: every hull, and every legal option set of every class.

    Args:
        folder: The yard's repository.
        today: The day on which waivers are judged.
        only: Ids of the hulls to check; empty for the whole fleet.
        workers: How many processes study boats side by side; the result does not depend on it.
        progress: Called with the number of boats studied and their total.
        lists_passes: Whether the result holds each pass, as reports need, or only their number.
        store: Studies of earlier runs; the result does not depend on them.

    Raises:
        FleetNotFoundError: If the folder holds no yard.
        UsageError: If `only` names a hull that is not in the fleet.
    """
    with _collector_off():
        # What is kept has its passes, whatever this run needs: the next one may report.
        fleet = _read_fleet(folder, lists_passes=lists_passes or store is not None)
        subjects = _chosen(fleet.assembly, fleet.files, only)
        keys = fleet.keys(subjects)
        studied = dict(zip(keys, _study_all(fleet, keys, workers, progress, store, lists_passes), strict=True))
        if store is not None and not only:
            store.tidy()
        return _Gatherer(
            fleet.files, fleet.assembly, subjects, studied, fleet.faults, today, only, fleet.rules.house
        ).result()


def study_part(
    folder: Path, store: Store, *, part: int, of: int, workers: int = 1, progress: Progress | None = None
) -> int:
    """Study each `of`-th distinct boat from the `part`-th on, and keep the studies; return how many boats that are.

    A run over the whole fleet with the studies of all parts tells what a run without any tells.

    Raises:
        FleetNotFoundError: If the folder holds no yard.
    """
    with _collector_off():
        fleet = _read_fleet(folder, lists_passes=True)
        keys = fleet.keys(fleet.assembly.subjects)[part - 1 :: of]
        _study_all(fleet, keys, workers, progress, store, lists_passes=False)
        return len(keys)


@dataclass(frozen=True, slots=True)
class OpenHull:
    """Hold one hull with its studies, for what shows more than a result holds; passes are in `result`."""

    studies: Studies
    result: SubjectResult


def open_hull(folder: Path, hull: str, *, today: datetime.date) -> OpenHull:
    """Check one hull, and return its boat and studies beside what was found.

    Args:
        folder: The yard's repository.
        hull: The hull's id.
        today: The day on which waivers are judged.

    Raises:
        FleetNotFoundError: If the folder holds no yard.
        UsageError: If there is no such hull, or it cannot be studied.
    """
    with _collector_off():
        fleet = _read_fleet(folder, lists_passes=True)
        subjects = _chosen(fleet.assembly, fleet.files, [hull])
        keys = fleet.keys(subjects)
        studies, studied = fleet.bench.open(keys[0]) if keys else (None, Studied())
        if studies is None:
            raise UsageError(f"hull {hull} could not be studied: “fairloom check --only {hull}” tells why")
        result = _Gatherer(
            fleet.files, fleet.assembly, subjects, {keys[0]: studied}, fleet.faults, today, [hull], fleet.rules.house
        ).result()
        return OpenHull(studies, result.subjects[0])


@dataclass(frozen=True, slots=True)
class _Fleet:
    """Hold a fleet that was read and assembled, and what studies its boats."""

    files: YardFiles
    assembly: Assembly
    rules: HouseRules
    bench: _Bench
    faults: list[Fault]
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
        return study_name([key, class_id], [repr(self.rules.house)], sums)


def _read_fleet(folder: Path, *, lists_passes: bool) -> _Fleet:
    files = read_yard(folder)
    assembly = assemble(files)
    catalogue, part_faults = _catalogue(files)
    entered, table_faults = read_entered(files.limits, files.faulty)
    rules = _house(files, assembly, entered)
    sets = _limit_sets(entered, rules)
    bench = _Bench(assembly, catalogue, rules.house, _adopted(files), sets, lists_passes=lists_passes)
    faults = [*files.faults, *assembly.faults, *part_faults, *table_faults, *rules.faults]
    return _Fleet(files, assembly, rules, bench, faults, not part_faults)


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
    ) -> None:
        self._lists_passes = lists_passes
        self._content = assembly.content
        self._class_of = {subject.key: subject.class_id for subject in assembly.subjects}
        self._catalogue = catalogue
        self._house = house
        self._adopted = adopted
        self._sets = sets

    def class_of(self, key: StudyKey) -> str:
        """Return the class of a boat."""
        return self._class_of[key]

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
        return studies, Studied(
            news=news_order(outcomes),
            passes=pass_order(passed) if self._lists_passes else (),
            passed=len(passed),
            thin=sum(outcome.is_thin for outcome in passed),
            sets=sets,
            ladder=ladder,
            tightest=tightest(ladder, outcomes),
            lengths=lengths_of(boat),
        )

    def study_to_keep(self, key: StudyKey) -> Studied | Written:
        """Study one boat and write the study down; one that could not be built is not to be kept."""
        studied = self.study(key)
        return studied if studied.faults else written(studied)


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


class _Gatherer:
    """Bring studies, waivers and file faults together into one result."""

    def __init__(
        self,
        files: YardFiles,
        assembly: Assembly,
        subjects: list[Subject],
        studied: dict[StudyKey, Studied],
        faults: list[Fault],
        today: datetime.date,
        only: Collection[str],
        house: House,
    ) -> None:
        self._house = house
        self._files = files
        self._assembly = assembly
        self._studied = studied
        self._today = today
        self._only = only
        self._faults = [*faults, *(fault for study in studied.values() for fault in study.faults)]
        self._subjects = [s for s in subjects if s.key in studied and not studied[s.key].faults]
        self._lost = [s for s in subjects if s not in self._subjects]
        self._cards = {card.id: card for card in FILE_CARDS}

    def result(self) -> FleetResult:
        """Return the result of the run."""
        waivers = self._waivers()
        alike: dict[StudyKey, list[str]] = {}
        for subject in self._subjects:
            alike.setdefault(subject.key, []).append(subject.id)
        results: list[SubjectResult] = []
        matched: set[str] = set()
        hull_files = self._file_outcomes_of_hulls()
        far = self._far_lengths()
        for subject in self._subjects:
            study = self._studied[subject.key]
            design = self._assembly.classes[subject.class_id]
            mine = [w for w in waivers if w.concerns(subject.id, subject.class_id)]
            waived = apply_waivers(study.news, mine, self._today)
            matched |= waived.matched
            own = [*waived.extra, *hull_files.get(subject.id, ()), *_behind(subject, design), *far.get(subject.id, ())]
            own += [unmatched(w) for w in mine if w.hull and w.id not in waived.matched]
            results.append(
                SubjectResult(
                    id=subject.id,
                    is_hull=subject.is_hull,
                    class_id=subject.class_id,
                    class_name=str(design.base.data["class"].get("name", "")),
                    revision=subject.revision,
                    class_revision=design.revision,
                    options=subject.options,
                    status=subject.status,
                    changes=subject.changes,
                    study=alike[subject.key][0],
                    alike=tuple(name for name in alike[subject.key] if name != subject.id),
                    sets=study.sets,
                    news=news_order([*waived.outcomes, *own]),
                    own=news_order(own),
                    passes=study.passes,
                    passed=study.passed,
                    thin=study.thin,
                    ladder=study.ladder,
                    tightest=study.tightest,
                    accepted=waived.accepted,
                    house=self._house_of(study.sets),
                )
            )
        return FleetResult(
            yard=self._yard_name(),
            tool_version=__version__,
            subjects=tuple(results),
            studies=tuple(
                Study(names[0], study.news, study.passes, study.thin, study.sets, study.ladder, study.tightest)
                for key, names in alike.items()
                for study in (self._studied[key],)
            ),
            file_outcomes=self._fleet_outcomes(waivers, matched),
            unstudied=self._unstudied(),
            house=self._house.changes,
        )

    def _house_of(self, sets: Sequence[SetUse]) -> tuple[HouseChange, ...]:
        """Return the yard's own rules that bear on a boat judged by these sets."""
        judged_by = {"", *(use.id for use in sets)}
        return tuple(change for change in self._house.changes if change.limit_set in judged_by)

    def _far_lengths(self) -> dict[str, list[Outcome]]:
        """Compare sister hulls; single hulls have no sisters at hand."""
        if self._only:
            return {}
        found: dict[str, list[Outcome]] = {}
        for class_id in self._assembly.classes:
            of_class = [s for s in self._subjects if s.class_id == class_id]
            hulls = [(s.id, self._studied[s.key].lengths) for s in of_class if s.is_hull]
            found.update(far_lengths(hulls, (self._studied[s.key].lengths for s in of_class if not s.is_hull)))
        return found

    def _yard_name(self) -> str:
        data = self._files.yard.data if self._files.yard else None
        name = data.get("name", "") if isinstance(data, dict) else ""
        return name if isinstance(name, str) else ""

    def _waivers(self) -> list[Waiver]:
        document = self._files.waivers
        if document is None or document.file in self._files.faulty:
            return []
        hulls = {str(d.data.get("hull")) for d in self._files.hulls if isinstance(d.data, dict)}
        waivers, faults = read_waivers(document, hulls, list(self._files.classes), all_cards())
        self._faults += faults
        return waivers

    def _hull_of_file(self) -> dict[str, str]:
        studied = {subject.id for subject in self._subjects if subject.is_hull}
        named: dict[str, str] = {}
        for document in self._files.hulls:
            name = document.data.get("hull") if isinstance(document.data, dict) else None
            if isinstance(name, str) and name in studied and name not in named.values():
                named[document.file] = name
        return named

    def _file_outcomes_of_hulls(self) -> dict[str, list[Outcome]]:
        """Return the file faults that belong to one hull that was studied all the same."""
        owner = self._hull_of_file()
        found: dict[str, list[Outcome]] = {}
        for fault in sorted(set(self._faults), key=_fault_key):
            if fault.at.file in owner:
                found.setdefault(owner[fault.at.file], []).append(self._outcome(fault))
        return found

    def _fleet_outcomes(self, waivers: list[Waiver], matched: set[str]) -> tuple[Outcome, ...]:
        owner = self._hull_of_file()
        others = {document.file for document in self._files.hulls} if self._only else set()
        asked = {d.file for d in self._files.hulls if isinstance(d.data, dict) and d.data.get("hull") in self._only}
        lost_files = {s.at.file for s in self._lost} | asked
        outcomes = [
            self._outcome(fault)
            for fault in sorted(set(self._faults), key=_fault_key)
            if fault.at.file not in owner and (fault.at.file not in others or fault.at.file in lost_files)
        ]
        if not self._only:
            outcomes += [unmatched(w) for w in waivers if w.class_id and w.id not in matched]
        outcomes += [
            Outcome(verdict=Verdict.FINDING, check=NOT_STUDIED.id, level=Level.ERROR, part=name, at=NOWHERE,
                    fault="could not be studied", remedy="mend the faults of its files first")
            for name in self._unstudied()
        ]  # fmt: skip
        return news_order(outcomes)

    def _unstudied(self) -> tuple[str, ...]:
        lost = [f"hull {s.id}" if s.is_hull else f"option set {s.id}" for s in self._lost]
        names = sorted({*self._assembly.unstudied, *lost})
        if self._only:
            names = [name for name in names if name.removeprefix("hull ") in self._only]
        return tuple(names)

    def _outcome(self, fault: Fault) -> Outcome:
        card = self._cards[fault.check]
        return Outcome(
            verdict=Verdict.FINDING, check=card.id, level=card.level, part=fault.at.file, at=fault.at,
            fault=fault.message, remedy=fault.remedy, inputs=(("fault", fault.message),),
        )  # fmt: skip


def _fault_key(fault: Fault) -> tuple[object, ...]:
    return (fault.at, fault.check, fault.message, fault.remedy)


def _behind(subject: Subject, design: ClassDesign) -> list[Outcome]:
    """Return the finding that a hull is behind its class, if it is."""
    if not subject.is_hull or subject.revision >= design.revision:
        return []
    missed = {n: row for n, row in sorted(design.revisions.items()) if n > subject.revision}
    electrical = [n for n, (_, is_electrical) in missed.items() if is_electrical]
    told = "; ".join(f"{n}: {what}" for n, (what, _) in missed.items())
    level = Level.ERROR if electrical or not missed else Level.NOTE
    outcome = Outcome(
        verdict=Verdict.FINDING, check=CLASS_REVISION.id, level=level, part=subject.id, at=subject.at_revision,
        fault=f"built to class revision {subject.revision}, the class is at {design.revision} ({told})",
        remedy="retrofit it and raise its revision" if level is Level.ERROR else
        "nothing electrical has changed since; raise its revision when the rest is done",
        inputs=(("revision", str(subject.revision)), ("class", str(design.revision))),
    )  # fmt: skip
    return [outcome._replace(note="" if level is Level.ERROR else "nothing electrical changed")]
