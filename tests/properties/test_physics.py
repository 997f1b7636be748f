"""State what holds for every boat, by comparing two boats that differ in one thing.

Held against the physics first: shorter is not always safer. A shorter conductor raises the
fault current, and with it what a device must interrupt; a thicker one does the same, and may
no longer be protected where it meets a thinner one. Nothing of that kind is asserted here.
"""

from __future__ import annotations

import datetime
import math
import re
import shutil
from collections import Counter
from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
import yaml
from hypothesis import given, settings
from hypothesis import strategies as st

from checker.boat.hull import Boat, Zone
from checker.checks.bearing import Bearings
from checker.checks.check import Case, House
from checker.checks.drops import circuit_drop
from checker.checks.protection import (
    device_rating,
    double_feed,
    protection_distance,
    size_step,
    unprotected_conductor,
)
from checker.finding import Outcome, Verdict
from checker.limits.limit_set import load_limit_set
from checker.network.exposure import flow_study
from checker.network.graph import Network
from checker.network.studies import Studies
from checker.pipeline import check_fleet
from checker.reading.quantity import Dimension, read_number, read_size
from tests.builders import (
    SINGLE,
    Piece,
    a_battery,
    a_boat,
    a_bus,
    a_conductor,
    a_fuse,
    a_load,
    a_network,
    found_in,
    outcomes_of,
    sound_pieces,
)

INF = math.inf
FLEET = Path(__file__).resolve().parents[2] / "fleet_example"
TODAY = datetime.date(2026, 12, 1)
GAUGES = ["18", "16", "14", "12", "10", "8", "6", "4", "2", "1", "1/0", "2/0", "3/0", "4/0"]  # thin to thick
METRIC = ["0.75", "1", "1.5", "2.5", "4", "6", "10", "16", "25", "35", "50", "70", "95", "120"]
LENGTHS = st.integers(1, 6000)  # tenths of an inch, up to 50 ft


def changed(boat: Boat, name: str, **facts: Any) -> Boat:
    """Return a boat with one conductor otherwise."""
    return replace(boat, conductors={**boat.conductors, name: replace(boat.conductors[name], **facts)})


def verdicts(outcomes: Sequence[Outcome]) -> list[tuple[str, str, str, str]]:
    """Return what was decided, without figures and places."""
    return sorted((o.verdict.value, o.check, o.part, o.limit_set) for o in outcomes)


def drop_of(boat: Boat, circuit: str, *, from_bank: bool) -> float:
    """Return the drop of a circuit in V."""
    limits = load_limit_set("voluntary-dc")
    case = Case(Studies(boat), limits, (limits,), House())
    found = circuit_drop(case, boat.circuits[circuit], from_bank=from_bank)
    assert found is not None
    return found.volts


# --- thicker copper


@settings(max_examples=60, deadline=None)
@given(
    st.sampled_from(GAUGES),
    st.sampled_from(GAUGES),
    st.sampled_from(["W2", "W4", "pump-out", "pump-back"]),
    st.booleans(),
)
def test_thicker_copper_never_drops_more_in_any_circuit(one: str, other: str, name: str, from_bank: bool) -> None:
    thin, thick = sorted((one, other), key=GAUGES.index)
    boat = a_boat(*sound_pieces())
    boats = [changed(boat, name, size=read_size(f"{gauge} AWG")) for gauge in (thin, thick)]
    for circuit in boat.circuits:
        drops = [drop_of(b, circuit, from_bank=from_bank) for b in boats]
        assert drops[1] <= drops[0] * (1 + 1e-12)


