"""Say which figures of the tables a yard's own rules may change, which way is stricter, and what a change does.

A figure is named TABLE.FIGURE and given in the table's own unit, which its name ends in. Lists,
grids and true/false are not changed in this way: what they say is the document's.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from enum import Enum

from checker.limits.citation import Citation
from checker.limits.grounding_rule import grounding_rule
from checker.limits.limit_set import (
    TABLES,
    always_on_rule,
    bank_figures,
    least_selectivity_ratio,
    reader_of,
    start_s,
    surge_s,
    thin_margin_fraction,
)
from checker.limits.measuring_rule import measuring_rule
from checker.limits.rules import row_size
from checker.limits.table_file import HOUSE, CommonChanges, Table, TableError, common_table, read_table
from checker.limits.terminal_rule import joint_rule
from checker.reading.words import nearest, shown

COMMON = "common"
"""Where the yard writes figures of tables that belong to no set."""

LARGEST_RATIO = 10
"""A new value that is so many times the old one, or less than that part of it, is taken for one in another unit."""


class Stricter(Enum):
    """Say which way a figure is stricter."""

    LOWER = "lower"
    HIGHER = "higher"


_LOWER, _HIGHER = Stricter.LOWER, Stricter.HIGHER
_Ways = Mapping[str, Mapping[str, Stricter]]

_OF_SETS: _Ways = {
    "minimum_size": {
        "single_awg": _HIGHER, "single_mm2": _HIGHER, "sheathed_awg": _HIGHER, "sheathed_mm2": _HIGHER,
        "single_longer_than_in": _LOWER, "single_longer_than_mm": _LOWER,
        "max_out_of_sheath_in": _LOWER, "max_out_of_sheath_mm": _LOWER,
    },
    "exemptions": {"electronic_below_a": _LOWER, "pigtail_below_in": _LOWER, "pigtail_below_mm": _LOWER},
    "distance": {
        "open_in": _LOWER, "open_mm": _LOWER, "enclosed_in": _LOWER, "enclosed_mm": _LOWER,
        "battery_enclosed_in": _LOWER, "battery_enclosed_mm": _LOWER,
    },
    "device_rating": {"ampacity_percent": _LOWER, "next_standard_up_to_percent": _LOWER},
    "device_voltage": {"least_percent_of_nominal": _HIGHER},
    "self_limiting_source": {"largest_percent_of_output": _LOWER},
    "drop": {
        "critical_percent": _LOWER, "general_percent": _LOWER, "k_ohm_cmil_per_ft": _HIGHER,
        "resistivity_ohm_mm2_per_m": _HIGHER,
    },
    "insulation": {"engine_space_min_c": _HIGHER, "elsewhere_min_c": _HIGHER},
    "ignition": {"open_space_ft": _HIGHER, "bulkhead_tight_in": _HIGHER, "bulkhead_gap_in": _LOWER},
    "source_device": {"max_distance_mm": _LOWER, "max_distance_in": _LOWER},
    "supports": {
        "single_mm": _LOWER, "single_in": _LOWER, "sheathed_mm": _LOWER, "sheathed_in": _LOWER,
        "battery_mm": _LOWER, "battery_in": _LOWER,
    },
    "terminals": {"most_per_stud": _LOWER, "friction_most_a": _LOWER},
}  # fmt: skip
_OF_COMMON: _Ways = {
    "bank": {
        "most_uneven_percent": _LOWER, "strings_without_device": _LOWER, "least_days": _HIGHER,
        "usable_percent": _LOWER,
    },
    "always_on": {"heavy_return_a": _LOWER, "shield_a": _LOWER},
    "grounding": {
        "bond_current_a": _LOWER, "gauges_thinner": _LOWER, "stalled_hours": _LOWER, "heavy_motor_a": _LOWER,
    },
    "joints": {"same_ring_within_mm": _LOWER, "torque_above_a": _LOWER},
    "measuring": {
        "percent_of_predicted": _LOWER, "added_v": _LOWER, "heavy_above_a": _LOWER,
        "heavy_percent_of_predicted": _LOWER,
        "heavy_joint_mohm": _LOWER, "heavy_added_v": _LOWER, "least_percent_of_predicted": _HIGHER,
        "least_predicted_v": _LOWER, "least_percent_of_current": _HIGHER, "most_percent_of_current": _LOWER,
        "added_current_a": _LOWER, "least_circuit_a": _LOWER, "clamp_percent": _LOWER, "clamp_added_a": _LOWER,
        "all_off_added_a": _LOWER, "leakage_ma": _LOWER, "sisters_percent": _LOWER, "sisters_least_v": _LOWER,
        "sisters_fewest": _LOWER,
    },
    "selectivity": {"least_ratio": _HIGHER},
    "start": {"start_s": _HIGHER},
    "surge": {"surge_s": _LOWER},
    "thin_margin": {"thin_margin_percent": _HIGHER},
}  # fmt: skip
_COMMON_READERS: Mapping[str, Callable[[CommonChanges], object]] = {
    "bank": bank_figures,
    "always_on": always_on_rule,
    "grounding": grounding_rule,
    "joints": joint_rule,
    "measuring": measuring_rule,
    "selectivity": least_selectivity_ratio,
    "start": start_s,
    "surge": surge_s,
    "thin_margin": thin_margin_fraction,
}


class HouseFigureError(ValueError):
    """A change of a figure that cannot be made: what is wrong, what would mend it, and whether it names nothing."""

    def __init__(self, fault: str, remedy: str = "", *, is_unknown: bool = False) -> None:
        super().__init__(fault)
        self.fault, self.remedy, self.is_unknown = fault, remedy, is_unknown


@dataclass(frozen=True, slots=True)
class FigureChange:
    """Hold one figure that a yard's own rule changes: the old value with its citation, and the new one."""

    table: str
    figure: str
    old: object
    new: object
    is_loosened: bool
    citation: Citation


