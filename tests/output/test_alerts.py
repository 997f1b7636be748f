"""A fault is told once to other programs, on all its hulls, under an identity that holds."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path

from checker.finding import Verdict
from checker.output.alerts import MOST_NAMED, Alert, alerts
from checker.result.model import FleetResult
from tests.dory_yard import CLASS, DORY, HULL, checked, edited

DESIGN = "classes/dory-14/class.yaml"
THINNER = "changes: {C-1: {what: thinner, set: {conductors: {W2: {size: 8 AWG}}}}}\n"
OTHER = "changes: {C-1: {what: thinner, set: {conductors: {W2: {size: 8 AWG}, W3: {length: 0.5 m}}}}}\n"


def hull(number: int, more: str = "") -> str:
    return HULL.replace("DORY-1", f"DORY-{number}") + more


def fleet(**hulls: str) -> Mapping[str, str]:
    """Return the small yard with more hulls, by the names of their files."""
    return {**DORY, **{f"hulls/{name}.yaml": text for name, text in hulls.items()}}


def open_faults(folder: Path, files: Mapping[str, str]) -> list[Alert]:
    return alerts(checked(folder, files), Verdict.FINDING)


def the(found: list[Alert], check: str) -> Alert:
    (alert,) = [alert for alert in found if alert.first.check == check]
    return alert


def all_alerts(result: FleetResult) -> list[Alert]:
    return [alert for verdict in Verdict if verdict is not Verdict.PASSED for alert in alerts(result, verdict)]


def test_one_fault_of_a_class_is_one_alert_that_names_hulls_first_then_option_sets(tmp_path: Path) -> None:
    alert = the(open_faults(tmp_path, fleet(b=hull(10), c=hull(2))), "protection-distance")
    assert alert.hulls == ("DORY-1", "DORY-2", "DORY-10")
    assert alert.on == "DORY-1, DORY-2, DORY-10; dory-14, dory-14 + OPT-LAMP"
    assert str(alert.at) == f"{DESIGN}:17:37"
    assert alert.sentence.startswith("W2: ")


def test_of_many_hulls_the_first_are_named_and_the_rest_counted(tmp_path: Path) -> None:
    more = {f"h{number}": hull(number) for number in range(2, MOST_NAMED + 2)}
    alert = the(open_faults(tmp_path / "a", fleet(**more)), "protection-distance")
    assert alert.on.startswith("DORY-1, DORY-2, ")
    assert "DORY-8 and 1 more hull; dory-14" in alert.on
    more["h11"] = hull(11)
    assert "DORY-8 and 2 more hulls; " in the(open_faults(tmp_path / "b", fleet(**more)), "protection-distance").on


def test_the_same_fault_written_in_two_hulls_files_is_two_alerts(tmp_path: Path) -> None:
    found = open_faults(tmp_path, fleet(b=hull(2, THINNER), c=hull(3, OTHER)))
    mine = [alert for alert in found if alert.first.check == "protection-distance"]
    assert [(alert.hulls, alert.at.file) for alert in mine] == [
        (("DORY-1",), DESIGN),
        (("DORY-2",), "hulls/b.yaml"),
        (("DORY-3",), "hulls/c.yaml"),
    ]
    assert len({alert.identity for alert in mine}) == 3


def test_an_identity_does_not_change_with_lines_file_names_sisters_or_wording(tmp_path: Path) -> None:
    first = {alert.identity for alert in all_alerts(checked(tmp_path / "1", DORY))}
    assert len(first) > 20
    moved = {**DORY, DESIGN: "# A comment.\n\n" + CLASS}
    renamed = {name: text for name, text in moved.items() if name != DESIGN}
    renamed |= {"classes/dory-14/zzz.yaml": moved[DESIGN], "hulls/other.yaml": hull(2)}
    for number, files in enumerate((moved, renamed)):
        assert {alert.identity for alert in all_alerts(checked(tmp_path / f"n{number}", files))} == first


def test_an_identity_changes_with_what_made_the_finding(tmp_path: Path) -> None:
    before = the(open_faults(tmp_path / "a", DORY), "protection-distance")
    longer = edited(DESIGN, "to: POS, size: 6 AWG, length: 0.3 m", "to: POS, size: 6 AWG, length: 0.4 m")
    assert the(open_faults(tmp_path / "b", longer), "protection-distance").identity != before.identity


def test_two_classes_with_the_same_fault_are_two_alerts(tmp_path: Path) -> None:
    files = {**DORY, "classes/dory-15/class.yaml": CLASS}
    mine = [a for a in open_faults(tmp_path, files) if a.first.check == "protection-distance"]
    assert sorted(alert.class_id for alert in mine) == ["dory-14", "dory-15"]
    assert len({alert.identity for alert in mine}) == 2


def test_a_fault_accepted_on_one_hull_and_open_on_its_sister_is_two_alerts(tmp_path: Path) -> None:
    from checker.result.gather import fingerprint

    files = fleet(b=hull(2))
    mark = fingerprint(the(open_faults(tmp_path / "a", files), "protection-distance").first)
    waiver = (
        "waivers:\n  W1: {check: protection-distance, hull: DORY-2, part: W2, limit_set: voluntary-dc, "
        f'fingerprint: {mark}, reason: short, approved_by: lead, expires: "2028-01-01"}}\n'
    )
    result = checked(tmp_path / "b", {**files, "waivers.yaml": waiver})
    still_open = the(alerts(result, Verdict.FINDING), "protection-distance")
    accepted = the(alerts(result, Verdict.ACCEPTED), "protection-distance")
    assert (still_open.hulls, accepted.hulls) == (("DORY-1",), ("DORY-2",))
    assert still_open.identity != accepted.identity


def test_no_two_alerts_of_a_report_share_an_identity(tmp_path: Path) -> None:
    files = {**fleet(b=hull(2, THINNER), c=hull(3, OTHER), d="hull: 7\n"), "classes/dory-15/class.yaml": CLASS}
    found = all_alerts(checked(tmp_path, files))
    assert len({alert.identity for alert in found}) == len(found) > 40


def test_a_hull_that_was_not_studied_points_at_the_yards_own_file(tmp_path: Path) -> None:
    found = open_faults(tmp_path, edited("hulls/dory-1.yaml", "class: dory-14", "class: nothing"))
    assert str(the(found, "not-studied").at) == "yard.yaml:1:1"
