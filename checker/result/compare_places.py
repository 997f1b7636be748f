"""Compare the places that were looked at on two boats: lost ones, newly exempt ones, headroom and figures."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field

from checker.result.compare_findings import is_near
from checker.result.side import Figures, Place, PlaceKey, SideStudy

LEAST_LOSS = 0.005
"""Headroom that is lost in smaller steps than this, a share of the limit, is nothing to tell."""


@dataclass(frozen=True, slots=True)
class PlaceChanges:
    """Tell how the places of one boat changed.

    `lost` are looked at no more though the part is still aboard, `gone` went with their part;
    `exempt` had figures or a finding and now pass by a note; `thinner` lost headroom near the
    limit; `figures` are all that changed, by check, limit set, part and what is measured.
    """

    lost: tuple[PlaceKey, ...] = ()
    gone: tuple[PlaceKey, ...] = ()
    exempt: Mapping[PlaceKey, str] = field(default_factory=dict)
    thinner: Mapping[PlaceKey, tuple[Figures, Figures]] = field(default_factory=dict)
    figures: Mapping[PlaceKey, tuple[Figures, Figures]] = field(default_factory=dict)


def place_changes(
    before: SideStudy, after: SideStudy, gone_names: frozenset[str], dropped_sets: frozenset[str], thin_fraction: float
) -> PlaceChanges:
    """Return how the places of one boat changed.

    Args:
        before: The study on the base side.
        after: The study on the head side.
        gone_names: What was aboard before and is no more.
        dropped_sets: Limit sets that the boat is judged by no more; they are told by themselves.
        thin_fraction: Share of the limit below which headroom is thin.
    """
    found_after = {found.about for found in after.found}
    looked_at = {(key.check, key.limit_set, bare(key.part)) for key in after.places} | found_after
    notes = {(key.check, key.limit_set, key.part): p.note for key, p in after.places.items() if p.figures is None}
    lost: list[PlaceKey] = []
    gone: list[PlaceKey] = []
    exempt: dict[PlaceKey, str] = {}
    for key, place in before.places.items():
        if key in after.places or key.limit_set in dropped_sets:
            continue
        note = notes.get((key.check, key.limit_set, key.part), "")
        if place.figures is not None and note:
            exempt[key] = note
        elif (key.check, key.limit_set, bare(key.part)) not in looked_at:
            names = (bare(key.part), *bare(key.part).split(" "))
            (gone if gone_names.intersection(names) else lost).append(key)
    changed = {key: pair for key, pair in _figures(before, after) if not _is_same(*pair)}
    thinner = {key: pair for key, pair in changed.items() if _is_thinner(*pair, thin_fraction)}
    return PlaceChanges(
        tuple(lost), tuple(gone), exempt, {k: p for k, p in thinner.items() if k in after.places}, changed
    )


def bare(part: str) -> str:
    """Return the name of a part that is looked at more than once, without the number of the look."""
    return part.partition(" #")[0]


def _all_figures(study: SideStudy) -> dict[PlaceKey, Figures]:
    """Return all figures of a study: of what passed, and of the findings."""
    found = {key: place.figures for key, place in study.places.items() if place.figures is not None}
    for one in study.found:
        if one.figures is not None:
            key = PlaceKey(one.check, one.limit_set, one.part, Place(one.figures).looks_at)
            known = found.get(key)
            if known is None or (one.figures.headroom or 0.0) < (known.headroom or 0.0):
                found[key] = one.figures
    return found


def _figures(before: SideStudy, after: SideStudy) -> Iterator[tuple[PlaceKey, tuple[Figures, Figures]]]:
    now = _all_figures(after)
    for key, figures in _all_figures(before).items():
        if key in now:
            yield key, (figures, now[key])


def _is_same(before: Figures, after: Figures) -> bool:
    return is_near(before.value, after.value) and is_near(before.limit, after.limit)


def _is_thinner(before: Figures, after: Figures, thin_fraction: float) -> bool:
    """Tell whether a place lost headroom and now has little."""
    old, new = before.headroom, after.headroom
    if after.is_stepped or old is None or new is None:
        return False
    return 0 <= new < thin_fraction and new < old - LEAST_LOSS
