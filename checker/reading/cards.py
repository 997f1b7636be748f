"""Describe the faults that a yard's files can have, as `fairloom explain` prints them."""

from __future__ import annotations

from checker.finding import Basis, Card, Level

_PRACTICE = "the format of a yard's files"


def _card(name: str, title: str, why: str, text: str, catalogue: tuple[str, ...] = ()) -> Card:
    return Card(id=name, title=title, level=Level.ERROR, basis=Basis.YARD_RULE, citation=_PRACTICE, why=why,
                text=text, catalogue=catalogue)  # fmt: skip


FILE_CARDS: tuple[Card, ...] = (
    _card("unreadable-file", "Every file can be read",
          "a file that cannot be read hides every fault in it",
          "UTF-8 text, one YAML document of fields, no tabs, no aliases, anchors, tags or merge keys, at most 64 "
          "levels deep and 4 MB large, inside the repository and at a place where a yard keeps that kind of file."),
    _card("repeated-key", "Nothing is written twice",
          "of two values one is silently lost",
          "The same field twice in one mapping, or the same id twice in a class, catalogue or fleet."),
    _card("unknown-field", "Every field is known",
          "a mistyped field is a fact that nobody reads",
          "A field that the schema of its kind of document does not have. The nearest known one is named."),
    _card("missing-field", "Every needed field is written",
          "what is not written cannot be checked",
          "A field without which the thing cannot be built."),
    _card("bad-value", "Every value can be understood",
          "a value that two programs read differently is two boats",
          "A quantity without unit, with an unknown unit or a decimal comma; text where a number is due; an id that "
          "is not plain; an empty value; a number that starts with a zero; infinity.", ("CON-17",)),
    _card("unknown-reference", "Every id that is named exists",
          "a conductor to a post that is not there is a conductor to nowhere",
          "Parts, zones, ways, posts, devices, circuits, options, states and classes. What an option removes must not "
          "be named any more."),
    _card("patch-without-effect", "Every change changes something",
          "the change that was meant never happened",
          "A line of an option's or hull's patch that sets a value to what it is already, or removes what is not "
          "there.", ("FLT-02",)),
    _card("excluded-options", "No hull carries options that exclude each other",
          "nobody has designed that boat",
          "Two options of a hull of which one names the other under `excludes`."),
)  # fmt: skip
