"""Apply JSON Merge Patch (RFC 7396) and keep where every value was typed.

Data are plain dicts, lists and scalars and are never changed in place: an applied patch
shares with its target whatever it does not touch. Positions are kept as layers, the youngest
first, so that applying a patch does not copy the positions of a whole class.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from checker.finding import NOWHERE, Path, Span

Places = Mapping[Path, tuple[Span, Span]]


@dataclass(frozen=True, slots=True)
class Patched:
    """Hold data and the layers of positions that tell where each value stands."""

    data: Any
    layers: tuple[Places, ...]

    def key_span(self, path: Path) -> Span:
        """Return where the field at a path is named, or its nearest parent that is written."""
        return self._places(path)[0]

    def span(self, path: Path) -> Span:
        """Return where the value at a path stands, or its nearest parent that is written."""
        return self._places(path)[1]

    def _places(self, path: Path) -> tuple[Span, Span]:
        while True:
            for layer in self.layers:
                if path in layer:
                    return layer[path]
            if not path:
                return (NOWHERE, NOWHERE)
            path = path[:-1]


def merge_patch(target: Any, patch: Any) -> Any:
    """Return the target with the patch applied, as RFC 7396 section 2 defines it."""
    if not isinstance(patch, dict):
        return patch
    merged = dict(target) if isinstance(target, dict) else {}
    for name, value in patch.items():
        if value is None:
            merged.pop(name, None)
        else:
            merged[name] = merge_patch(merged.get(name), value)
    return merged


def apply_patch(target: Patched, patch: Any, places: Places) -> Patched:
    """Apply a patch whose positions are given by paths counted from the patch's own top."""
    return Patched(merge_patch(target.data, patch), (places, *target.layers))


def without_effect(target: Any, patch: Any, path: Path = ()) -> Iterator[Path]:
    """Yield the paths of a patch that change nothing: equal values, removals of what is not there."""
    if not isinstance(patch, dict):
        return
    for name, value in patch.items():
        here = (*path, name)
        if not isinstance(target, dict) or name not in target:
            if value is None:
                yield here
        elif isinstance(value, dict) and isinstance(target[name], dict):
            if value:
                yield from without_effect(target[name], value, here)
            else:
                yield here
        elif value == target[name] and type(value) is type(target[name]):
            yield here


def places_under(places: Places, prefix: Path) -> dict[Path, tuple[Span, Span]]:
    """Return the positions below a prefix, by paths counted from there."""
    depth = len(prefix)
    return {path[depth:]: spans for path, spans in places.items() if path[:depth] == prefix}
