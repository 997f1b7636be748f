"""Write the view of a fleet as one page of HTML."""

from __future__ import annotations

from collections.abc import Iterator

from checker.finding import Verdict
from checker.output.fleet_text import check_words, ready_words, retrofit_words, standing, tightest_words
from checker.output.lines import house_lines
from checker.output.pages.html import Content, Section, bullets, contents, lines, page, paragraph, table, tag
from checker.output.pages.style import css
from checker.output.pages.verdicts import PRACTICE
from checker.output.text import CAUTION, count, fleet_verdict
from checker.result.fleet_view import FleetView, HullView

_HULL = ("hull", "class, options", "ready for hand-over", "open errors", "not assessed", "smallest headroom")
_TITLES = {
    "planned": "Planned hulls", "in-build": "Hulls in build", "signed": "Signed hulls", "delivered": "Delivered hulls",
}  # fmt: skip


def fleet_page(view: FleetView) -> str:
    """Return the page: who is ready, where it is tight, what is open, what built hulls have to get."""
    sections = [_hulls(view), _open(view), _retrofit(view), *_not_studied(view), _rules(view)]
    title = f"Fleet of {view.result.yard}" if view.result.yard else "Fleet"
    head = tag(
        "header", tag("h1", title),
        tag("div", paragraph(tag("strong", "Ready for hand-over: ", ready_words(view))),
            paragraph(fleet_verdict(view.result)), class_="answer"),
        tag("div", paragraph(tag("strong", "Caution. "), PRACTICE), paragraph(CAUTION), class_="caution", role="note"),
    )  # fmt: skip
    foot = f"{title}, fairloom {view.result.tool_version}"
    return page(
        title, css(foot), head, contents(sections), tag("main", *(one.markup for one in sections)),
        tag("footer", paragraph(f"Made by fairloom {view.result.tool_version}.", class_="quiet")),
    )  # fmt: skip


def _hulls(view: FleetView) -> Section:
    tables = (
        table(f"hulls-{status}", f"{_TITLES[status]}: {len(hulls)}", _HULL, map(_hull_row, hulls))
        for status, hulls in view.by_status
    )
    return Section("hulls", "Hulls by status", tuple(tables) or (paragraph("No hull was studied."),))


def _hull_row(hull: HullView) -> tuple[Content | int, ...]:
    subject = hull.subject
    options = " + ".join(subject.options) or "no options"
    return (
        subject.id, f"{subject.class_id}, {options}", standing(hull), subject.open_errors,
        subject.count(Verdict.NOT_ASSESSED), tightest_words(hull),
    )  # fmt: skip


def _open(view: FleetView) -> Section:
    rows = [(one.check, one.title, one.level.value, check_words(one)) for one in view.checks]
    told = (
        table("open-findings", "Open findings by check", ("check", "what it asks for", "level", "open at"), rows)
        if rows else paragraph("Nothing is open on any hull or option set.")
    )  # fmt: skip
    return Section("open", "Open findings by check", (told,))


def _retrofit(view: FleetView) -> Section:
    rows = [(one.hull, one.status, bullets(retrofit_words(one))) for one in view.retrofit]
    told: list[Content] = [
        paragraph("Hulls that are built do not change with their class. Listed are those that are behind its revision, "
                  "and those with open findings that stand in files of the class or of the parts."),
        table("retrofits", "What built hulls have to get", ("hull", "status", "work"), rows)
        if rows else paragraph("No built hull is behind its class, and none has an open finding from it."),
    ]  # fmt: skip
    return Section("retrofit", "Retrofit list", tuple(told))


def _not_studied(view: FleetView) -> Iterator[Section]:
    files = view.result.file_outcomes
    if not view.result.unstudied and not files:
        return
    told: list[Content] = []
    if view.result.unstudied:
        told += [paragraph(f"{count(len(view.result.unstudied), 'boat or class')} could not be studied:"),
                 bullets(view.result.unstudied)]  # fmt: skip
    if files:
        rows = [(str(o.at) if o.at.file else o.part, o.level.value, f"{o.fault} [{o.check}]", o.remedy) for o in files]
        told.append(table("files", "Faults of the yard's files", ("place", "level", "fault", "remedy"), rows))
    yield Section("not-studied", "Not studied", tuple(told))


def _rules(view: FleetView) -> Section:
    uses = sorted({(use.id, use.title, use.why) for subject in view.result.subjects for use in subject.sets})
    return Section("rules", "What the fleet is judged by", (
        table("sets", "Limit sets", ("limit set", "title", "why it applies"), uses)
        if uses else paragraph("No limit set applies: nothing was judged."),
        tag("h3", "The yard's own rules"),
        *lines(house_lines(view.result.house)),
    ))  # fmt: skip
