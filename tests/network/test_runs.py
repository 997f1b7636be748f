"""Hold how far overcurrent devices stand from what they protect against, by lengths added up by hand."""

from __future__ import annotations

import pytest

from checker.checks.gauge import ampacity
from checker.checks.protection import protection_distance, size_step, unprotected_conductor
from checker.network.cranking import cranking_conductors
from checker.network.runs import Run, unprotected_runs
from checker.network.studies import Studies
from tests.builders import (
    INCH_M,
    Piece,
    a_battery,
    a_boat,
    a_bus,
    a_conductor,
    a_fuse,
    a_link,
    a_load,
    a_switch,
    found_in,
    studied,
)

BUS = a_bus("BUS-N")


def runs_of(studies: Studies, exempt: frozenset[str] = frozenset(), allowed_a: float = 150.0) -> dict[str, Run]:
    """Return the runs of a boat whose conductors may all stand behind the same rating."""
    allowed = dict.fromkeys(studies.boat.conductors, allowed_a)
    return unprotected_runs(studies.network, studies.potentials[0], studies.exposures[0], allowed, exempt)


def inches(run: Run) -> float:
    """Return the length of a run in inches, to a tenth as a report prints it."""
    return round(run.length_m / INCH_M, 1)


def battery(name: str = "BAT") -> list[Piece]:
    """Return a battery with its negative on the reference."""
    return [a_battery(name), a_conductor(f"{name}-n", f"{name}.neg", "BUS-N")]


def consumer(name: str, feed: str) -> list[Piece]:
    """Return a load behind a feed, with its return."""
    return [
        a_load(name),
        a_conductor(f"{name}-out", feed, f"{name}.pos"),
        a_conductor(f"{name}-back", f"{name}.neg", "BUS-N"),
    ]


# --- one way


def test_a_fuse_on_the_battery_post_leaves_no_run() -> None:
    boat = studied(BUS, *battery(), a_fuse("F", 100.0, mount={"line": "BAT.pos"}), *consumer("L", "F.load"))
    assert runs_of(boat) == {}


def test_the_run_to_the_first_fuse_is_its_conductor() -> None:
    boat = studied(
        BUS,
        *battery(),
        a_fuse("F", 100.0),
        a_conductor("W", "BAT.pos", "F.line", length="5 in"),
        *consumer("L", "F.load"),
    )
    assert runs_of(boat) == {
        "W": Run("BAT.pos", ("W",), pytest.approx(0.127), "F", True, ("BAT.pos", "W", "F.line"))  # type: ignore[arg-type]
    }


def three_pieces() -> list[Piece]:
    """Return 4.2 in to a stud, 4.2 in to another, and 4.2 in to the fuse: each harmless, 12.6 in together."""
    return [
        BUS, *battery(), a_bus("S1"), a_bus("S2"), a_fuse("F", 100.0),
        a_conductor("W1", "BAT.pos", "S1", length="4.2 in"), a_conductor("W2", "S1", "S2", length="4.2 in"),
        a_conductor("W3", "S2", "F.line", length="4.2 in"), *consumer("L", "F.load"),
    ]  # fmt: skip


def test_three_harmless_pieces_add_up() -> None:
    runs = runs_of(studied(*three_pieces()))
    assert inches(runs["W3"]) == 12.6
    assert runs["W3"].conductors == ("W1", "W2", "W3")
    assert (runs["W3"].device, runs["W3"].path) == ("F", ("BAT.pos", "W1", "S1", "W2", "S2", "W3", "F.line"))


def test_three_harmless_pieces_are_one_finding_at_the_last_of_them() -> None:
    boat = a_boat(*three_pieces())
    assert found_in(boat, protection_distance, unprotected_conductor) == [("protection-distance", "W3")]


def test_pieces_of_together_7_in_pass() -> None:
    pieces = [p for p in three_pieces() if p.id not in ("W1", "W2", "W3")]
    pieces += [
        a_conductor("W1", "BAT.pos", "S1", length="2 in"), a_conductor("W2", "S1", "S2", length="2 in"),
        a_conductor("W3", "S2", "F.line", length="3 in"),
    ]  # fmt: skip
    assert found_in(a_boat(*pieces), protection_distance, unprotected_conductor) == []


def test_switches_and_mounts_on_the_way_have_no_length() -> None:
    boat = studied(
        BUS, *battery(), a_switch("SW"), a_fuse("F", 100.0, mount={"line": "STUD"}), a_bus("STUD"),
        a_conductor("W1", "BAT.pos", "SW.in", length="3 in"), a_conductor("W2", "SW.out", "STUD", length="2 in"),
        *consumer("L", "F.load"),
    )  # fmt: skip
    run = runs_of(boat)["W2"]
    assert (inches(run), run.conductors, run.device) == (5.0, ("W1", "W2"), "F")