def changed_figure(
    owner: str, name: str, value: object, entered: Mapping[str, Table], before: Mapping[str, object]
) -> FigureChange:
    """Return what a new value of a figure changes.

    Args:
        owner: A limit set, or `COMMON`.
        name: TABLE.FIGURE.
        value: In the table's own unit.
        entered: The tables of the set that the yard has entered.
        before: What the yard has changed already, by TABLE.FIGURE: a table must make sense as a whole.

    Raises:
        HouseFigureError: If there is no such figure, or the value makes no sense in it.
    """
    ways = _OF_COMMON if owner == COMMON else _OF_SETS
    table_name, _, figure = name.partition(".")
    table = _table(owner, table_name, entered) if table_name in ways else None
    if table is None or figure not in ways[table_name] or not table.has(figure):
        raise _unknown(owner, name, entered)
    old = table.values[figure]
    together = {**_figures_of(table_name, before), figure: value}
    _expect_sense(owner, table, name, together)
    old_scale, new_scale = _scale(figure, old), _scale(figure, value)
    if new_scale == old_scale:
        raise HouseFigureError(f"{name} is {value} already", "take it out")
    if not old_scale / LARGEST_RATIO <= new_scale <= old_scale * LARGEST_RATIO:
        raise HouseFigureError(
            f"{name}: {value} is out of all proportion to {old}, which the table has",
            f"write it in the table's own unit, in which it is {old}",
        )
    is_stricter = new_scale > old_scale if ways[table_name][figure] is Stricter.HIGHER else new_scale < old_scale
    citation = dict(table.figure_citations(table.values)).get(figure, table.citation())
    return FigureChange(table_name, figure, old, value, not is_stricter, citation)


def _table(owner: str, name: str, entered: Mapping[str, Table]) -> Table | None:
    """Return a table as it stands without the yard's own rules; None where the set has none."""
    if owner == COMMON:
        return common_table(name)
    path = TABLES / owner / f"{name}.yaml"
    return read_table(path) if path.is_file() else entered.get(name)


def _unknown(owner: str, name: str, entered: Mapping[str, Table]) -> HouseFigureError:
    known = [
        f"{table}.{figure}"
        for table, ways in (_OF_COMMON if owner == COMMON else _OF_SETS).items()
        for figure in ways
        if (there := _table(owner, table, entered)) is not None and there.has(figure)
    ]
    meant = nearest(name, known)
    remedy = f"did you mean “{meant}”?" if meant else f"known here: {', '.join(known)}"
    whose = "the common tables" if owner == COMMON else owner
    fault = f"there is no figure “{shown(name)}” of {whose} that a yard may change"
    return HouseFigureError(fault, remedy, is_unknown=True)


def _figures_of(table: str, changes: Mapping[str, object]) -> dict[str, object]:
    return {name.partition(".")[2]: value for name, value in changes.items() if name.partition(".")[0] == table}


def _expect_sense(owner: str, table: Table, name: str, figures: Mapping[str, object]) -> None:
    """Refuse values that the table could not have."""
    table_name = name.partition(".")[0]
    try:
        if owner == COMMON:
            changes = tuple((table_name, figure, value) for figure, value in figures.items())
            _COMMON_READERS[table_name](CommonChanges(changes))
        else:
            read = reader_of(table_name)
            assert read is not None
            read(table.with_figures(figures, HOUSE))
    except TableError as error:
        raise HouseFigureError(f"{name}: {error.fault}") from error


def _scale(figure: str, value: object) -> float:
    """Return a value so that two can be compared: a gauge by its area."""
    if figure.endswith("_awg"):
        return row_size(str(value)).area_mm2
    assert isinstance(value, (int, float))
    return float(value)
