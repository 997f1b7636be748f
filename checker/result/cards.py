"""Describe the findings that are made of a whole fleet: waivers and class revisions."""

from __future__ import annotations

from checker.finding import Basis, Card, Level

_PRACTICE = "common practice, no source"


def _card(name: str, title: str, level: Level, why: str, text: str, catalogue: tuple[str, ...]) -> Card:
    return Card(id=name, title=title, level=level, basis=Basis.COMMON_PRACTICE, citation=_PRACTICE, why=why,
                text=text, catalogue=catalogue)  # fmt: skip


WAIVER_UNMATCHED = _card(
    "waiver-unmatched", "Every waiver accepts a finding that exists", Level.WARNING,
    "a waiver without a finding hides the next one",
    "A waiver that names a hull, part and check at which nothing is found. Take it out.", ("FLT-04",),
)  # fmt: skip
WAIVER_TOO_WIDE = _card(
    "waiver-too-wide", "A waiver accepts one finding", Level.ERROR,
    "what is accepted without a look is accepted for good",
    "A waiver that matches more than one finding of a hull: name the limit set. It accepts none of them.",
    ("FLT-05",),
)  # fmt: skip
WAIVER_EXPIRED = _card(
    "waiver-expired", "No waiver has run out", Level.ERROR,
    "what was accepted for a time is open again",
    "The day of expiry still counts. After it the finding is open until it is mended or accepted anew.", ("FLT-05",),
)  # fmt: skip
WAIVER_INPUTS_CHANGED = _card(
    "waiver-inputs-changed", "What was accepted is what is there", Level.ERROR,
    "the accepted value is not the present value",
    "A waiver is bound to the fingerprint of the inputs that made the finding: sizes, lengths, ratings, currents. "
    "They have changed since; judge again, and write the new fingerprint if it is still acceptable.", ("FLT-06",),
)  # fmt: skip
CLASS_REVISION = _card(
    "class-revision", "A hull is at the revision of its class", Level.ERROR,
    "a known fault is delivered, and the hull is judged by a drawing that it was not built to",
    "The hull names an older revision than its class has. An error where a revision since then changed something "
    "electrical, a note where it did not. Retrofit the hull, or record its wiring as changes, and raise its revision.",
    ("FLT-07",),
)  # fmt: skip
LENGTH_FAR_FROM_SISTERS = _card(
    "length-far-from-sisters", "A hull's own lengths are like those of its sisters", Level.NOTE,
    "a typing error, or another route than the drawing shows",
    "A length that a hull's own file gives, against the middle length of the same conductor over all hulls of the "
    "class, or, with fewer than three hulls, against the class: more than a quarter and half a metre apart. Not "
    "looked at where single hulls are checked.",
    ("FLT-12",),
)  # fmt: skip
NOT_STUDIED = _card(
    "not-studied", "Every hull could be assembled and studied", Level.ERROR,
    "a hull that was not looked at must not look like one that passed",
    "Its files, or files that it rests on, have faults that are told above. Mend them first.", (),
)  # fmt: skip

SIGNED_CONTENT = _card(
    "signed-content", "A signed hull is wired as it was signed for", Level.WARNING,
    "the signature vouches for another boat than the one that is written down",
    "A signature bears the mark of the wiring that was signed for. The data of the hull, of its class, its options or "
    "its parts have changed since: repeat what that touches and sign again. Before that the hull is not ready.", (),
)  # fmt: skip
SIGNED_TABLES = _card(
    "signed-tables", "A signed hull is judged by what it was signed under", Level.NOTE,
    "what the hull was held against then is not what it is held against now",
    "The wiring is the one that was signed for, but the tool, the limit tables or the yard's own rules have changed "
    "since.", (),
)  # fmt: skip

RESULT_CARDS = (
    WAIVER_UNMATCHED, WAIVER_TOO_WIDE, WAIVER_EXPIRED, WAIVER_INPUTS_CHANGED, CLASS_REVISION,
    LENGTH_FAR_FROM_SISTERS, SIGNED_CONTENT, SIGNED_TABLES, NOT_STUDIED,
)  # fmt: skip
