"""Plant faults of the finished boat: what its sheet says was found and measured aboard."""

from __future__ import annotations

import tempfile
from collections.abc import Iterator
from functools import cache
from pathlib import Path

from checker.pipeline import check_fleet
from checker.reading.quantity import read_size
from checker.result.sheet import ALL_OFF, CHARGING, DROP, FITTED, FUNCTION, POLARITY, Step
from tests.campaign.places import length_m
from tests.campaign.planting import Design, Plant, Row, at, example, fault, merged, small
from tests.campaign.plants_fleet import dump, hull
from tests.small_yard import TODAY

RHO = 0.018
"""Copper at about 30 C, ohm mm2/m: near enough to plant by."""
SEEN_V = 0.09
"""A drop that a meter tells well."""
HEAD: Row = {
    "sheet": "FLEET-1", "date": "2026-11-20", "role": "quality assurance",
    "instruments": {"DMM-1": {"name": "multimeter", "calibrated_until": "2027-01-31"}},
}  # fmt: skip
FILE = "sheets/fleet-1.yaml"


def sheet(design: Design, *changes: Row, **fields: object) -> dict[str, str]:
    """Return the files of a hull and of its sheet, which says what the changes say."""
    return {**hull(design, **fields), FILE: dump(merged(HEAD, *changes))}


@cache
def _steps(name: str) -> tuple[Step, ...]:
    design = {"small": small, "example": example}[name]()
    with tempfile.TemporaryDirectory() as folder:
        for path, text in {**design.files, **hull(design)}.items():
            Path(folder, path).parent.mkdir(parents=True, exist_ok=True)
            Path(folder, path).write_text(text, encoding="utf-8")
        result = check_fleet(Path(folder), today=TODAY, only=["FLEET-1"], plans_tests=True)
    (subject,) = result.subjects
    assert subject.handover is not None
    return subject.handover.steps


def steps(design: Design, kind: str) -> list[Step]:
    """Return the steps of one kind of a boat's test."""
    return [step for step in _steps(design.name) if step.kind == kind]


def branch_drops(design: Design) -> Iterator[tuple[str, float, float]]:
    """Yield the branches whose drop is measured: id, current in A, and about the drop at it in V."""
    measured = {step.part: step.current_a for step in steps(design, DROP)}
    for name, row, _ in design.branches():
        amps = measured.get(name)
        if amps is not None:
            yield name, amps, RHO * 2 * length_m(design, row) / read_size(row["cable"]).area_mm2 * amps


def dropped(name: str, amps: float, volts: float) -> Row:
    return at("drop", name, {"current": f"{amps:.2f} A", "drop": f"{volts:.3f} V"})


@fault("COM-01")
def joint_that_was_made_badly(design: Design) -> Iterator[Plant]:
    """A drop of twice what the cable makes, and 0.1 V."""
    for name, amps, volts in branch_drops(design):
        files = sheet(design, dropped(name, amps, 2 * volts + 0.1))
        yield Plant({}, finds=[("measured-drop-above", name)], line="drop:", files=files,
                    follows=["measured-drop-limit"])  # fmt: skip


@fault("COM-01")
def drop_past_the_limit(design: Design) -> Iterator[Plant]:
    """A drop of 2 V at the circuit's current: no limit set allows it."""
    for name, amps, _ in branch_drops(design):
        files = sheet(design, dropped(name, amps, 2.0))
        yield Plant(
            {}, finds=[("measured-drop-limit", name), ("measured-drop-above", name)], line="drop: 2", files=files
        )


@fault("COM-02")
def second_way_back(design: Design) -> Iterator[Plant]:
    """A third of the drop that the cable must make."""
    for name, amps, volts in branch_drops(design):
        if volts > SEEN_V:
            yield Plant({}, finds=[("measured-drop-below", name)], line="drop:",
                        files=sheet(design, dropped(name, amps, volts / 3)))  # fmt: skip


@fault("COM-03")
def source_beside_the_shunt(design: Design) -> Iterator[Plant]:
    """The monitor shows a tenth of what the clamp shows."""
    for step in steps(design, CHARGING):
        files = sheet(design, at("charging", step.part, {"clamp": "20 A", "shunt": "2 A"}))
        yield Plant({}, finds=[("shunt-against-clamp", step.part)], line="shunt: 2 A", files=files)


