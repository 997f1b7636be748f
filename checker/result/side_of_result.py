"""Make a side of a comparison from the result of a run."""

from __future__ import annotations

from checker.finding import Measure, Outcome, Verdict
from checker.result.gather import fingerprint
from checker.result.model import FleetResult, Study, SubjectResult
from checker.result.side import Figures, Found, Place, PlaceKey, Rule, Side, SideStudy, SideSubject, Waived


def side_of_result(result: FleetResult, name: str) -> Side:
    """Return a result as a side; `name` is what the reader called it."""
    return Side(
        name=name,
        tool_version=result.tool_version,
        subjects=tuple(map(_subject, result.subjects)),
        studies={study.name: _study(study) for study in result.studies},
        file_found=tuple(map(_found, result.file_outcomes)),
        unstudied=result.unstudied,
        rules=tuple(
            Rule(c.kind, c.what, c.limit_set, c.old, c.new, c.is_loosened, c.reason, str(c.at)) for c in result.house
        ),
        sizes=result.sizes,
        marks=result.marks,
    )


def _subject(subject: SubjectResult) -> SideSubject:
    return SideSubject(
        id=subject.id,
        is_hull=subject.is_hull,
        class_id=subject.class_id,
        study=subject.study,
        revision=subject.revision,
        class_revision=subject.class_revision,
        options=subject.options,
        status=subject.status,
        changes=subject.changes,
        accepted={
            mark: Waived(a.waiver, a.reason, a.approved_by, a.expires) for mark, a in sorted(subject.accepted.items())
        },
        own=tuple(map(_found, subject.own)),
    )


def _study(study: Study) -> SideStudy:
    places: dict[PlaceKey, Place] = {}
    for outcome in study.passes:
        place = Place(_figures(outcome.measure), outcome.note if outcome.measure is None else "")
        key = PlaceKey(outcome.check, outcome.limit_set, outcome.part, place.looks_at)
        times = 1
        while key in places:
            times += 1
            key = key._replace(part=f"{outcome.part} #{times}")
        places[key] = place
    sets = tuple(use.id for use in study.sets)
    return SideStudy(study.name, tuple(map(_found, study.news)), places, sets, study.aboard)


def _figures(measure: Measure | None) -> Figures | None:
    if measure is None:
        return None
    return Figures(
        measure.quantity, measure.value, measure.limit, measure.unit, measure.at_least, measure.is_stepped
    )  # fmt: skip


def _found(outcome: Outcome) -> Found:
    is_finding = outcome.verdict is not Verdict.NOT_ASSESSED
    return Found(
        is_finding=is_finding,
        check=outcome.check,
        level=outcome.level.value,
        part=outcome.part,
        fault=outcome.fault,
        fingerprint=fingerprint(outcome) if is_finding else "",
        limit_set=outcome.limit_set,
        circuit=outcome.circuit,
        state=outcome.state,
        remedy=outcome.remedy,
        missing=outcome.missing,
        path=outcome.path,
        file=outcome.at.file,
        at=str(outcome.at) if outcome.at.file else "",
        figures=_figures(outcome.measure),
    )