@pytest.mark.parametrize("set_id", ["cfr33-183-i", "voluntary-dc"])
@pytest.mark.parametrize("insulation_c", [60.0, 75.0, 90.0, 105.0, 125.0])
@pytest.mark.parametrize("zone", ["DRY", "HOT"])
@pytest.mark.parametrize("company", [1, 3, 7, 30])
def test_thicker_copper_never_bears_less(set_id: str, insulation_c: float, zone: str, company: int) -> None:
    boat = a_boat(a_bus("BUS-N"), Zone(id="HOT", name="engine", ambient_c=50.0, is_engine_space=True))
    bearings = Bearings(boat, load_limit_set(set_id), next_smaller=True)
    cable = replace(SINGLE, insulation_c=insulation_c)
    for unit, names in (("AWG", GAUGES), ("mm2", METRIC)):
        borne = [
            bearings.of(
                a_conductor(
                    f"W{name}", "BUS-N", "BUS-N", size=f"{name} {unit}", cable=cable, zones=(zone,), company=company
                )
            )
            for name in names
        ]
        amps = [b.ampacity_a for b in borne if b is not None]
        assert len(amps) >= 10
        assert amps == sorted(amps)
        allowed = [bearings.limits.device_rating.largest_allowed_a(a) for a in amps]
        assert allowed == sorted(allowed)


@pytest.mark.parametrize("set_id", ["cfr33-183-i", "voluntary-dc"])
@pytest.mark.parametrize("zone", ["DRY", "HOT"])
def test_better_insulation_never_bears_less(set_id: str, zone: str) -> None:
    boat = a_boat(a_bus("BUS-N"), Zone(id="HOT", name="engine", ambient_c=50.0, is_engine_space=True))
    bearings = Bearings(boat, load_limit_set(set_id), next_smaller=True)
    for gauge in GAUGES:
        borne = []
        for insulation_c in (60, 75, 80, 90, 105, 125):
            cable = replace(SINGLE, insulation_c=float(insulation_c))
            wire = a_conductor(
                f"W{gauge}-{insulation_c}", "BUS-N", "BUS-N", size=f"{gauge} AWG", cable=cable, zones=(zone,)
            )
            borne.append(bearings.of(wire))
        amps = [b.ampacity_a for b in borne if b is not None]
        assert amps == sorted(amps)


# --- units


def in_metres(tenths: int) -> str:
    """Write a length given in tenths of an inch exactly in metres."""
    return f"{tenths * 0.00254:.5f} m"


def in_feet(tenths: int) -> str:
    """Write the same length in feet and inches."""
    feet, rest = divmod(tenths, 120)
    return f"{feet} ft {rest / 10:g} in" if feet else f"{rest / 10:g} in"


@settings(max_examples=60, deadline=None)
@given(LENGTHS | st.sampled_from([70, 400, 720, 300]), st.sampled_from(["W1", "W3", "lamp-out", "pump-back"]))
def test_a_length_given_in_feet_and_in_metres_gets_one_verdict(tenths: int, name: str) -> None:
    boat = a_boat(*sound_pieces())
    for set_id in ("cfr33-183-i", "voluntary-dc"):
        both = [
            verdicts(
                outcomes_of(
                    changed(boat, name, length_m=read_number(text, Dimension.LENGTH), length_unit=unit),
                    limit_set=set_id,
                )
            )
            for text, unit in ((in_feet(tenths), "ft"), (in_metres(tenths), "m"))
        ]
        assert both[0] == both[1]


def test_7_in_typed_in_any_unit_is_within_7_in() -> None:
    boat = a_boat(*sound_pieces())
    for text in ("7 in", "0.1778 m", "17.78 cm", "177.8 mm"):
        length_m = read_number(text, Dimension.LENGTH)
        assert found_in(changed(boat, "W1", length_m=length_m), protection_distance, unprotected_conductor) == []
        assert found_in(changed(boat, "W1", length_m=length_m * 1.001), protection_distance) == [
            ("protection-distance", "W1")
        ]


# --- what flows


AMPS = st.one_of(st.just(INF), st.integers(1, 20).map(float))


@st.composite
def networks(draw: st.DrawFn) -> tuple[list[tuple[int, int, float]], list[float]]:
    """Draw edges between posts, and what the sources at the posts give."""
    posts = draw(st.integers(2, 8))
    post = st.integers(0, posts - 1)
    edges = draw(st.lists(st.tuples(post, post, AMPS), min_size=1, max_size=12))
    supply = [draw(st.one_of(st.just(0.0), st.just(INF), st.integers(1, 30).map(float))) for _ in range(posts)]
    return edges, supply