@fault("COM-04")
def drain_that_nobody_declared(design: Design) -> Iterator[Plant]:
    """Five amperes flow with everything off."""
    for step in steps(design, ALL_OFF):
        if step.current_a is not None:
            files = sheet(design, at("all_off", {step.part: "5 A"}))
            yield Plant({}, finds=[("all-off-current", step.part)], line=f"{step.part}: 5 A", files=files)


@fault("COM-05")
def signed_without_its_test(design: Design) -> Iterator[Plant]:
    """A signed hull whose sheet answers one question."""
    for step in steps(design, POLARITY):
        files = sheet(design, at("polarity", {step.part: "ok"}), status="signed")
        yield Plant({}, finds=[("measurement-missing", "test sheet")], line="sheet: FLEET-1", files=files)


@fault("COM-06")
def measured_with_a_small_load(design: Design) -> Iterator[Plant]:
    """A third of the circuit's current flowed."""
    for name, amps, volts in branch_drops(design):
        files = sheet(design, dropped(name, amps / 3, volts / 3))
        yield Plant({}, finds=[("measured-at-too-little", name)], line="drop:", files=files)


@fault("COM-07")
def load_that_draws_more(design: Design) -> Iterator[Plant]:
    """Twice the current and an ampere flowed, and the drop with it."""
    for name, amps, volts in branch_drops(design):
        files = sheet(design, dropped(name, 2 * amps + 1, volts * (2 * amps + 1) / amps))
        yield Plant({}, finds=[("measured-load-current", name)], line="drop:", files=files)


@fault("COM-08", "FLT-01")
def other_device_fitted(design: Design) -> Iterator[Plant]:
    """Another rating than that of the schedule is read aboard."""
    for step in steps(design, FITTED):
        files = sheet(design, at("fitted", {step.part: "77 A"}))
        yield Plant({}, finds=[("fitted-device", step.part)], line=f"{step.part}: 77 A", files=files)


@fault("COM-09")
def fed_twice(design: Design) -> Iterator[Plant]:
    """A load stays live with its own breaker off."""
    for step in steps(design, FUNCTION):
        files = sheet(design, at("function", {step.part: "live"}))
        yield Plant({}, finds=[("live-when-off", step.part)], line=f"{step.part}: live", files=files)


@fault("COM-10")
def poles_swapped(design: Design) -> Iterator[Plant]:
    """Positive and negative are swapped at a load."""
    for step in steps(design, POLARITY):
        files = sheet(design, at("polarity", {step.part: "reversed"}))
        yield Plant({}, finds=[("measured-polarity", step.part)], line=f"{step.part}: reversed", files=files)


@fault("COM-11")
def positive_leaks_into_the_bonds(design: Design) -> Iterator[Plant]:
    """Twenty milliamperes flow into the bonding system, or it meets the negative twice."""
    yield Plant({}, finds=[("measured-leakage", "leakage")], line="leakage: 20 mA",
                files=sheet(design, {"leakage": "20 mA"}))  # fmt: skip
    yield Plant({}, finds=[("measured-leakage", "bonding")], line="bonding: several",
                files=sheet(design, {"bonding": "several"}))  # fmt: skip


@fault("COM-12")
def meter_out_of_its_calibration(design: Design) -> Iterator[Plant]:
    """The calibration of the meter ended before the day of the test, or no meter is named."""
    old = at("instruments", "DMM-1", {"calibrated_until": "2026-11-19"})
    yield Plant({}, finds=[("measuring-instrument", "DMM-1")], line="DMM-1:", files=sheet(design, old))
    none = {name: value for name, value in HEAD.items() if name != "instruments"}
    files = {**hull(design), FILE: dump(none)}
    yield Plant({}, finds=[("measuring-instrument", "test sheet")], line="sheet: FLEET-1", files=files)


@fault("COM-01")
def drop_far_from_its_sisters(design: Design) -> Iterator[Plant]:
    """A drop inside its tolerance, where three sister hulls have a fifth less than predicted."""
    for name, amps, volts in branch_drops(design):
        if 0.12 < volts < 0.18:
            files: dict[str, str] = {}
            for number in range(4):
                other = f"FLEET-{number + 1}"
                measured = dropped(name, amps, volts * (1.35 if number == 0 else 0.75))
                files[f"hulls/fleet-{number + 1}.yaml"] = hull(design, hull=other)["hulls/fleet-1.yaml"]
                files[f"sheets/fleet-{number + 1}.yaml"] = dump(merged(HEAD, {"sheet": other}, measured))
            yield Plant({}, finds=[("drop-far-from-sisters", name)], line="drop:", files=files, on="FLEET-1",
                        follows=["measured-drop-limit"])  # fmt: skip
