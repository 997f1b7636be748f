"""Write the hand-over file of a hull: one page of HTML that goes with the boat."""

from __future__ import annotations

from checker.output.pages.dossier import Dossier
from checker.output.pages.drawings import drawn
from checker.output.pages.fitted import devices, landings, spares, wires
from checker.output.pages.html import contents, page, paragraph, tag
from checker.output.pages.isolation import isolation, standby
from checker.output.pages.protection import circuits, ladder, one_line, plots, worst_circuits
from checker.output.pages.style import css
from checker.output.pages.tested import tested
from checker.output.pages.verdicts import answer, cautions, deviations, findings, identity, not_assessed


def handover_page(dossier: Dossier) -> str:
    """Return the page: what decides first, then what protects, then what is fitted and was measured."""
    subject = dossier.subject
    pictures = drawn(dossier.studies, subject.outcomes, subject.id, worst_circuits(dossier))
    sections = [
        identity(dossier), findings(dossier), not_assessed(dossier), deviations(dossier), isolation(dossier),
        standby(dossier), spares(dossier), ladder(dossier), one_line(pictures), circuits(dossier), *plots(pictures),
        devices(dossier), tested(dossier), wires(dossier), landings(dossier),
    ]  # fmt: skip
    title = f"Hand-over file of {subject.id}"
    head = tag(
        "header", tag("h1", title),
        paragraph(f"{subject.class_name or subject.class_id}, revision {subject.revision}, status {subject.status}"),
        answer(dossier), cautions(),
    )  # fmt: skip
    foot = f"{subject.id}, wiring {dossier.handover.content}, fairloom {dossier.tool_version}"
    return page(
        title, css(foot), head, contents(sections), tag("main", *(one.markup for one in sections)),
        tag("footer", paragraph(f"Made by {foot}. Nothing on this page was loaded from elsewhere.", class_="quiet")),
    )  # fmt: skip