def exposures(network: Network, supply: list[float]) -> list[tuple[float, float]]:
    """Return what reaches both ends of every edge."""
    study = flow_study(network, list(range(len(network.edges))), supply)
    return [(study.exposures[i].at_a, study.exposures[i].at_b) for i in range(len(network.edges))]


def none_higher(after: Sequence[tuple[float, float]], before: Sequence[tuple[float, float]]) -> bool:
    """Tell whether no end is reached by more than before."""
    return all(a <= x and b <= y for (a, b), (x, y) in zip(after, before, strict=True))


@settings(max_examples=150, deadline=None)
@given(networks(), st.data())
def test_a_fuse_put_into_a_conductor_never_raises_what_reaches_another(
    case: tuple[list[tuple[int, int, float]], list[float]], data: st.DataObject
) -> None:
    edges, supply = case
    cut = data.draw(st.integers(0, len(edges) - 1))
    rating_a = data.draw(st.integers(1, 20).map(float))
    a, b, own = edges[cut]
    middle = len(supply)
    # The conductor keeps its place in the row; the fuse and the piece behind it come after all others.
    fused = [(a, middle, own) if n == cut else edge for n, edge in enumerate(edges)]
    network = a_network(len(supply) + 1, [*fused, (middle, b, rating_a)])
    before = exposures(a_network(len(supply), edges), supply)
    after = exposures(network, [*supply, 0.0])
    kept = [n for n in range(len(edges)) if n != cut]
    assert none_higher([after[n] for n in kept], [before[n] for n in kept])
    assert after[cut][0] <= before[cut][0]


@settings(max_examples=100, deadline=None)
@given(networks(), st.data())
def test_a_conductor_taken_out_never_raises_what_reaches_another(
    case: tuple[list[tuple[int, int, float]], list[float]], data: st.DataObject
) -> None:
    edges, supply = case
    out = data.draw(st.integers(0, len(edges) - 1))
    rest = [edge for n, edge in enumerate(edges) if n != out]
    before = exposures(a_network(len(supply), edges), supply)
    after = exposures(a_network(len(supply), rest), supply)
    assert none_higher(after, [pair for n, pair in enumerate(before) if n != out])


@settings(max_examples=100, deadline=None)
@given(networks(), st.data())
def test_one_source_more_never_lowers_what_reaches_a_conductor(
    case: tuple[list[tuple[int, int, float]], list[float]], data: st.DataObject
) -> None:
    edges, supply = case
    more = list(supply)
    more[data.draw(st.integers(0, len(supply) - 1))] += data.draw(AMPS)
    network = a_network(len(supply), edges)
    assert none_higher(exposures(network, supply), exposures(network, more))


@settings(max_examples=60, deadline=None)
@given(networks(), st.randoms(use_true_random=False))
def test_the_order_of_the_conductors_changes_nothing_of_what_reaches_them(
    case: tuple[list[tuple[int, int, float]], list[float]], random: Any
) -> None:
    edges, supply = case
    order = list(range(len(edges)))
    random.shuffle(order)
    turned = [edges[n] if random.random() < 0.5 else (edges[n][1], edges[n][0], edges[n][2]) for n in order]
    before = exposures(a_network(len(supply), edges), supply)
    after = exposures(a_network(len(supply), turned), supply)
    for place, n in enumerate(order):
        same_way = turned[place][:2] == edges[n][:2]
        assert after[place] == (before[n] if same_way else before[n][::-1])


# --- boats


