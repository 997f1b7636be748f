"""Read the yard's waivers from their document."""

from __future__ import annotations

import datetime
from collections.abc import Collection, Mapping, Sequence

from checker.boat.entry import Entry
from checker.boat.patch import Patched
from checker.finding import Card
from checker.reading.document import Document, Fault
from checker.result.waivers import Waiver


def read_waivers(
    document: Document | None, hulls: Collection[str], classes: Collection[str], checks: Sequence[Card]
) -> tuple[list[Waiver], list[Fault]]:
    """Return the waivers in the order of their ids, and what is wrong with them."""
    if document is None or not isinstance(document.data, dict):
        return [], []
    faults: list[Fault] = []
    top = Entry(Patched(document.data, (document.places,)), (), document.data, faults)
    waivable = {card.id: card.can_be_waived for card in checks}
    waivers = [_waiver(row, hulls, classes, waivable) for row in top.entries("waivers")]
    return [waiver for waiver in waivers if waiver is not None], faults


def _waiver(row: Entry, hulls: Collection[str], classes: Collection[str], checks: Mapping[str, bool]) -> Waiver | None:
    known = True
    for name, what, ids in (("hull", "hull", hulls), ("class", "class", classes), ("check", "check", checks)):
        if row.has(name) and row.text(name) not in ids:
            row.unknown(what, row.text(name), row.at(name), ids)
            known = False
    if checks.get(row.text("check")) is False:
        row.fault("bad-value", row.at("check"), f"findings of {row.text('check')} cannot be waived", "mend them")
        known = False
    try:
        expires = datetime.date.fromisoformat(row.text("expires"))
    except ValueError:
        row.fault(
            "bad-value", row.at("expires"), f"expires: “{row.text('expires')}” is no date", "write e.g. 2028-05-29"
        )
        return None
    if not known:
        return None
    return Waiver(
        id=row.id,
        check=row.text("check"),
        hull=row.text("hull"),
        class_id=row.text("class"),
        part=row.text("part"),
        limit_set=row.text("limit_set"),
        fingerprint=row.text("fingerprint"),
        reason=row.text("reason"),
        approved_by=row.text("approved_by"),
        evidence=row.text("evidence"),
        expires=expires,
        at=row.at(),
        at_fingerprint=row.at("fingerprint"),
        at_expires=row.at("expires"),
    )
