"""Bring together what changed aboard all hulls, with the figures that tell most about it."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from checker.result.compare_aboard import AboardChanges, Unit
from checker.result.compare_places import bare
from checker.result.comparison import Difference, FigureChange
from checker.result.side import Figures
from checker.result.subject_change import Change

MOST_FIGURES = 2
LEAST_CHANGE = 0.01
"""A figure that changed by less than this share of its limit tells nothing about a change."""


def differences(changes: Iterable[Change]) -> tuple[Difference, ...]:
    """Return what changed aboard, each change once with all subjects where it is alike."""
    groups: dict[Unit, tuple[list[str], dict[tuple[str, str], FigureChange]]] = {}
    for change in changes:
        for unit in change.units:
            on, figures = groups.setdefault(unit, ([], {}))
            on.append(change.subject.id)
            assert change.aboard is not None
            for figure in _figures(unit, change, change.aboard):
                known = figures.get((figure.check, figure.part))
                if known is None or _headroom(figure.after) < _headroom(known.after):
                    figures[figure.check, figure.part] = figure
    return tuple(
        Difference(unit.kind, unit.about, unit.things, unit.facts, tuple(on), most_telling(figures.values()))
        for unit, (on, figures) in groups.items()
    )


def most_telling(figures: Iterable[FigureChange]) -> tuple[FigureChange, ...]:
    """Return the figures nearest their limit, or furthest past it: one of each quantity."""
    told: dict[str, FigureChange] = {}
    for figure in sorted(figures, key=lambda one: (_headroom(one.after), one.check, one.part)):
        told.setdefault(figure.after.quantity, figure)
    return tuple(told.values())[:MOST_FIGURES]


def _figures(unit: Unit, change: Change, aboard: AboardChanges) -> Iterator[FigureChange]:
    names = aboard.members(unit)
    for key, (before, after) in change.places.figures.items():
        if names.intersection((bare(key.part), bare(key.part).partition(" ")[0])) and _tells(before, after):
            yield FigureChange(key.check, bare(key.part), before, after)


def _tells(before: Figures, after: Figures) -> bool:
    old, new = before.headroom, after.headroom
    if old is None or new is None or abs(old - new) < LEAST_CHANGE:
        return False
    return new < 0 or old < 0 or not after.is_stepped


def _headroom(figures: Figures) -> float:
    headroom = figures.headroom
    return float("inf") if headroom is None else headroom
