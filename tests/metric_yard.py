"""Hold the small yard judged by the metric set, with the invented sample of the tables that a yard enters."""

from __future__ import annotations

from pathlib import Path

from tests.small_yard import SOUND, Yard

SAMPLE = {
    f"limits/iso-13297/{path.name}": path.read_text(encoding="utf-8")
    for path in sorted((Path(__file__).parent / "limits" / "sample" / "limits" / "iso-13297").glob("*.yaml"))
}
BARE = SOUND.edit("[cfr33-183-i, voluntary-dc]", "[iso-13297]\nhouse: {gauge_sizes: next-smaller-mm2}")
"""Judged by the metric set, of which the yard has entered no table."""
METRIC = Yard({**BARE.files, **SAMPLE})
"""The same with every table entered."""


def without_table(name: str) -> Yard:
    """Return the yard without one of the tables it has entered."""
    return Yard({file: text for file, text in METRIC.files.items() if file != f"limits/iso-13297/{name}.yaml"})
