"""Write the reports that are committed and diffed: one a hull, one for the fleet."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass

from checker.checks.words import ampere, measured, seconds
from checker.finding import EQUAL_FRACTION, Card, Outcome, Verdict
from checker.network.ladder import Rung
from checker.output.lines import finding_lines, house_lines, loosened_words, measure_words, same_fault, set_lines
from checker.reading.words import flat
from checker.result.gather import fingerprint, natural
from checker.result.model import Acceptance, FleetResult, SubjectResult

CAUTION = (
    "This report holds wiring data against the limits it names. It certifies nothing: local codes, the licensed "
    "edition of a standard and the surveyor decide. Disconnect before working; batteries are for qualified people."
)
Cards = Mapping[str, Card]
EMPTY: Mapping[str, Outcome] = {}


def verdict_words(subject: SubjectResult) -> str:
    """Tell how a hull or option set came out, in a few words."""
    loosened = loosened_words(subject.house)
    under = f"; {loosened}" if loosened else ""
    if subject.open_errors:
        unknown = subject.count(Verdict.NOT_ASSESSED)
        also = f", {count(unknown, 'place not assessed')}" if unknown else ""
        return f"FAILS with {count(subject.open_errors, 'open error')}{also}{under}"
    extras = [
        count(n, word)
        for n, word in (
            (subject.count(Verdict.FINDING), "warning or note"),
            (subject.count(Verdict.ACCEPTED), "accepted finding"),
            (subject.count(Verdict.NOT_ASSESSED), "place not assessed"),
            (subject.thin, "thin margin"),
        )
        if n
    ]
    return "passes" + (f" with {', '.join(extras)}" if extras else "") + under


def count(number: int, word: str) -> str:
    """Print a number with its word, in the plural where it is due."""
    if number == 1:
        return f"1 {word}"
    plurals = {"warning or note": "warnings or notes", "place not assessed": "places not assessed",
               "hull": "hulls"}  # fmt: skip
    return f"{number} {plurals.get(word, word + 's')}"


def hull_report(subject: SubjectResult, cards: Cards, passes: str | None = None) -> str:
    """Return the text report of one hull or option set; `passes` is its last part where that is written already."""
    told = passes_text(subject.passes, subject.ladder, subject.tightest) if passes is None else passes
    return "\n".join([*_head(subject), "", *_news(subject, cards), told])


def passes_text(passes: Sequence[Outcome], ladder: Sequence[Rung], tightest: Mapping[str, Outcome]) -> str:
    """Return the part of a report that tells the protection and what passed; alike hulls have it in common."""
    return "\n".join(
        [*ladder_lines(ladder, tightest), *_exemptions(passes), *_looked_at(passes), *_measured(passes), ""]
    )


def ladder_lines(ladder: Sequence[Rung], tightest: Mapping[str, Outcome] = EMPTY) -> Iterator[str]:
    """Print the protection from each bank down, a device a line, each under the one above it."""
    yield from ("", "protection, from each bank or source down")
    top = ""
    for rung in ladder:
        if rung.depth == 1 and rung.above != top:
            top = rung.above
            yield f"  {top}"
        indent = "  " * (rung.depth + 1)
        yield indent + "; ".join([f"{rung.device} {ampere(rung.rating_a)} ({rung.part})", *_what(rung, tightest)])
        facts = "; ".join(_rung_facts(rung))
        if facts:
            yield f"{indent}  {rung.device}: {facts}"


def _what(rung: Rung, tightest: Mapping[str, Outcome]) -> Iterator[str]:
    """Tell what a device serves, and how closely it protects: of its conductors the one nearest its limit."""
    if rung.serves:
        yield f"serves {', '.join(rung.serves)}"
    nearest = tightest.get(rung.device)
    if nearest is not None and nearest.measure is not None:
        value, limit = measured(nearest.measure)
        yield f"protects {nearest.part}: {value} of {limit} allowed"


def _rung_facts(rung: Rung) -> Iterator[str]:
    yield from filter(None, (flow_words(rung), far_words(rung), selective_words(rung)))


def flow_words(rung: Rung) -> str:
    """Tell what can flow at a device, and what it can break; empty where that is not known."""
    if not rung.prospective_a:
        return ""
    breaks = "capacity not written" if rung.interrupting_a is None else f"breaks {ampere(rung.interrupting_a)}"
    return f"{ampere(round(rung.prospective_a))} can flow, {breaks}"


def far_words(rung: Rung) -> str:
    """Tell what a short circuit at the far end behind a device draws, and when the device opens."""
    if not rung.far_post:
        return ""
    opens = (
        "no band" if rung.opens_s is None
        else "may never open" if math.isinf(rung.opens_s)
        else f"opens within {seconds(rung.opens_s)}"
    )  # fmt: skip
    return f"short at {rung.far_post} draws {ampere(round(rung.far_a))}, {opens}"


def selective_words(rung: Rung) -> str:
    """Tell whether a device opens before the one above it; empty where nothing is asked or known."""
    if rung.is_alone:
        return f"in series with {rung.above}"
    if rung.selective_up_to_a is None:
        return ""
    if rung.selective_up_to_a >= rung.behind_a * (1 - EQUAL_FRACTION):
        return f"selective under {rung.above} in full"
    if rung.selective_up_to_a > 0:
        up_to, behind = ampere(round(rung.selective_up_to_a)), ampere(round(rung.behind_a))
        return f"selective under {rung.above} up to {up_to} of {behind}"
    return f"not selective under {rung.above}"


def _head(subject: SubjectResult) -> Iterator[str]:
    kind = "hull" if subject.is_hull else "option set"
    yield f"{kind}: {subject.id}"
    revision = f"revision {subject.revision} of {subject.class_revision}"
    yield f"class: {subject.class_id} ({flat(subject.class_name)}), {revision}"
    yield f"options: {', '.join(subject.options) or 'none'}"
    yield f"as-built changes: {', '.join(subject.changes) or 'none'}"
    yield f"status: {subject.status}"
    yield f"same wiring: {', '.join(subject.alike) or 'no other'}"
    yield from set_lines(subject.sets)
    yield from house_lines(subject.house)
    yield f"verdict: {verdict_words(subject)}"
    yield f"caution: {CAUTION}"


def _news(subject: SubjectResult, cards: Cards) -> Iterator[str]:
    yield "totals"
    for verdict in Verdict:
        yield f"  {verdict.value}: {subject.count(verdict)}"
    yield f"  passed with thin margin: {subject.thin}"
    for verdict, heading in (
        (Verdict.FINDING, "findings"), (Verdict.ACCEPTED, "accepted findings"), (Verdict.NOT_ASSESSED, "not assessed"),
    ):  # fmt: skip
        blocks: dict[tuple[object, ...], list[Outcome]] = {}
        for outcome in subject.news:
            if outcome.verdict is verdict:
                blocks.setdefault(same_fault(outcome), []).append(outcome)
        yield from ("", heading if blocks else f"{heading}: none")
        accepted = subject.accepted if verdict is Verdict.ACCEPTED else {}
        for block in blocks.values():
            yield from finding_lines(block, cards[block[0].check], "", accepted)


def _exemptions(passes: Sequence[Outcome]) -> Iterator[str]:
    """Print every exemption used: what it frees from which rule, and by which clause."""
    used = sorted(
        {(natural(o.part), o.part, o.check, o.limit_set, o.note) for o in passes if o.measure is None and o.note}
    )
    yield from ("", "exemptions used" if used else "exemptions used: none")
    for _, part, check, limit_set, note in used:
        yield f"  {flat(part)} {check} {limit_set}: {flat(note)}"


def _looked_at(passes: Sequence[Outcome]) -> Iterator[str]:
    """Count the passes without headroom to tell: those with no figure, and those on a row of sizes."""
    counts = Counter((o.check, o.limit_set) for o in passes if not _has_headroom(o))
    yield from ("", "passed without headroom to tell, by check")
    for (check, limit_set), number in sorted(counts.items()):
        yield f"  {check}{' ' + limit_set if limit_set else ''}: {number}"


def _has_headroom(outcome: Outcome) -> bool:
    return outcome.measure is not None and not outcome.measure.is_stepped


def _measured(passes: Sequence[Outcome]) -> Iterator[str]:
    """Print every measured pass: part, check, value of limit, headroom."""
    yield from ("", "passed with headroom, by part")
    for outcome in passes:
        if _has_headroom(outcome):
            limit_set = f" {outcome.limit_set}" if outcome.limit_set else ""
            yield f"  {flat(outcome.part)} {outcome.check}{limit_set}: {measure_words(outcome)}"


def fleet_report(result: FleetResult, cards: Cards) -> str:
    """Return the text report of the fleet: what is open first, then each hull in a line."""
    lines = [
        f"yard: {flat(result.yard)}",
        f"fairloom: {result.tool_version}",
        f"verdict: {fleet_verdict(result)}",
        *house_lines(result.house),
        f"caution: {CAUTION}",
        "",
        *fleet_totals(result),
        "",
        *summary_lines(result),
    ]
    for verdict, heading in (
        (Verdict.FINDING, "findings"), (Verdict.ACCEPTED, "accepted findings"), (Verdict.NOT_ASSESSED, "not assessed"),
    ):  # fmt: skip
        blocks = grouped(result, verdict)
        lines += ["", heading if blocks else f"{heading}: none"]
        for block in blocks:
            lines += finding_lines(block.outcomes, cards[block.outcomes[0].check], block.who, block.accepted)
    return "\n".join([*lines, ""])


def fleet_verdict(result: FleetResult) -> str:
    """Tell the outcome of the run in one line."""
    hulls = [s for s in result.subjects if s.is_hull]
    failing = [s.id for s in hulls if s.open_errors]
    sets = [s.id for s in result.subjects if not s.is_hull and s.open_errors]
    words = [f"{count(len(failing), 'hull')} of {len(hulls)} {'has' if len(failing) == 1 else 'have'} open errors"]
    if failing:
        words[0] += f" ({', '.join(failing)})"
    if sets:
        words.append(f"{count(len(sets), 'option set')} with open errors ({', '.join(sets)})")
    if loosened := loosened_words(result.house):
        words.append(loosened)
    if result.file_outcomes:
        words.append(f"{count(len(result.file_outcomes), 'fault')} in the yard's files")
    if result.unstudied:
        words.append(f"NOT STUDIED: {', '.join(result.unstudied)}")
    return "; ".join(words)


def fleet_totals(result: FleetResult) -> Iterator[str]:
    """Print what was looked at, over all hulls and option sets, alike ones counted once each."""
    findings = sum(s.count(Verdict.FINDING) for s in result.subjects) + len(result.file_outcomes)
    yield f"hulls: {sum(s.is_hull for s in result.subjects)}"
    yield f"option sets: {sum(not s.is_hull for s in result.subjects)}"
    yield f"distinct boats studied: {len(result.studies)}"
    yield f"open errors: {result.open_errors}"
    yield f"open warnings and notes: {findings - result.open_errors}"
    yield f"accepted findings: {sum(s.count(Verdict.ACCEPTED) for s in result.subjects)}"
    yield f"places not assessed: {sum(s.count(Verdict.NOT_ASSESSED) for s in result.subjects)}"
    yield f"places passed: {sum(s.passed for s in result.subjects)}"
    yield f"of these with thin margin: {sum(s.thin for s in result.subjects)}"
    uses = sorted({use for s in result.subjects for use in s.sets}, key=lambda use: (use.id, use.why))
    yield from set_lines(uses)


def summary_lines(result: FleetResult) -> Iterator[str]:
    """Print each hull and option set in one line."""
    for subject in (s for s in result.subjects if s.is_hull):
        options = " + ".join(subject.options) or "no options"
        yield f"hull {subject.id} ({subject.status}, {options}): {verdict_words(subject)}"
    for subject in (s for s in result.subjects if not s.is_hull):
        yield f"option set {subject.id}: {verdict_words(subject)}"


@dataclass(frozen=True, slots=True)
class Block:
    """Hold one fault as a reader sees it: under all its limit sets, with the hulls and option sets it is on."""

    outcomes: tuple[Outcome, ...]
    names: tuple[str, ...]
    accepted: dict[str, Acceptance]

    @property
    def who(self) -> str:
        """Return the hulls and option sets as text."""
        return ", ".join(self.names)


def grouped(result: FleetResult, verdict: Verdict) -> list[Block]:
    """Return each fault once, with the hulls and option sets that it is on, worst first."""
    # Two hulls whose figures differ only beyond the printed digits have one fault to a reader.
    on: dict[tuple[object, ...], tuple[Outcome, Acceptance | None, list[str]]] = {}
    for outcome in result.file_outcomes:
        if outcome.verdict is verdict:
            on[(outcome,)] = (outcome, None, [])
    for subject in result.subjects:
        for outcome in subject.news:
            if outcome.verdict is verdict:
                acceptance = subject.accepted.get(fingerprint(outcome)) if verdict is Verdict.ACCEPTED else None
                told = measure_words(outcome) if outcome.measure else ""
                key = (*same_fault(outcome), outcome.limit_set, outcome.fault, told, fingerprint(outcome), acceptance)
                on.setdefault(key, (outcome, acceptance, []))[2].append(subject.id)
    blocks: dict[tuple[object, ...], list[tuple[Outcome, Acceptance | None, list[str]]]] = {}
    for outcome, acceptance, names in on.values():
        key = (*same_fault(outcome), *((outcome.fault,) if not outcome.limit_set else ()), tuple(names))
        blocks.setdefault(key, []).append((outcome, acceptance, names))
    found = [
        Block(
            tuple(outcome for outcome, _, _ in rows),
            tuple(rows[0][2]),
            {fingerprint(outcome): acceptance for outcome, acceptance, _ in rows if acceptance},
        )
        for rows in blocks.values()
    ]
    return sorted(found, key=_block_order)


def _block_order(block: Block) -> tuple[object, ...]:
    first = block.outcomes[0]
    return (first.level.rank, first.at, first.check, natural(first.part), block.who)
