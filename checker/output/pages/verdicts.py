"""Tell on a hull's page whether it is ready, what it is, and what was found, accepted and left out."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Any

from checker.finding import Level, Outcome, Verdict
from checker.output.gate_text import against, blocks, signed_words
from checker.output.lines import house_lines, measure_words
from checker.output.pages.dossier import Dossier, articles
from checker.output.pages.html import Content, Markup, Section, bullets, facts, lines, paragraph, table, tag
from checker.output.sheet_text import SAFETY
from checker.output.text import CAUTION, count
from checker.result.gather import fingerprint, natural
from checker.result.model import SetUse

PRACTICE = (
    "Local codes, the licensed edition of each standard and licensed practice govern; where this page and they differ, "
    "follow them."
)


def answer(dossier: Dossier) -> Markup:
    """Return the answer to the first question, with all that speaks against the hand-over."""
    gate = dossier.gate
    word = "READY for hand-over" if gate.is_ready else "NOT READY for hand-over"
    told: list[Content] = [paragraph(tag("strong", word))]
    if gate.is_ready:
        extras = [count(len(gate.accepted), "accepted deviation")] if gate.accepted else ["nothing is open"]
        told.append(paragraph(", ".join(extras)))
    else:
        told += [paragraph("Against it:"), bullets(against(gate))]
    told.append(paragraph(signed_words(gate)))
    return tag("div", *told, class_="answer")


def cautions() -> Markup:
    """Return the cautions that stand ahead of everything."""
    return tag(
        "div", paragraph(tag("strong", "Caution. "), SAFETY), paragraph(PRACTICE), paragraph(CAUTION),
        class_="caution", role="note",
    )  # fmt: skip


def identity(dossier: Dossier) -> Section:
    """Tell which hull this is, what it is made of, and by what it is judged."""
    subject, handover = dossier.subject, dossier.handover
    rows = (
        ("hull", subject.id),
        ("yard", dossier.yard or "no name"),
        ("class", f"{subject.class_id} ({subject.class_name})"),
        ("revision", f"{subject.revision} of {subject.class_revision}"),
        ("options", ", ".join(subject.options) or "none"),
        ("as-built changes", ", ".join(subject.changes) or "none"),
        ("status", subject.status),
        ("system voltage", f"{dossier.boat.system_voltage_v:g} V"),
        ("wiring", f"{handover.content} (changes with anything that is aboard)"),
        ("limit tables", f"{handover.tables} (changes with any figure that the hull is judged by)"),
        ("signature", signed_words(dossier.gate)),
        ("made by", f"fairloom {dossier.tool_version}"),
    )
    sets = [_set_row(use, dossier) for use in subject.sets]
    headings = ("limit set", "title", "edition", "why it applies", "from memory", "entered by the yard")
    return Section("identity", "Identity", (
        facts(rows),
        tag("h3", "What it is judged by"),
        table("sets", "Limit sets", headings, sets) if sets else paragraph("No limit set applies: nothing was judged."),
        *(paragraph(tag("strong", f"{use.id}: "), use.caution) for use in subject.sets if use.caution),
        tag("h3", "The yard's own rules"),
        *lines(house_lines(subject.house)),
    ))  # fmt: skip


def _set_row(use: SetUse, dossier: Dossier) -> tuple[str, ...]:
    limits = next(one for one in dossier.limits if one.id == use.id)
    entered = "; ".join(
        ", ".join(filter(None, (one.table, one.document, one.edition, one.clause, one.page))) for one in use.entered
    )
    return (
        use.id,
        use.title,
        limits.edition,
        use.why,
        f"{use.from_memory} of its tables and figures",
        entered or "none",
    )


def findings(dossier: Dossier) -> Section:
    """Tell the totals, and every open finding in full, worst first."""
    gate, subject = dossier.gate, dossier.subject
    open_ones = [o for o in subject.news if o.verdict is Verdict.FINDING]
    totals = (
        ("open errors", subject.open_errors),
        ("open warnings and notes", sum(o.level is not Level.ERROR for o in open_ones)),
        ("accepted findings", subject.count(Verdict.ACCEPTED)),
        ("places not assessed", subject.count(Verdict.NOT_ASSESSED)),
        ("places passed", subject.passed),
        ("of these with thin margin", subject.thin),
    )
    groups: tuple[tuple[str, Sequence[Outcome]], ...] = (
        ("Faults of the yard's files", gate.files), ("Open errors", gate.errors),
        ("What the test brought up", gate.failed), ("Changed since it was signed", gate.changed),
        ("Behind its class", gate.behind), ("Warnings and notes, which do not keep it back", gate.others),
    )  # fmt: skip
    told: list[Content] = [
        table("totals", "Places looked at", ("how they ended", "places"), totals, narrow=True),
    ]
    for title, some in groups:
        if some:
            told += [tag("h3", title), *articles(blocks(some), dossier)]
    if not open_ones and not gate.files:
        told.append(paragraph("Nothing is open: no error, no warning, no note."))
    return Section("findings", "Verdicts and open findings", tuple(told))


def not_assessed(dossier: Dossier) -> Section:
    """Tell what nobody looked at, so that it does not pass for sound."""
    gate = dossier.gate
    told: list[Content] = []
    if gate.not_assessed:
        told += [tag("h3", "Places not assessed"), *articles(blocks(gate.not_assessed), dossier)]
    else:
        told.append(paragraph("Every place that the checks ask for was assessed."))
    return Section("not-assessed", "What was not assessed", (
        *told, tag("h3", "Outside what was judged"), bullets(_outside(dossier)),
    ))  # fmt: skip


def _outside(dossier: Dossier) -> Iterator[str]:
    missing = dossier.gate.missing
    yield f"Steps of the test that are not done: {len(missing)} of {len(dossier.handover.steps)}."
    yield "Lengths and measured drops are compared with those of sister hulls only where the whole fleet is checked."
    yield "The data were judged, not the work: whether the boat is as written is for the test and for who looks at it."
    for limits in dossier.limits:
        if limits.silent_on:
            names = ", ".join(name.replace("_", " ") for name in limits.silent_on)
            yield f"{limits.id} says nothing on: {names}."
        if limits.not_entered:
            names = ", ".join(limits.not_entered)
            yield f"{limits.id}: the yard has not entered {names}; what needs them is not assessed."


_WAIVER = ("waiver", "accepted", "by (role)", "until", "reason", "evidence")


def deviations(dossier: Dossier) -> Section:
    """Tell what differs from the class, what was accepted by whom and until when, and what is exempt."""
    changes = list(_changes(dossier))
    accepted = list(_accepted(dossier))
    exempt = list(_exemptions(dossier))
    return Section("deviations", "Deviations, waivers and exemptions", (
        table("changes", "As-built changes", ("change", "what", "reason", "decided", "note"), changes)
        if changes else paragraph("As-built changes: none."),
        table("waivers", "Accepted findings", _WAIVER, accepted)
        if accepted else paragraph("Accepted findings: none."),
        table("exemptions", "Exemptions used", ("why", "check", "limit set", "parts"), exempt)
        if exempt else paragraph("Exemptions used: none."),
    ))  # fmt: skip


def _changes(dossier: Dossier) -> Iterator[tuple[str, ...]]:
    rows: Any = dossier.written.get("changes") or {}
    for name in dossier.subject.changes:
        row = rows[name]
        told = (row["what"], row.get("reason", ""), row.get("state", "not told"), row.get("note", ""))
        yield (name, *(" ".join(str(text).splitlines()) for text in told))


def _accepted(dossier: Dossier) -> Iterator[tuple[str, ...]]:
    for mark, acceptance in sorted(dossier.subject.accepted.items(), key=lambda row: (natural(row[1].waiver), row[0])):
        for outcome in dossier.gate.accepted:
            if fingerprint(outcome) == mark:
                measured = f"; {measure_words(outcome)}" if outcome.measure else ""
                under = f", {outcome.limit_set}" if outcome.limit_set else ""
                yield (
                    acceptance.waiver,
                    f"{outcome.level.value} at {outcome.part}: {outcome.fault}{measured} [{outcome.check}{under}]",
                    acceptance.approved_by, acceptance.expires, acceptance.reason, acceptance.evidence or "none told",
                )  # fmt: skip


def _exemptions(dossier: Dossier) -> Iterator[tuple[str, ...]]:
    """Gather every exemption used: what it frees from which rule."""
    found: dict[tuple[str, str, str], list[str]] = {}
    for outcome in dossier.subject.passes:
        if outcome.measure is None and outcome.note:
            found.setdefault((outcome.note, outcome.check, outcome.limit_set), []).append(outcome.part)
    for (note, check, limit_set), parts in sorted(found.items(), key=lambda row: (row[0][1], row[0])):
        yield note, check, limit_set or "any", ", ".join(sorted(set(parts), key=natural))
