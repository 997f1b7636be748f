"""Load the colours of conductors: which spellings are one colour, and which colour means what."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

from checker.limits.citation import Citation
from checker.limits.table_file import Table, common_table


@dataclass(frozen=True, slots=True, kw_only=True)
class ColourRule:
    """Hold the classes of colours.

    `classes` are spellings by class. `bonding` are the classes that belong to bonding and
    grounding conductors alone, `not_negative_with_ac` those that no DC negative has where AC is
    aboard.
    """

    classes: tuple[tuple[str, str], ...]
    bonding: tuple[str, ...]
    not_negative_with_ac: tuple[str, ...]
    citation: Citation

    def class_of(self, colour: str) -> str:
        """Return the class of a colour as a yard spells it, the spelling itself where no class has it."""
        spelt = " ".join(colour.lower().replace("/", " / ").split()).replace(" / ", "/")
        return dict(self.classes).get(spelt, spelt)


@cache
def colour_rule() -> ColourRule:
    """Return the colours of conductors."""
    return read_colour_rule(common_table("colours"))


def read_colour_rule(table: Table) -> ColourRule:
    """Read the colours of conductors.

    Raises:
        LimitSetError: If the table is malformed, or a rule names a class that it does not have.
    """
    citation = table.citation()
    table.expect(("citation", "bonding", "not_negative_with_ac", "classes"))
    rows = table.table("classes")
    classes = tuple((spelling, name) for name in rows.values for spelling in rows.names(name))
    if len(dict(classes)) != len(classes):
        rows.refuse("one spelling stands in two classes")
    bonding, barred = table.names("bonding"), table.names("not_negative_with_ac")
    for name in (*bonding, *barred):
        if name not in rows.values:
            table.refuse(f"{name} is no class of colours")
    return ColourRule(classes=classes, bonding=bonding, not_negative_with_ac=barred, citation=citation)
