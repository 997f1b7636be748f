"""Say what changed aboard, and what that means for a hull that is already built."""

from __future__ import annotations

from collections.abc import Iterator

from checker.output.compare_words import fact_words, figure_words, value_words
from checker.result.comparison import Difference, DifferenceKind, Retrofit


def _about(about: str) -> str:
    """Name a circuit or thing: the stack of a stud by its stud."""
    kind, _, name = about.partition(" ")
    if kind == "stack" and " " in name:
        post, _, stud = name.partition(" ")
        return f"stud {stud} of {post}"
    return about


_TOLD_OF_NEW = (
    "name",
    "service",
    "current_a",
    "size",
    "device",
    "part",
    "rating_a",
    "zone",
    "start",
    "end",
    "length_m",
)


def difference_words(one: Difference, where: str) -> str:
    """Tell what changed aboard in one line."""
    things = f" ({', '.join(one.things[:6])}{' …' if len(one.things) > 6 else ''})" if one.things else ""
    about = _about(one.about)
    on = f" {where}" if where else ""
    if one.kind is DifferenceKind.CHANGED:
        told = [", ".join(map(fact_words, one.facts)), *(figure_words(figure, one.about) for figure in one.figures)]
        return f"{about}{things}{on}: {'; '.join(told)}"
    facts = {fact.key: fact for fact in one.facts}
    told = [value_words(facts[key]) for key in _TOLD_OF_NEW if key in facts]
    word = "new" if one.kind is DifferenceKind.ADDED else "gone"
    return f"{about} is {word}{on}{': ' if told else ''}{', '.join(told)}"


def retrofit_words(one: Retrofit) -> Iterator[str]:
    """Yield the work on a hull, and which findings it mends and makes."""
    for difference in one.work[:8]:
        yield difference_words(difference, "")
    if len(one.work) > 8:
        yield f"and {len(one.work) - 8} more changes"
    if one.mends:
        yield f"mends: {', '.join(one.mends[:6])}{' …' if len(one.mends) > 6 else ''}"
    if one.makes:
        yield f"makes: {', '.join(one.makes[:6])}{' …' if len(one.makes) > 6 else ''}"
