"""Load the figures for judging what was measured aboard."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

from checker.limits.table_file import AS_SHIPPED, CommonChanges, house_table

_FIGURES = (
    "percent_of_predicted", "added_v", "heavy_above_a", "heavy_percent_of_predicted", "heavy_joint_mohm",
    "heavy_added_v", "least_percent_of_predicted", "least_predicted_v", "least_percent_of_current",
    "most_percent_of_current", "added_current_a", "least_circuit_a", "clamp_percent", "clamp_added_a",
    "all_off_added_a", "leakage_ma", "sisters_percent", "sisters_least_v", "sisters_fewest",
)  # fmt: skip


@dataclass(frozen=True, slots=True, kw_only=True)
class MeasuringRule:
    """Say how far measured figures may be from predicted ones; factors are shares of 1.

    Below `least_predicted_v` nothing is too good: a meter's last digit would decide. Drops are
    measured on circuits from `least_circuit_a` on.
    """

    drop_factor: float
    added_v: float
    heavy_above_a: float
    heavy_drop_factor: float
    heavy_joint_ohm: float
    heavy_added_v: float
    least_drop_factor: float
    least_predicted_v: float
    least_current_factor: float
    most_current_factor: float
    added_current_a: float
    least_circuit_a: float
    clamp_factor: float
    clamp_added_a: float
    all_off_added_a: float
    leakage_a: float
    sisters_factor: float
    sisters_least_v: float
    sisters_fewest: int

    def most_drop_v(self, predicted_v: float, current_a: float, joints: int) -> float:
        """Return the largest drop that sound joints explain, for a predicted one at the same current."""
        if current_a <= self.heavy_above_a:
            return predicted_v * self.drop_factor + self.added_v
        joint_v = self.heavy_joint_ohm * joints * current_a
        return predicted_v * self.heavy_drop_factor + joint_v + self.heavy_added_v

    def least_drop_v(self, predicted_v: float) -> float:
        """Return the smallest drop that the cable of the schedule can have; 0 where a meter could not tell."""
        return predicted_v * self.least_drop_factor if predicted_v >= self.least_predicted_v else 0.0


@cache
def measuring_rule(changes: CommonChanges = AS_SHIPPED) -> MeasuringRule:
    """Return the rule."""
    table = house_table("measuring", changes)
    table.expect(("citation", *_FIGURES))
    table.citation()
    figure = table.number
    return MeasuringRule(
        drop_factor=figure("percent_of_predicted") / 100,
        added_v=figure("added_v"),
        heavy_above_a=figure("heavy_above_a"),
        heavy_drop_factor=figure("heavy_percent_of_predicted") / 100,
        heavy_joint_ohm=figure("heavy_joint_mohm") / 1000,
        heavy_added_v=figure("heavy_added_v"),
        least_drop_factor=figure("least_percent_of_predicted") / 100,
        least_predicted_v=figure("least_predicted_v"),
        least_current_factor=figure("least_percent_of_current") / 100,
        most_current_factor=figure("most_percent_of_current") / 100,
        added_current_a=figure("added_current_a"),
        least_circuit_a=figure("least_circuit_a"),
        clamp_factor=figure("clamp_percent") / 100,
        clamp_added_a=figure("clamp_added_a"),
        all_off_added_a=figure("all_off_added_a"),
        leakage_a=figure("leakage_ma") / 1000,
        sisters_factor=figure("sisters_percent") / 100,
        sisters_least_v=figure("sisters_least_v"),
        sisters_fewest=table.count("sisters_fewest"),
    )
