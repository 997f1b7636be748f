"""The tables of colours, zones and copper load as they are printed, and refuse what is malformed."""

from __future__ import annotations

import pytest

from checker.errors import LimitSetError
from checker.limits.colour_rule import colour_rule, read_colour_rule
from checker.limits.copper_rule import copper_rule, read_copper_rule
from checker.limits.limit_set import load_limit_set
from checker.limits.table_file import Table, common_table
from checker.limits.zone_rule import read_zone_rule, zone_rule
from checker.reading.quantity import read_size


def changed(name: str, **values: object) -> Table:
    """Return a shipped table with some of its values changed."""
    return Table(name, {**common_table(name).values, **values})


@pytest.mark.parametrize("spelt", ["green", "Green-Yellow", "green / yellow", "  green  with yellow   stripe "])
def test_spellings_of_green_are_one_colour(spelt: str) -> None:
    assert colour_rule().class_of(spelt) in colour_rule().bonding


def test_a_colour_without_a_row_is_a_class_of_its_own() -> None:
    assert colour_rule().class_of("Dark  Blue") == "dark blue"


@pytest.mark.parametrize(
    ("values", "told"),
    [
        ({"bonding": ["grass"]}, "grass is no class of colours"),
        ({"classes": {"green": ["green"], "black": ["black", "green"]}}, "one spelling stands in two classes"),
    ],
)
def test_colours_that_contradict_each_other_are_refused(values: dict[str, object], told: str) -> None:
    with pytest.raises(LimitSetError, match=told):
        read_colour_rule(changed("colours", **values))


def test_zones_are_those_of_the_table() -> None:
    assert zone_rule().immersion_digits == (7, 8)
    with pytest.raises(LimitSetError, match="immersion_digits"):
        read_zone_rule(changed("zones", immersion_digits="7"))


@pytest.mark.parametrize(
    ("size", "least_mm2"),
    [("16 AWG", 1.1837), ("6 AWG", 12.4336), ("4/0 AWG", 104.128), ("2.5 mm2", 2.1606), ("16 mm2", 14.249)],
)
def test_smallest_copper_by_hand(size: str, least_mm2: float) -> None:
    """2336, 24538 and 205500 circular mils times 0.000506707 mm2; 17.2414 over 7.98 and 1.21 ohm/km."""
    assert copper_rule().least_mm2(read_size(size)) == pytest.approx(least_mm2, rel=1e-4)


def test_copper_is_enough_for_the_largest_size_that_it_passes() -> None:
    assert copper_rule().least_mm2(read_size("3 AWG")) is None
    enough = copper_rule().largest_of(13.0, metric=False)
    assert enough is not None
    assert enough.text == "6 AWG"
    assert copper_rule().largest_of(0.1, metric=True) is None


@pytest.mark.parametrize(
    ("values", "told"),
    [
        ({"smallest_cmil": {"16": 2336, "14": 2000}}, "sizes must rise"),
        ({"smallest_cmil": {"x": 2336}}, "'x' is no size of a conductor"),
        ({"largest_ohm_per_km": {"x mm2": 2}}, "'x mm2' is no size of a conductor"),
    ],
)
def test_copper_table_out_of_order_is_refused(values: dict[str, object], told: str) -> None:
    with pytest.raises(LimitSetError, match=told):
        read_copper_rule(changed("copper_areas", **values, figures={}))


def test_isolation_by_a_bulkhead_is_that_of_the_law() -> None:
    """12 in; a third of the height; 1/4 in."""
    rule = load_limit_set("cfr33-183-i").ignition
    assert rule is not None
    assert (rule.bulkhead_tight_m, rule.bulkhead_tight_parts, rule.bulkhead_gap_m) == pytest.approx(
        (0.3048, 3, 0.00635)
    )
