"""Say facts, figures and hulls of a comparison as a person at the yard would."""

from __future__ import annotations

from collections.abc import Sequence

from checker.boat.aboard import TRUE_UNLESS_WRITTEN, UNKNOWN_UNLESS_WRITTEN, Fact
from checker.checks.words import measured, plain
from checker.finding import Measure
from checker.result.comparison import FactChange, FigureChange, SubjectChange
from checker.result.side import Figures
from checker.units import foot_from_metre

MOST_NAMES = 12
LONG = 60
"""Characters of a list beyond which only what differs of it is told."""

_UNITS = {
    "_mm2": " mm2", "_ohm": " ohm", "_nm": " Nm", "_ah": " Ah", "_a": " A", "_v": " V", "_m": " m", "_c": " C",
    "_s": " s",
}  # fmt: skip
_NAMES = {
    "name": "", "start": "starts at", "end": "lands on", "size": "", "company": "conductors in its bundle",
    "covered": "cover", "start_barrel": "barrel at its start", "end_barrel": "barrel at its end",
    "smallest": "smallest size", "largest": "largest size", "ac": "AC", "band_points": "opening times",
    "joins": "joined to", "judges_drop": "drop is judged", "by_hand": "worked by hand", "short_time_s": "short time",
    "contact_ohm": "contact resistance", "device": "protected by", "kind": "kind",
}  # fmt: skip
_FIGURES = {
    "voltage-drop-from-bank": "total drop", "voltage-drop": "drop of its own conductors",
    "solved-drop": "drop in operation", "ampacity": "current", "device-rating": "protection",
    "return-protection": "protection of the return", "minimum-voltage": "voltage at the load",
}  # fmt: skip


def unit_of(key: str) -> tuple[str, str]:
    """Return the name of a fact and its unit with a blank before it, from its key: length_m is a length in m."""
    if key in _NAMES:
        return _NAMES[key], next((unit for end, unit in _UNITS.items() if key.endswith(end)), "")
    for end, unit in _UNITS.items():
        if key.endswith(end):
            return key.removesuffix(end).replace("_", " "), unit
    return key.replace("_", " "), ""


def fact_words(fact: FactChange) -> str:
    """Tell a fact that changed: "6 AWG -> 8 AWG", "length 5.20 m -> 6.00 m"."""
    name, unit = unit_of(fact.key)
    old, new = _pair(fact, unit)
    if fact.key == "band_points":
        return f"{name} changed"
    if max(len(old), len(new)) > LONG and ", " in f"{old}{new}":
        return _list_words(name, old, new)
    return f"{name} {old} -> {new}".strip()


def value_words(fact: FactChange) -> str:
    """Tell a fact of what is new or gone: "14 AWG", "length 5.20 m"."""
    name, unit = unit_of(fact.key)
    value = fact.old if fact.new is None else fact.new
    return f"{name} {_value(value, unit)}".strip()


def _pair(fact: FactChange, unit: str) -> tuple[str, str]:
    """Return both values with as many digits as it takes to see that they differ."""
    old, new = fact.old, fact.new
    if isinstance(old, bool) or isinstance(new, bool):
        usual = None if fact.key in UNKNOWN_UNLESS_WRITTEN else fact.key in TRUE_UNLESS_WRITTEN
        old, new = (usual if one is None else one for one in (old, new))
    if unit == " m" and fact.in_feet:
        old, new = (foot_from_metre(one) if isinstance(one, int | float) else one for one in (old, new))
        unit = " ft"
    if isinstance(old, str) or isinstance(new, str):
        old, new = ("none" if one is None else one for one in (old, new))
    for digits in (2, 4, 9):
        told = [_value(one, unit, digits) for one in (old, new)]
        if told[0] != told[1]:
            break
    return told[0], told[1]


def _value(value: Fact | None, unit: str, digits: int = 2) -> str:
    if value is None:
        return "not recorded"
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, str):
        return value
    if unit == " m" and digits == 2:
        return f"{value:.2f} m"
    text = plain(value) if digits == 2 and (value == 0 or abs(value) >= 0.01) else f"{value:.{max(digits, 4)}g}"
    return f"{text}{unit}"


