"""Write the waiver of a finding as YAML that can be put into the yard's waivers.yaml as it is."""

from __future__ import annotations

import datetime
import re
from collections.abc import Iterator, Mapping

from checker.errors import UsageError
from checker.finding import Card, Outcome, Verdict
from checker.reading.words import flat, shown
from checker.result.gather import fingerprint
from checker.result.model import FleetResult, SubjectResult

_PLAIN = re.compile(r"[A-Za-z][A-Za-z0-9_-]*(\.[A-Za-z][A-Za-z0-9_-]*)*\Z")
_ID_LENGTH = 40
_MARK_LENGTH = 6


def waiver_text(
    result: FleetResult, cards: Mapping[str, Card], mark: str, *, reason: str, approved_by: str, evidence: str,
    expires: str,
) -> str:  # fmt: skip
    """Return a waiver for each hull that has the finding with a fingerprint, or for its class if no hull has it.

    What is given empty is left empty: the schema refuses the file until it is filled in.

    Raises:
        UsageError: If there is no such finding, or it is accepted already or cannot be, or a field cannot stand so.
    """
    for name, text in (("--reason", reason), ("--approved-by", approved_by), ("--evidence", evidence)):
        if text and (text != text.strip() or not text.isprintable()):
            raise UsageError(f"{name}: write some text on one line, without a space in front or behind")
    try:
        expires = expires and datetime.date.fromisoformat(expires).isoformat()
    except ValueError as error:
        raise UsageError(f"--expires: “{shown(expires)}” is no date; write e.g. 2028-05-29") from error
    given = {"reason": reason, "approved_by": approved_by, "expires": expires}
    blocks = [_block(name, outcome, mark, given, evidence) for name, outcome in _found(result, cards, mark)]
    empty = [name for name, text in given.items() if not text]
    head = ["# Put this under “waivers:” in waivers.yaml."]
    if empty:
        head.append(f"# Fill in {', '.join(empty)}: as long as one is empty the file is refused.")
    return "\n".join([*head, *blocks, ""])


def _found(result: FleetResult, cards: Mapping[str, Card], mark: str) -> list[tuple[dict[str, str], Outcome]]:
    """Return the finding on each hull, or once for each class of which option sets alone have it."""
    found = [(s, o) for s in result.subjects for o in s.news if _is(o, mark)]
    rows = [(s, o) for s, o in found if s.is_hull]
    if not rows and not any(mark in s.accepted for s in result.subjects if s.is_hull):
        rows = list({s.class_id: (s, o) for s, o in found}.values())
    if not rows:
        raise UsageError(_why_not(result, mark))
    check = rows[0][1].check
    if not cards[check].can_be_waived:
        raise UsageError(f"findings of {check} cannot be accepted by a waiver: mend them")
    return [({"hull": s.id} if s.is_hull else {"class": s.class_id}, o) for s, o in rows]


def _is(outcome: Outcome, mark: str) -> bool:
    return outcome.verdict is Verdict.FINDING and fingerprint(outcome) == mark


def _why_not(result: FleetResult, mark: str) -> str:
    subject: SubjectResult
    for subject in result.subjects:
        if mark in subject.accepted:
            return f"{mark} is accepted on {subject.id} already, by {subject.accepted[mark].waiver}"
    if any(_is(outcome, mark) for outcome in result.file_outcomes):
        return f"{mark} is a fault of a file: mend it"
    return f"no open finding has the fingerprint {shown(mark)}; a report prints it under each finding"


def _block(where: dict[str, str], outcome: Outcome, mark: str, given: Mapping[str, str], evidence: str) -> str:
    (name,) = where.values()
    rows = {"check": outcome.check, **where, "part": outcome.part, "limit_set": outcome.limit_set, "fingerprint": mark}
    facts = [f"{key}: {_scalar(value)}" for key, value in rows.items() if value]
    facts += [f"{key}: {_quoted(value)}" for key, value in given.items()]
    facts += [f"evidence: {_quoted(evidence)}"] if evidence else []
    key = f"{name[: _ID_LENGTH - _MARK_LENGTH - 1]}-{mark[:_MARK_LENGTH]}"
    return "\n".join(_indented(f"# {flat(outcome.part)}: {flat(outcome.fault)}", f"{key}:", facts))


def _indented(comment: str, key: str, facts: list[str]) -> Iterator[str]:
    yield from (f"  {comment}", f"  {key}")
    yield from (f"    {fact}" for fact in facts)


def _scalar(text: str) -> str:
    """Return an id as it is, or quoted where it might be read as a number or as anything but text."""
    return text if _PLAIN.match(text) else _quoted(text)


def _quoted(text: str) -> str:
    import yaml

    return str(yaml.dump(text, default_style='"', allow_unicode=True, width=float("inf"))).strip()
