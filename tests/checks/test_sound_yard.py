"""The small yard is sound: nothing is found, everything was looked at, and each check passes somewhere."""

from __future__ import annotations

from collections import Counter

from checker.checks.catalogue import CHECKS
from checker.finding import Verdict
from tests.small_yard import (
    BOTH,
    LAW,
    PRACTICE,
    SOUND,
    check_yard,
    found,
    not_assessed,
    outcomes,
    passed,
    the_hull,
)

TOLD_BY_DEVICE_RATING = {"size-step", "double-feed"}
"""They single out two causes of one measure; where it holds, device-rating tells the pass."""
LAW_ALONE = {"battery-fuel", "ignition-protection", "isolation-claim"}
PRACTICE_ALONE = {"insulation-rating", "solved-drop", "stud-terminals", "voltage-drop", "voltage-drop-from-bank"}
NOTHING_TO_JUDGE = {
    "conductor-area", "gas-locker", "hot-device",
    "array-voltage", "bank-links", "charge-stop", "converter-enable", "diode-sense", "diode-way", "even-shares",
    "lost-return", "pump-stays-live", "radio-device", "source-device", "splice-place", "support-spacing",
    "unlike-banks",
    "case-ground", "common-ground", "grounding-size", "heavy-motor",
}  # fmt: skip
"""The small yard has no batteries in parallel, no returns beside each other, no diode and no bilge pump; no array, no
lithium, no converter, no banks that are joined; no radio and no splice; and neither set has a rule for `source-device`
or `support-spacing`.
No cooking gas, no fuse in the engine space, no cable that states its copper. No grounded case, one engine, and no heavy
motor but the starter."""


def test_nothing_is_found_and_nothing_is_left_unassessed() -> None:
    assert found(SOUND) == []
    assert not_assessed(SOUND) == []
    assert check_yard(SOUND).is_clean


def test_every_check_passes_at_least_once_under_every_set_that_has_a_rule() -> None:
    seen = {(check, limit_set) for check, _, limit_set in passed(SOUND)}
    expected: set[tuple[str, str]] = set()
    for check in CHECKS:
        if check.id in TOLD_BY_DEVICE_RATING | NOTHING_TO_JUDGE:
            continue
        sets = {LAW} if check.id in LAW_ALONE else {PRACTICE} if check.id in PRACTICE_ALONE else {LAW, PRACTICE}
        expected |= {(check.id, one) for one in (sets if check.is_per_set else {""})}
    assert seen == expected


def test_every_conductor_is_looked_at_by_the_checks_of_conductors() -> None:
    """31 conductors: 5 main, 2 feeder, 4 cranking, 1 alternator, 3 charger, 5 thin, 10 of branches, 1 bond."""
    parts: dict[str, set[str]] = {}
    for check, part, _ in passed(SOUND):
        parts.setdefault(check, set()).add(part)
    trunk = {"M1", "M2", "M3", "M4", "M5", "D1", "D2", "S1", "S2", "S3", "S4", "A1", "C1", "C2", "C3"}
    thin = {"V1", "V2", "V3", "Q1", "Q2"}
    outs = {f"{name}.out" for name in ("PLOTTER", "LIGHTS", "PUMP", "BOW-LIGHT", "SENSOR")}
    backs = {name.replace(".out", ".back") for name in outs}
    carrying = trunk | thin | outs | backs
    assert parts["ampacity"] == carrying
    for check in ("minimum-size", "conductor-material", "one-way-length", "insulation-rating"):
        assert parts[check] == carrying | {"B1"}
    returns = {"M4", "M5", "D2", "S3", "S4", "C2", "V3"} | backs
    assert parts["unprotected-conductor"] == carrying - returns
    assert parts["return-protection"] == returns - {"S3", "S4"}  # cranking: exempt


def test_order_of_the_file_s_entries_changes_no_verdict() -> None:
    text = next(text for name, text in SOUND.files.items() if name.startswith("classes"))
    feed = text[text.index("  FEED:\n") : text.index("  CRANK:\n")]
    moved = SOUND.edit(feed, "").edit("\nbonds:\n", f"{feed}\nbonds:\n")

    def verdicts(yard: object) -> Counter[tuple[str, str, str]]:
        assert isinstance(yard, type(SOUND))
        return Counter((o.check, o.part, o.verdict.value) for o in the_hull(check_yard(yard)).outcomes)

    assert verdicts(moved) == verdicts(SOUND)


def test_no_finding_is_ever_waived_in_the_sound_yard() -> None:
    assert outcomes(SOUND, Verdict.ACCEPTED) == []
    assert BOTH not in {limit_set for _, _, limit_set in passed(SOUND)}