def _list_words(name: str, old: str, new: str) -> str:
    before, after = old.split(", "), new.split(", ")
    gone = [item for item in before if item not in after and item != "none"]
    came = [item for item in after if item not in before and item != "none"]
    words = [f"without {', '.join(gone)}"] if gone else []
    words += [f"with {', '.join(came)}"] if came else []
    return f"{name}: {'; '.join(words) or 'in another order'}".removeprefix(": ")


def _measure(figures: Figures) -> Measure:
    return Measure(figures.quantity, figures.value, figures.limit, figures.unit, figures.at_least)


def figures_words(figures: Figures) -> str:
    """Tell a value against its limit: "3.37 % of 3.00 %"."""
    value, limit = measured(_measure(figures))
    return f"{value} {'at least' if figures.at_least else 'of'} {limit}"


def figure_words(figure: FigureChange, about: str) -> str:
    """Tell a figure that changed: "total drop 2.55 % -> 3.37 % of 3.00 %"; of which part where that is another."""
    name = _FIGURES.get(figure.check, figure.after.quantity)
    head = figure.part.partition(" ")[0]
    if " " in about and head != about.partition(" ")[2]:
        name = f"{name} of {figure.part}"
    before, old_limit = measured(_measure(figure.before))
    value, limit = measured(_measure(figure.after))
    sense = "at least" if figure.after.at_least else "of"
    was = "" if old_limit == limit else f" {sense} {old_limit}"
    return f"{name} {before}{was} -> {value} {sense} {limit}"


def headroom_words(figures: Figures) -> str:
    """Tell headroom as a share of the limit."""
    return "" if figures.headroom is None else f"{figures.headroom * 100:.1f} %"


def count_words(number: int, word: str, plural: str = "") -> str:
    """Print a number with its word."""
    return f"{number} {word if number == 1 else plural or word + 's'}"


class Names:
    """Tell hulls and option sets by name, hulls that are built with their status."""

    def __init__(self, subjects: Sequence[SubjectChange]) -> None:
        self._subjects = {subject.id: subject for subject in subjects}
        self._hulls = [subject for subject in subjects if subject.is_hull]

    def hulls(self, on: Sequence[str]) -> list[SubjectChange]:
        """Return the hulls among some names."""
        return [self._subjects[name] for name in on if name in self._subjects and self._subjects[name].is_hull]

    def on(self, on: Sequence[str]) -> str:
        """Tell where something is: "3 hulls: TND-031 (delivered), …; and 6 option sets"."""
        hulls, others = self.hulls(on), [name for name in on if not self.hulls([name])]
        words: list[str] = []
        if len(hulls) == len(self._hulls) > 3:
            built = sum(hull.is_built for hull in hulls)
            words.append(f"all {len(hulls)} hulls{f', {built} of them already built' if built else ''}")
        elif hulls:
            words.append(f"{count_words(len(hulls), 'hull')}: {_listed([_named(hull) for hull in hulls])}")
        if others and hulls:
            words.append(f"and {count_words(len(others), 'option set')}")
        elif others:
            words.append(_listed(others))
        return "; ".join(words)

    def short(self, on: Sequence[str]) -> str:
        """Tell where something is, without names where there are many: "on 14 hulls"."""
        hulls = self.hulls(on)
        if not hulls:
            return f"on {count_words(len(on), 'option set')}, no hull"
        return f"on {_named(hulls[0])}" if len(hulls) == 1 else f"on {count_words(len(hulls), 'hull')}"


def _named(subject: SubjectChange) -> str:
    return f"{subject.id} ({subject.status})" if subject.is_built else subject.id


def _listed(names: Sequence[str]) -> str:
    more = len(names) - MOST_NAMES
    return ", ".join(names[:MOST_NAMES]) + (f" and {more} more" if more > 0 else "")