def test_a_run_without_any_device_ends_at_the_load() -> None:
    boat = studied(BUS, *battery(), *consumer("L", "BAT.pos"))
    assert {name: (run.conductors, run.device) for name, run in runs_of(boat).items()} == {"L-out": (("L-out",), "")}
    assert found_in(a_boat(BUS, *battery(), *consumer("L", "BAT.pos")), protection_distance, unprotected_conductor) == [
        ("unprotected-conductor", "L-out")
    ]


# --- several ways


def test_of_two_strings_of_unequal_length_the_longer_one_counts() -> None:
    boat = studied(
        BUS, *battery("A"), *battery("B"), a_bus("STUD"), a_fuse("F", 100.0),
        a_link("A1", "A.pos", "STUD", length="3 in"), a_link("B1", "B.pos", "STUD", length="11 in"),
        a_conductor("W", "STUD", "F.line", length="6 in"), *consumer("L", "F.load"),
    )  # fmt: skip
    run = runs_of(boat)["W"]
    assert (run.origin, run.conductors, inches(run)) == ("B.pos", ("B1", "W"), 17.0)


def taps() -> list[Piece]:
    """Return a stud 5 in from the battery with three taps: 1 in to a fuse, 4 in to another, and one without."""
    return [
        BUS, *battery(), a_bus("STUD"), a_conductor("W", "BAT.pos", "STUD", length="5 in"),
        a_fuse("F1", 100.0), a_fuse("F2", 50.0), a_conductor("T1", "STUD", "F1.line", length="1 in"),
        a_conductor("T2", "STUD", "F2.line", length="4 in"), *consumer("L1", "F1.load"), *consumer("L2", "F2.load"),
        *consumer("L3", "STUD"),
    ]  # fmt: skip


def test_every_tap_of_a_stud_is_measured_from_the_battery() -> None:
    runs = runs_of(studied(*taps()))
    assert {name: (run.conductors, inches(run), run.device) for name, run in runs.items()} == {
        "W": (("W",), 5.0, ""),
        "T1": (("W", "T1"), 6.0, "F1"),
        "T2": (("W", "T2"), 9.0, "F2"),
        "L3-out": (("W", "L3-out"), round((5 * INCH_M + 1.0) / INCH_M, 1), ""),
    }


def test_each_bad_tap_of_a_stud_is_one_finding_and_the_shared_piece_is_none() -> None:
    assert found_in(a_boat(*taps()), protection_distance, unprotected_conductor) == [
        ("protection-distance", "T2"),
        ("unprotected-conductor", "L3-out"),
    ]


def test_two_cables_side_by_side_up_to_one_fuse_are_each_measured_to_the_fuse() -> None:
    pieces = [
        BUS, *battery(), a_fuse("F", 100.0), a_conductor("P1", "BAT.pos", "F.line", length="6 in"),
        a_conductor("P2", "BAT.pos", "F.line", length="6.5 in"), *consumer("L", "F.load"),
    ]  # fmt: skip
    runs = runs_of(studied(*pieces))
    assert {name: (run.conductors, inches(run), run.device) for name, run in runs.items()} == {
        "P1": (("P1",), 6.0, "F"),
        "P2": (("P2",), 6.5, "F"),
    }
    assert found_in(a_boat(*pieces), protection_distance, unprotected_conductor) == []


def ring(*lengths: str) -> list[Piece]:
    """Return a ring from the battery over studs B and C back to the battery, with a fuse on C."""
    ends = [("BAT.pos", "B"), ("B", "C"), ("C", "BAT.pos")]
    return [
        BUS, *battery(), a_bus("B"), a_bus("C"), a_fuse("F", 100.0, mount={"line": "C"}), *consumer("L", "F.load"),
        *(a_conductor(f"R{n}", *pair, length=text) for n, (pair, text) in enumerate(zip(ends, lengths, strict=True))),
    ]  # fmt: skip


def test_a_short_ring_ahead_of_a_fuse_is_sound() -> None:
    assert found_in(a_boat(*ring("2 in", "2 in", "2 in")), protection_distance, unprotected_conductor) == []


def test_the_long_side_of_a_ring_ahead_of_a_fuse_is_found() -> None:
    found = found_in(a_boat(*ring("20 in", "20 in", "2 in")), protection_distance, unprotected_conductor)
    assert found
    assert {part for _, part in found} <= {"R0", "R1"}


