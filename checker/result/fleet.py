"""Bring studies, waivers, sheets and file faults together into the result of a run."""

from __future__ import annotations

import datetime
from collections.abc import Callable, Collection, Mapping, Sequence

from checker import __version__
from checker.boat.assemble import Assembly, ClassDesign, Signature, Subject
from checker.checks.check import House, HouseChange
from checker.finding import NOWHERE, Card, Level, Outcome, Span, Verdict
from checker.limits.measuring_rule import measuring_rule
from checker.reading.cards import FILE_CARDS
from checker.reading.document import Document, Fault
from checker.reading.yard_files import YardFiles
from checker.result.cards import CLASS_REVISION, NOT_STUDIED, SIGNED_CONTENT, SIGNED_TABLES
from checker.result.gather import news_order
from checker.result.measured import far_from_sisters, judge_sheet, missing_outcome, with_as_fitted
from checker.result.measured_cards import OLD_SHEET
from checker.result.model import FleetResult, Handover, SetUse, Study, SubjectResult
from checker.result.sheet_file import Sheet
from checker.result.sisters import far_lengths
from checker.result.studied import Studied
from checker.result.waiver_file import read_waivers
from checker.result.waivers import Waiver, apply_waivers, unmatched

StudyKey = str
AsFitted = Callable[[StudyKey, str, float], list[Outcome]]
"""Returns what a boat would be found with if a device had another rating, A."""
SIGNED_OFF = ("signed", "delivered")
"""The states of a hull in which its test ought to be done."""


