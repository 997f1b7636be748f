"""Which strings of a bank have no device of their own, over the ways a yard fuses them."""

from __future__ import annotations

import pytest

from checker.network.bank import bare_strings
from tests.builders import Piece, a_battery, a_bus, a_conductor, a_fuse, a_load, potentials_of, studied


@pytest.mark.parametrize(
    ("strings", "fused", "bare"),
    [
        ("AB", "AB", ()),
        ("AB", "A", ("B",)),
        ("AB", "B", ("A",)),
        ("AB", "", ("A", "B")),
        ("ABC", "ABC", ()),
        ("ABC", "AB", ("C",)),
        ("ABC", "A", ("B", "C")),
    ],
)
@pytest.mark.parametrize("monitor", [False, True])
def test_string_is_bare_where_no_device_parts_it_from_the_others(
    strings: str, fused: str, bare: tuple[str, ...], monitor: bool
) -> None:
    """A small fuse for a monitor on a battery's post protects no string."""
    parts: list[Piece] = [a_bus("BUS-P"), a_bus("BUS-N"), a_fuse("F-MAIN", 100.0), a_load("LAMP")]
    parts += [a_conductor("M1", "BUS-P", "F-MAIN.line"), a_conductor("M2", "F-MAIN.load", "LAMP.pos")]
    parts += [a_conductor("M3", "LAMP.neg", "BUS-N")]
    for name in strings:
        parts += [a_battery(name), a_conductor(f"G{name}", f"{name}.neg", "BUS-N")]
        if name in fused:
            parts += [a_fuse(f"F-{name}", 100.0), a_conductor(f"L{name}", f"{name}.pos", f"F-{name}.line")]
            parts += [a_conductor(f"P{name}", f"F-{name}.load", "BUS-P")]
        else:
            parts += [a_conductor(f"L{name}", f"{name}.pos", "BUS-P")]
    if monitor:
        parts += [a_fuse("F-MON", 1.0), a_load("MON"), a_conductor("X1", f"{strings[0]}.pos", "F-MON.line")]
        parts += [a_conductor("X2", "F-MON.load", "MON.pos"), a_conductor("X3", "MON.neg", "BUS-N")]
    studies = studied(*parts)
    assert bare_strings(studies.network, potentials_of(studies), [(name,) for name in strings]) == bare