def test_a_ring_fed_from_nowhere_has_no_run() -> None:
    pieces = [p for p in ring("2 in", "2 in", "2 in") if p.id != "BAT"]
    pieces = [p for p in pieces if p.id not in ("R0", "R2", "BAT-n")]
    assert runs_of(studied(*pieces, a_conductor("R3", "C", "B"))) == {}


# --- steps down in size


def test_behind_a_fuse_a_run_starts_where_the_conductor_becomes_too_thin() -> None:
    pieces = [
        BUS, *battery(), a_fuse("F", 100.0, mount={"line": "BAT.pos"}), a_bus("STUD"), a_fuse("G", 10.0),
        a_conductor("thick", "F.load", "STUD", size="2 AWG", length="3 m"),
        a_conductor("thin", "STUD", "G.line", size="14 AWG", length="6 in"), *consumer("L", "G.load"),
    ]  # fmt: skip
    studies = studied(*pieces)
    allowed = {"thick": 300.0, "thin": 50.0, "L-out": 50.0}
    runs = unprotected_runs(studies.network, studies.potentials[0], studies.exposures[0], allowed, ())
    assert {n: (r.origin, r.conductors, inches(r), r.device, r.is_from_battery) for n, r in runs.items()} == {
        "thin": ("STUD", ("thin",), 6.0, "G", False)
    }
    assert found_in(a_boat(*pieces), protection_distance, unprotected_conductor, size_step) == []


def test_two_thin_pieces_in_a_row_behind_a_step_add_up() -> None:
    pieces = [
        BUS, *battery(), a_fuse("F", 100.0, mount={"line": "BAT.pos"}), a_bus("STUD"), a_bus("MID"), a_fuse("G", 10.0),
        a_conductor("thick", "F.load", "STUD", size="2 AWG", length="3 m"),
        a_conductor("thin1", "STUD", "MID", size="14 AWG", length="4 in"),
        a_conductor("thin2", "MID", "G.line", size="14 AWG", length="4 in"), *consumer("L", "G.load"),
    ]  # fmt: skip
    assert found_in(a_boat(*pieces), protection_distance, unprotected_conductor, size_step) == [("size-step", "thin2")]


def test_a_ring_of_thin_conductors_behind_one_fuse_has_a_run_for_each() -> None:
    studies = studied(
        BUS, *battery(), a_fuse("F", 100.0, mount={"line": "BAT.pos"}), a_bus("S"), a_bus("B"), a_bus("C"),
        a_conductor("thick", "F.load", "S", size="2 AWG"), a_conductor("R1", "S", "B", size="14 AWG"),
        a_conductor("R2", "B", "C", size="14 AWG"), a_conductor("R3", "C", "S", size="14 AWG"),
        a_load("L"), a_conductor("out", "C", "L.pos", size="2 AWG"), a_conductor("back", "L.neg", "BUS-N"),
    )  # fmt: skip
    allowed = {"thick": 300.0, "R1": 50.0, "R2": 50.0, "R3": 50.0, "out": 300.0}
    runs = unprotected_runs(studies.network, studies.potentials[0], studies.exposures[0], allowed, ())
    assert set(runs) == {"R1", "R2", "R3"}
    assert {run.device for run in runs.values()} == {""}


# --- cranking circuits


def cranking() -> list[Piece]:
    """Return a start battery, its switch and motor, and a fuse 5 in from the switch and one 6 in from the motor."""
    return [
        BUS, *battery(), a_switch("SW"), a_load("MOTOR", 200.0, motor=True), a_fuse("F1", 20.0), a_fuse("F2", 30.0),
        a_conductor("C1", "BAT.pos", "SW.in", size="2/0 AWG", length="2 m", role="cranking"),
        a_conductor("C2", "SW.out", "MOTOR.pos", size="2/0 AWG", length="3 m", role="cranking"),
        a_conductor("C3", "MOTOR.neg", "BAT.neg", size="2/0 AWG", length="3 m", role="cranking"),
        a_conductor("T1", "SW.out", "F1.line", length="5 in"), a_conductor("T2", "MOTOR.pos", "F2.line", length="6 in"),
        *consumer("L1", "F1.load"), *consumer("L2", "F2.load"),
    ]  # fmt: skip


def test_what_leaves_a_cranking_conductor_is_measured_from_there() -> None:
    boat = studied(*cranking())
    runs = runs_of(boat, exempt=frozenset(("C1", "C2")))
    assert {n: (r.origin, r.conductors, inches(r), r.device, r.is_from_battery) for n, r in runs.items()} == {
        "T1": ("SW.in", ("T1",), 5.0, "F1", False),
        "T2": ("MOTOR.pos", ("T2",), 6.0, "F2", False),
    }
    assert found_in(a_boat(*cranking()), protection_distance, unprotected_conductor) == []