class Gatherer:
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
        sheets: Mapping[str, Sheet],
        tables: Mapping[str, str],
        cards: Sequence[Card],
        as_fitted: AsFitted,
    ) -> None:
        self._as_fitted = as_fitted
        self._house = house
        self._sheets = sheets
        self._tables = tables
        self._all_cards = cards
        self._files = files
        self._assembly = assembly
        self._studied = studied
        self._today = today
        self._only = only
        self._faults = [*faults, *(fault for study in studied.values() for fault in study.faults)]
        self._subjects = [s for s in subjects if s.key in studied and not studied[s.key].faults]
        self._lost = [s for s in subjects if s not in self._subjects]
        self._cards = {card.id: card for card in FILE_CARDS}
        self._documents = {document.file: document for document in files.hulls}

    def result(self) -> FleetResult:
        """Return the result of the run."""
        waivers = self._waivers()
        alike: dict[StudyKey, list[str]] = {}
        for subject in self._subjects:
            alike.setdefault(subject.key, []).append(subject.id)
        results: list[SubjectResult] = []
        matched: set[str] = set()
        hull_files = self._file_outcomes_of_hulls()
        handovers = {s.id: handover for s in self._subjects if (handover := self._handover(s)) is not None}
        far = self._far_lengths()
        far_drops = self._far_drops(handovers)
        for subject in self._subjects:
            study = self._studied[subject.key]
            design = self._assembly.classes[subject.class_id]
            mine = [w for w in waivers if w.concerns(subject.id, subject.class_id)]
            handover = handovers.get(subject.id)
            found = [*_measured(subject, handover), *far_drops.get(subject.id, ())]
            waived = apply_waivers([*self._in_own_file(subject, study.news), *found], mine, self._today)
            matched |= waived.matched
            own = [*waived.outcomes[len(study.news) :], *waived.extra, *hull_files.get(subject.id, ())]
            own += [*_behind(subject, design), *far.get(subject.id, ()), *_signed(handover)]
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
                    news=news_order([*waived.outcomes[: len(study.news)], *own]),
                    own=news_order(own),
                    passes=study.passes,
                    passed=study.passed,
                    thin=study.thin,
                    ladder=study.ladder,
                    tightest=study.tightest,
                    accepted=waived.accepted,
                    house=self._house_of(study.sets),
                    handover=handover,
                )
            )
        return FleetResult(
            yard=self._yard_name(),
            tool_version=__version__,
            subjects=tuple(results),
            studies=tuple(
                Study(
                    name=names[0],
                    news=study.news,
                    passes=study.passes,
                    thin=study.thin,
                    sets=study.sets,
                    ladder=study.ladder,
                    tightest=study.tightest,
                    aboard=study.aboard,
                )
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

    def _in_own_file(self, subject: Subject, news: Sequence[Outcome]) -> Sequence[Outcome]:
        """Return a study's outcomes with the places of the hull's own file.

        Hulls of the same content are studied once, by the file of the first; a person who was
        sent there would edit another boat.
        """
        first = self._assembly.written_in.get(subject.key, "")
        if not subject.is_hull or subject.at.file == first or not any(_points_at(o, first) for o in news):
            return news
        places = _same_places(self._documents[first], self._documents[subject.at.file])
        return [
            o._replace(at=places.get(o.at, o.at), also_at=tuple(places.get(span, span) for span in o.also_at))
            for o in news
        ]

    def _handover(self, subject: Subject) -> Handover | None:
        """Return what belongs to the hand-over of a hull, where its test was planned."""
        study = self._studied[subject.key]
        if not subject.is_hull or not study.content:
            return None
        sheet = self._sheets.get(subject.id)
        rule = measuring_rule(self._house.common)
        judged = None if sheet is None else judge_sheet(study.steps, sheet, rule, study.content)
        if judged is not None:
            judged = with_as_fitted(judged, lambda device, a: self._as_fitted(subject.key, device, a))
            self._faults += judged.faults
        return Handover(study.steps, study.content, self._tables[subject.key], sheet, judged, subject.signed, rule)

    def _far_drops(self, handovers: Mapping[str, Handover]) -> dict[str, list[Outcome]]:
        """Compare the measured drops of sister hulls."""
        found: dict[str, list[Outcome]] = {}
        for class_id in self._assembly.classes:
            sheets = {
                s.id: (handover.steps, handover.sheet)
                for s in self._subjects
                if s.class_id == class_id and (handover := handovers.get(s.id)) and handover.sheet is not None
            }
            found.update(far_from_sisters(sheets, measuring_rule(self._house.common)))
        return found

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
        waivers, faults = read_waivers(document, hulls, list(self._files.classes), self._all_cards)
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
        if self._only:
            sheets = (d for d in self._files.sheets if isinstance(d.data, dict))
            others |= {d.file for d in sheets if d.data.get("sheet") not in self._only}
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


def _points_at(outcome: Outcome, file: str) -> bool:
    return bool(file) and (outcome.at.file == file or any(span.file == file for span in outcome.also_at))


def _same_places(first: Document, other: Document) -> dict[Span, Span]:
    """Return where another hull's file says what the first one says: its changes are alike, in the same order."""
    changes = [list(document.data.get("changes", {})) for document in (first, other)]
    names = dict(zip(*changes, strict=False))
    found: dict[Span, Span] = {}
    for path, spans in first.places.items():
        is_change = path[:1] == ("changes",) and len(path) > 1
        there = (path[0], names.get(path[1], path[1]), *path[2:]) if is_change else path
        if there in other.places:
            found.update(zip(spans, other.places[there], strict=True))
    return found


def _measured(subject: Subject, handover: Handover | None) -> list[Outcome]:
    """Return what a hull's sheet brought up; what is missing is told of a hull that is signed off.

    That the sheet was printed for other wiring is left to the gate: each change of a class would
    bring it up on every hull that was tested.
    """
    if handover is None or handover.judged is None or handover.sheet is None:
        return []
    found = [o for o in handover.judged.outcomes if o.verdict is Verdict.FINDING and o.check != OLD_SHEET.id]
    if handover.judged.missing and subject.status in SIGNED_OFF:
        found.append(missing_outcome(handover.judged.missing, handover.sheet.at))
    return found


def _signed(handover: Handover | None) -> list[Outcome]:
    """Return what has changed since a hull was signed: its wiring, or what judges it."""
    if handover is None or handover.signed is None:
        return []
    signed = handover.signed
    if signed.content != handover.content:
        fault = f"the wiring has changed since it was signed on {signed.date}: {signed.content} was signed for, "
        return [_about(SIGNED_CONTENT, signed, f"{fault}{handover.content} is written",
                       "repeat what the change touches, and sign again")]  # fmt: skip
    moved = [f"the tool is {__version__} instead of {signed.tool}"] if signed.tool != __version__ else []
    moved += ["the limit tables are others"] if signed.tables != handover.tables else []
    if not moved:
        return []
    return [_about(SIGNED_TABLES, signed, f"it was signed on {signed.date}; since then {' and '.join(moved)}",
                   "look at what it is judged by now; sign again when it has to be done anyway")]  # fmt: skip


def _about(card: Card, signed: Signature, fault: str, remedy: str) -> Outcome:
    return Outcome(
        verdict=Verdict.FINDING, check=card.id, level=card.level, part="signature", at=signed.at, fault=fault,
        remedy=remedy, inputs=(("signed", signed.content), ("fault", fault)),
    )  # fmt: skip