@settings(max_examples=40, deadline=None)
@given(st.sampled_from([5.0, 10.0, 15.0, 20.0, 30.0, 60.0, 100.0]), st.sampled_from([1.0, 1.5, 2.0, 4.0]))
def test_a_larger_fuse_never_makes_a_finding_about_what_protects_its_conductors_go_away(
    rating_a: float, times: float
) -> None:
    checks = (device_rating, size_step, double_feed, unprotected_conductor)
    for set_id in ("cfr33-183-i", "voluntary-dc"):
        # By part: beyond the main fuse's rating the same conductor is told as a step behind that one.
        found = [
            {part for _, part in found_in(a_boat(*sound_pieces(), fuse), *checks, limit_set=set_id)}
            for fuse in (a_fuse("F-LAMP", amps, mount={"line": "BUS-P"}) for amps in (rating_a, rating_a * times))
        ]
        assert found[0] <= found[1]


@settings(max_examples=40, deadline=None)
@given(LENGTHS, LENGTHS, st.booleans())
def test_a_longer_piece_ahead_of_the_first_fuse_is_never_better_placed(one: int, other: int, enclosed: bool) -> None:
    boat = a_boat(*sound_pieces())
    found = []
    for tenths in sorted((one, other)):
        length_m = tenths * 0.00254
        longer = changed(
            boat, "W1", length_m=length_m, enclosed_m=length_m if enclosed else 0.0, place_reason="no room nearer"
        )
        found.append(found_in(longer, protection_distance, unprotected_conductor))
    assert not Counter(found[0]) - Counter(found[1])


@settings(max_examples=40, deadline=None)
@given(LENGTHS)
def test_a_sheath_never_makes_a_piece_ahead_of_the_first_fuse_worse_placed(tenths: int) -> None:
    boat = a_boat(*sound_pieces())
    length_m = tenths * 0.00254
    for set_id in ("cfr33-183-i", "voluntary-dc"):
        bare, sheathed = (
            found_in(
                changed(boat, "W1", length_m=length_m, enclosed_m=covered, place_reason="no room nearer"),
                protection_distance, unprotected_conductor, limit_set=set_id,
            )
            for covered in (0.0, length_m)
        )  # fmt: skip
        assert not Counter(sheathed) - Counter(bare)


@settings(max_examples=30, deadline=None)
@given(st.sampled_from(["W2", "W3", "lamp-out", "pump-out"]), st.sampled_from([1.0, 5.0, 15.0, 100.0]))
def test_a_fuse_put_into_a_feed_of_a_sound_boat_raises_no_exposure(name: str, rating_a: float) -> None:
    boat = a_boat(*sound_pieces())
    wire = boat.conductors[name]
    pieces: list[Piece] = [p for p in sound_pieces() if p.id != name]
    first = replace(wire, end="F-NEW.line", circuit="")
    second = replace(wire, id=f"{name}-behind", start="F-NEW.load", circuit="", length_m=0.01)
    fused = a_boat(*pieces, a_fuse("F-NEW", rating_a), first, second)

    def reached(of: Boat) -> dict[str, float]:
        studies = Studies(of)
        (study,) = studies.exposures
        return {studies.network.edges[i].part: e.worst_a for i, e in study.exposures.items()}

    before, after = reached(boat), reached(fused)
    assert all(after[part] <= before[part] for part in before)


@settings(max_examples=30, deadline=None)
@given(st.permutations(sound_pieces()))
def test_the_order_in_which_parts_are_given_changes_nothing(pieces: list[Piece]) -> None:
    boat, shuffled = a_boat(*sound_pieces()), a_boat(*pieces)
    assert shuffled == boat
    assert outcomes_of(shuffled) == outcomes_of(boat)


@pytest.mark.parametrize("set_id", ["cfr33-183-i", "voluntary-dc"])
def test_nothing_is_found_on_the_sound_boat(set_id: str) -> None:
    # It is made of figures alone: how it is made (ends, covers, labels) is not recorded.
    told = Counter(o.verdict for o in outcomes_of(a_boat(*sound_pieces()), limit_set=set_id))
    assert set(told) == {Verdict.PASSED, Verdict.NOT_ASSESSED}
    assert told[Verdict.PASSED] > 100