def test_without_the_role_the_same_taps_are_measured_from_the_battery() -> None:
    plain = [p for p in cranking() if p.id not in ("C1", "C2")]
    plain += [
        a_conductor("C1", "BAT.pos", "SW.in", size="2/0 AWG", length="2 m"),
        a_conductor("C2", "SW.out", "MOTOR.pos", size="2/0 AWG", length="3 m"),
    ]  # fmt: skip
    assert found_in(a_boat(*plain), protection_distance, unprotected_conductor) == [
        ("protection-distance", "T1"),
        ("protection-distance", "T2"),
    ]


def test_a_tap_longer_than_7_in_from_a_cranking_conductor_is_found() -> None:
    longer = [p for p in cranking() if p.id != "T2"] + [a_conductor("T2", "MOTOR.pos", "F2.line", length="7.2 in")]
    assert found_in(a_boat(*longer), protection_distance, unprotected_conductor) == [("protection-distance", "T2")]


def test_the_cranking_role_holds_only_between_a_battery_and_a_motor() -> None:
    boat = studied(*cranking(), a_conductor("C4", "SW.out", "F1.line", size="2/0 AWG", role="cranking"))
    assert cranking_conductors(boat.boat, boat.network) == {"C1", "C2", "C3"}


def test_a_bypass_of_cranking_conductors_around_the_motor_keeps_the_role() -> None:
    boat = studied(*cranking(), a_conductor("C4", "SW.out", "MOTOR.pos", size="2/0 AWG", role="cranking"))
    assert cranking_conductors(boat.boat, boat.network) == {"C1", "C2", "C3", "C4"}


def test_what_hangs_between_two_places_of_a_cranking_circuit_is_measured_from_the_nearer_conductor() -> None:
    pieces = [
        *cranking(), a_bus("STUD"), a_fuse("F3", 10.0), a_conductor("X", "MOTOR.pos", "STUD", length="1 in"),
        a_conductor("Y", "SW.out", "STUD", length="1.5 in"), a_conductor("T3", "STUD", "F3.line", length="2 in"),
        *consumer("L3", "F3.load"),
    ]  # fmt: skip
    # Both X and Y start at a cranking conductor; the longer way to the fuse counts.
    run = runs_of(studied(*pieces), exempt=frozenset(("C1", "C2")))["T3"]
    assert (run.conductors, inches(run), run.device) == (("Y", "T3"), 3.5, "F3")


def test_a_link_between_two_batteries_is_unprotected_where_only_one_end_meets_a_fuse() -> None:
    # The fuse on B's post serves a load; it opens nothing for a fault in the link, which B feeds as well.
    pieces = [
        BUS, *battery("A"), *battery("B"), a_fuse("FB", 100.0, mount={"line": "B.pos"}), *consumer("L", "FB.load"),
        a_conductor("link", "A.pos", "B.pos", length="4 in"),
    ]  # fmt: skip
    assert found_in(a_boat(*pieces), protection_distance, unprotected_conductor) == [("unprotected-conductor", "link")]


# --- limits at the edge


@pytest.mark.parametrize(
    ("text", "enclosed", "found"),
    [
        ("6.9 in", False, []), ("7 in", False, []), ("0.1778 m", False, []), ("7.1 in", False, ["W"]),
        ("39.9 in", True, []), ("40 in", True, []), ("1.016 m", True, []), ("40.1 in", True, ["W"]),
    ],
)  # fmt: skip
def test_a_run_behind_a_step_is_held_to_7_in_open_and_40_in_enclosed(
    text: str, enclosed: bool, found: list[str]
) -> None:
    pieces = [
        BUS, *battery(), a_fuse("F", 200.0, mount={"line": "BAT.pos"}), a_bus("STUD"), a_fuse("G", 10.0),
        a_conductor("thick", "F.load", "STUD", size="2/0 AWG", length="3 m"),
        a_conductor("W", "STUD", "G.line", size="14 AWG", length=text, enclosed=enclosed, place_reason="no room nearer"),
        *consumer("L", "G.load"),
    ]  # fmt: skip
    assert [
        part for _, part in found_in(a_boat(*pieces), protection_distance, unprotected_conductor, size_step)
    ] == found


def test_the_lengths_here_are_no_cause_of_another_finding() -> None:
    assert found_in(a_boat(*three_pieces()), ampacity) == []