def test_twice_the_parts_side_by_side_give_each_the_same_verdicts() -> None:
    # Two boats that share nothing but the negative bus say the same of each as each alone.
    def house(tag: str) -> list[Piece]:
        return [
            a_battery(f"{tag}BAT", bank=tag), a_fuse(f"{tag}F", 30.0), a_load(f"{tag}L", 10.0),
            a_conductor(f"{tag}n", f"{tag}BAT.neg", "BUS-N"), a_conductor(f"{tag}w", f"{tag}BAT.pos", f"{tag}F.line"),
            a_conductor(f"{tag}o", f"{tag}F.load", f"{tag}L.pos", size="16 AWG"), a_conductor(f"{tag}b", f"{tag}L.neg", "BUS-N"),
        ]  # fmt: skip

    alone = found_in(a_boat(a_bus("BUS-N"), *house("A")))
    both = found_in(a_boat(a_bus("BUS-N"), *house("A"), *house("B")))
    assert alone
    assert both == sorted(alone + [(check, f"B{part[1:]}") for check, part in alone])


# --- the files of a yard

PLACE = re.compile(r"[\w/.-]+\.yaml:\d+:\d+")


def decided(folder: Path) -> dict[str, list[tuple[Any, ...]]]:
    """Return everything told of every boat of a fleet, without places in files."""
    result = check_fleet(folder, today=TODAY)
    assert result.file_outcomes == ()
    return {
        s.id: sorted(
            (
                o.verdict.value,
                o.check,
                o.part,
                o.limit_set,
                o.state,
                PLACE.sub("", o.fault),
                o.remedy,
                o.path,
                repr(o.measure),
                o.inputs,
            )
            for o in s.outcomes
        )
        for s in result.subjects
    }


def reversed_keys(data: Any) -> Any:
    """Return data with the keys of every mapping in the opposite order."""
    if isinstance(data, dict):
        return {key: reversed_keys(data[key]) for key in reversed(data)}
    return [reversed_keys(item) for item in data] if isinstance(data, list) else data


def write(path: Path, data: Any) -> None:
    """Write one file of a yard, its keys in the order given."""
    path.write_text(yaml.safe_dump(data, sort_keys=False, allow_unicode=True), "utf-8")


@pytest.fixture(scope="module")
def as_written() -> dict[str, list[tuple[Any, ...]]]:
    return decided(FLEET)


@pytest.fixture
def copy(tmp_path: Path) -> Path:
    target = tmp_path / "fleet"
    shutil.copytree(FLEET, target, ignore=shutil.ignore_patterns("reports"))
    return target


def test_the_order_of_keys_in_the_files_changes_nothing_that_is_told(
    as_written: dict[str, list[tuple[Any, ...]]], copy: Path
) -> None:
    for path in copy.rglob("*.yaml"):
        write(path, reversed_keys(yaml.safe_load(path.read_text("utf-8"))))
    assert decided(copy) == as_written


def test_the_names_and_the_number_of_files_change_nothing_that_is_told(
    as_written: dict[str, list[tuple[Any, ...]]], copy: Path
) -> None:
    parts: dict[str, Any] = {}
    for path in sorted((copy / "parts").glob("*.yaml")):
        for section, rows in yaml.safe_load(path.read_text("utf-8")).items():
            parts.setdefault(section, {}).update(rows)
        path.unlink()
    write(copy / "parts" / "all.yaml", parts)
    design: dict[str, Any] = {}
    for path in sorted((copy / "classes" / "tindral-36").glob("*.yaml")):
        for section, rows in yaml.safe_load(path.read_text("utf-8")).items():
            design.setdefault(section, {}).update(rows)
        path.unlink()
    for section, rows in design.items():
        write(copy / "classes" / "tindral-36" / f"z-{section}.yaml", {section: rows})
    for number, path in enumerate(sorted((copy / "hulls").glob("*.yaml"), reverse=True)):
        path.rename(path.with_name(f"boat-{number}.yaml"))
    assert decided(copy) == as_written


def test_a_fleet_checked_twice_tells_the_same() -> None:
    assert check_fleet(FLEET, today=TODAY) == check_fleet(FLEET, today=TODAY)
