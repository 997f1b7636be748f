"""Drawings can be read: no text meets another, nothing is cut, no line runs through a text; and they tell all."""

from __future__ import annotations

import datetime
import math
import os
import re
import subprocess
import sys
from collections.abc import Iterator
from functools import cache
from pathlib import Path

import pytest

from checker import pipeline
from checker.boat.hull import Boat
from checker.boat.parts import Load, Overcurrent
from checker.cli import main
from checker.errors import UsageError
from checker.finding import Outcome
from checker.network.flow import Flow
from checker.network.studies import Studies
from checker.output.drawing import mermaid
from checker.output.drawing.feed_tree import feed_trees
from checker.output.drawing.files import drawing_files
from checker.output.drawing.lettering import shortened, text_width
from checker.output.drawing.one_line import one_line
from checker.output.drawing.tree import Kind, Node
from checker.reading.yard_files import read_yard
from tests.benchmark import write_large_hull
from tests.make_drawings import FOLDER, drawings, flawed_yard
from tests.output.svg_geometry import crossings, faults, read
from tests.small_yard import HULL, SOUND, Yard

ROOT = Path(__file__).resolve().parents[2]
EXAMPLE = ROOT / "fleet_example"
TODAY = datetime.date(2026, 12, 1)
Opened = tuple[str, Studies, tuple[Outcome, ...]]


@cache
def example() -> list[Opened]:
    """Return every hull and option set of the example with its studies and what was found."""
    fleet = pipeline._assembled(read_yard(EXAMPLE), lists_passes=True)
    found: list[Opened] = []
    for subject in fleet.assembly.subjects:
        studies, studied = fleet.bench.open(subject.key)
        assert studies is not None
        found.append((subject.id, studies, (*studied.news, *studied.passes)))
    return found


def small_boat() -> Boat:
    return example()[0][1].boat


def texts(svg: str) -> list[str]:
    return [text for text, _ in read(svg).texts]


def opened(yard: Yard, folder: Path) -> pipeline.OpenHull:
    for name, text in yard.files.items():
        (folder / name).parent.mkdir(parents=True, exist_ok=True)
        (folder / name).write_text(text, encoding="utf-8")
    return pipeline.open_hull(folder, HULL, today=TODAY)


def drawn(yard: Yard, folder: Path) -> dict[str, str]:
    """Return all drawings of the small yard's hull."""
    hull = opened(yard, folder)
    return drawing_files(hull.studies, hull.result.outcomes, HULL)


def test_the_one_line_drawing_of_every_hull_and_option_set_can_be_read() -> None:
    assert len(example()) > 12
    assert {
        name: found for name, studies, outcomes in example() if (found := faults(one_line(studies, outcomes, name)))
    } == {}


def test_no_line_crosses_another() -> None:
    for name, studies, outcomes in example():
        assert crossings(one_line(studies, outcomes, name)) == [], name


def test_no_device_and_no_load_is_left_out() -> None:
    for name, studies, outcomes in example():
        told = " ".join(texts(one_line(studies, outcomes, name))).split(" ")
        devices = {d.id for d in studies.boat.devices.values() if isinstance(d.part, Overcurrent)}
        loads = {d.circuit or d.id for d in studies.boat.devices.values() if isinstance(d.part, Load)}
        assert (devices | loads) - set(told) == set(), name


@pytest.mark.parametrize("hull", ["TND-036", "TND-038"])
def test_the_plots_of_every_circuit_can_be_read(hull: str) -> None:
    name, studies, outcomes = next(row for row in example() if row[0] == hull)
    plots = {
        n: svg for n, svg in drawing_files(studies, outcomes, name).items() if "-line" not in n and n.endswith("svg")
    }
    assert len(plots) > 100
    assert {n: found for n, svg in plots.items() if (found := faults(svg))} == {}


def test_the_drawings_of_a_large_hull_can_be_read(tmp_path: Path) -> None:
    write_large_hull(tmp_path)
    hull = pipeline.open_hull(tmp_path, "TND-0001", today=TODAY)
    svg = one_line(hull.studies, hull.result.outcomes, "TND-0001")
    assert faults(svg) == []
    assert crossings(svg) == []
    assert len(hull.studies.boat.conductors) > 350
    assert {circuit for circuit, row in hull.studies.boat.circuits.items() if row.load} - set(texts(svg)) == set()


def test_nothing_found_leaves_the_list_of_findings_empty(tmp_path: Path) -> None:
    svg = drawn(SOUND, tmp_path)["one-line.svg"]
    assert "none" in texts(svg)
    assert faults(svg) == []


def test_a_finding_is_marked_where_it_is_and_told_in_the_list(tmp_path: Path) -> None:
    picture = read(drawn(flawed_yard(), tmp_path)["one-line.svg"])
    (wire,) = [box for text, box in picture.texts if text.startswith("M1 ")]
    marks = [box for text, box in picture.texts if text == "1" and abs(box[1] - wire[1]) < 3]
    assert min(box[0] - wire[2] for box in marks) < 3
    assert any(text.startswith("error: M1 of MAIN") for text, _ in picture.texts)


def test_a_fault_under_two_limit_sets_is_one_mark(tmp_path: Path) -> None:
    told = [text for text in texts(drawn(flawed_yard(), tmp_path)["one-line.svg"]) if text.startswith("error: M1 ")]
    assert len(told) == 1


def test_an_open_switch_is_told_as_open() -> None:
    _, studies, _ = next(row for row in example() if row[0] == "TND-031")
    nodes = {node.name: node for tree in feed_trees(studies) for node in tree.walk()}
    assert (nodes["SW-P"].told, nodes["SW-H"].told) == ("open", "closed")


RING = """
devices:
  FA: {part: bolt-fuse, zone: CABIN, rating: 60 A}
  FB: {part: bolt-fuse, zone: CABIN, rating: 60 A}
  ISL: {part: isolator, zone: CABIN}
  X: {part: bus-100, zone: CABIN}
  CHO: {part: change-over, zone: CABIN}
  LONE: {part: plotter, zone: CABIN}
circuits:
  RING:
    name: two fuses side by side, an isolator, a change-over switch
    service: general
    current: 1 A
    conductors:
      Z0: {from: BUS-P, to: FA.line, size: 10 AWG, length: 0.1 m}
      Z1: {from: BUS-P, to: FB.line, size: 10 AWG, length: 0.1 m}
      Z2: {from: FA.load, to: X, size: 10 AWG, length: 0.1 m}
      Z3: {from: FB.load, to: X, size: 10 AWG, length: 0.1 m}
      Z6: {from: X, to: ISL.in, size: 10 AWG, length: 0.1 m}
      Z7: {from: ISL.o1, to: BAT-S.pos, size: 10 AWG, length: 0.1 m}
      Z8: {from: X, to: CHO.a, size: 10 AWG, length: 0.1 m}
      Z9: {from: CHO.out, to: ISL.o2, size: 10 AWG, length: 0.1 m}
      ZA: {from: X, to: CHO.b, size: 10 AWG, length: 0.1 m}
"""
RING_PARTS = """
isolator: {kind: diode, posts: [in, o1, o2], passes: [[in, o1], [in, o2]], drop: 0.4 V, resistance: 1 mohm}
change-over: {kind: switch, posts: [a, b, out], states: {one: [[a, out]], two: [[b, out]]}}
"""


def test_rings_diodes_and_change_overs_are_drawn_once_and_named_at_both_ends(tmp_path: Path) -> None:
    hull = opened(SOUND.also(RING).also_parts(RING_PARTS), tmp_path)
    svg = one_line(hull.studies, hull.result.outcomes, HULL)
    assert faults(svg) == []
    assert crossings(svg) == []
    house, start, alone = feed_trees(hull.studies)
    assert (house.name, start.name, alone.name, alone.note) == ("HOUSE", "START", "LONE.pos", "no bank")
    kinds = [
        (node.name, node.kind) for tree in (house, start) for node in tree.walk() if node.name in ("FA", "FB", "ISL")
    ]
    assert kinds == [("FA", Kind.FUSE), ("ISL", Kind.DIODE), ("FB", Kind.FUSE), ("ISL", Kind.DIODE_BACK)]
    states = {n.name: n.told for n in house.walk() if n.kind in (Kind.CLOSED, Kind.OPEN)}
    assert states == {"SW-H": "closed", "CHO a-out": "closed", "CHO b-out": "open"}


def test_a_chain_of_hundreds_of_splices_ends_with_a_word(tmp_path: Path) -> None:
    count = 300
    splices = "".join(f"  SP{i}: {{part: bus-100, zone: CABIN}}\n" for i in range(count))
    links = "".join(f"  Y{i}: {{from: SP{i}, to: SP{i + 1}, size: 10 AWG, length: 0.1 m}}\n" for i in range(count - 1))
    first = "  Y-FIRST: {from: BUS-P, to: SP0, size: 10 AWG, length: 0.1 m}\n"
    hull = opened(SOUND.also(f"devices:\n{splices}conductors:\n{first}{links}"), tmp_path)
    svg = one_line(hull.studies, hull.result.outcomes, HULL)
    assert faults(svg) == []
    assert any(text.startswith("more than 40 parts") for text in texts(svg))


HOSTILE = [
    "<script>alert(1)</script>", "x" * 400, "W" * 200, "]]> & \\\" ' --> ${x}", "\u202egnp.exe", "e" + "\u0301" * 60,
    "漢字" * 80, "::error::x", "| `a` @b #c ; end", "\u200f\u05d0\u05d1\u05d2", "\ufdfd" * 9,
]  # fmt: skip


@pytest.mark.parametrize("name", HOSTILE, ids=range(len(HOSTILE)))
def test_names_are_escaped_and_cut_to_their_room(tmp_path: Path, name: str) -> None:
    quoted = "'" + name.replace("'", "''") + "'"
    yard = SOUND.edit("name: Cabin lights", f"name: {quoted}").edit("name: Starter\n", f"name: {quoted}\n")
    yard = yard.edit("name: Skiff", f"name: {quoted}")
    try:
        files = drawn(yard, tmp_path)
    except UsageError:
        pytest.skip("the reader refuses this text")
    for file, text in files.items():
        if file.endswith(".svg"):
            assert faults(text) == [], file
            assert "<script" not in text
        else:
            assert text.count("```") == 2


def test_long_ids_are_cut_to_their_room(tmp_path: Path) -> None:
    files = dict(SOUND.files)
    for short in ("F-MAIN", "BUS-P", "PLOTTER", "M1", "PANEL-N", "SW-H"):
        long = (short + "-" + "WIDE" * 10)[:40]
        files = {name: text.replace(f"{short}:", f"{long}:").replace(f"{short}.", f"{long}.").replace(f"{short},", f"{long},")
                 .replace(f"{short}}}", f"{long}}}") for name, text in files.items()}  # fmt: skip
    for file, text in drawn(Yard(files), tmp_path).items():
        assert file.endswith(".md") or faults(text) == [], file


def test_a_text_is_cut_with_an_ellipsis_and_keeps_its_width() -> None:
    cut = shortened("Chart plotter and sounder at the helm", 2.0, 20.0)
    assert cut.endswith("…") and text_width(cut, 2.0) <= 20.0
    assert shortened("Horn", 2.0, 20.0) == "Horn"


@pytest.mark.parametrize("name", sorted(path.name for path in FOLDER.iterdir()))
def test_the_drawings_kept_with_the_tests_are_made_to_the_byte(name: str) -> None:
    assert drawings()[name] == (FOLDER / name).read_text(encoding="utf-8")


def test_the_bytes_do_not_depend_on_the_hash_seed(tmp_path: Path) -> None:
    def run(seed: str) -> Iterator[tuple[str, bytes]]:
        folder = tmp_path / seed
        words = ["draw", "TND-038", str(EXAMPLE), "--to", str(folder), "--circuit", "P11", "--today", "2026-12-01"]
        command = [sys.executable, "-m", "checker", *words]
        subprocess.run(command, cwd=ROOT, env={**os.environ, "PYTHONHASHSEED": seed}, check=True, capture_output=True)
        return ((path.name, path.read_bytes()) for path in sorted(folder.iterdir()))

    assert dict(run("1")) == dict(run("2"))


def test_the_command_writes_the_plots_asked_for(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    words = [
        "draw",
        "TND-031",
        str(EXAMPLE),
        "--to",
        str(tmp_path / "new"),
        "--circuit",
        "P14",
        "--today",
        "2026-12-01",
    ]
    assert main(words) == 0
    assert sorted(path.name for path in (tmp_path / "new").iterdir()) == [
        "coordination-P14.svg", "one-line.svg", "trunk.md", "voltage-P14.svg",
    ]  # fmt: skip
    assert "4 drawings of TND-031" in capsys.readouterr().out


@pytest.mark.parametrize(
    ("hull", "circuit", "told"), [("TND-099", "P14", "no hull TND-099"), ("TND-031", "p14", "did you mean P14?")]
)
def test_what_is_not_aboard_is_told(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], hull: str, circuit: str, told: str
) -> None:
    assert main(["draw", hull, str(EXAMPLE), "--to", str(tmp_path), "--circuit", circuit, "--today", "2026-12-01"]) == 2
    assert told in capsys.readouterr().err


def test_the_plots_are_left_out_where_the_batteries_have_no_figures(tmp_path: Path) -> None:
    text = SOUND.files["parts/parts.yaml"]
    for name in ("emf_full", "emf_low", "resistance_full", "resistance_low"):
        text = re.sub(rf"\s*{name}: [^,}}\n]*(, |,\n|\n)", " " if "{" in text.splitlines()[1] else "\n", text)
    files = drawn(Yard({**SOUND.files, "parts/parts.yaml": text}), tmp_path)
    assert [name for name in files if name.startswith("voltage")] == []
    assert "one-line.svg" in files and "coordination-LIGHTS.svg" in files
    assert not any("largest" in text for text in texts(files["coordination-LIGHTS.svg"]))


def test_the_band_of_a_device_stands_at_its_rating(tmp_path: Path) -> None:
    """A 10 A breaker that begins to open at 1.2 times its rating: its label stands at 12 A."""
    picture = read(drawn(SOUND, tmp_path)["coordination-LIGHTS.svg"])
    place = dict(sorted(picture.texts, key=lambda row: row[1][1]))  # the lower axis last
    decade_a, next_a = ((place[words][0] + place[words][2]) / 2 for words in ("10", "100"))
    (label,) = [box for text, box in picture.texts if text.startswith("P2 10 A")]
    assert label[0] - 1 == pytest.approx(decade_a + math.log10(1.2) * (next_a - decade_a), abs=0.02)


def test_the_plots_tell_what_the_ladder_and_the_solved_network_tell() -> None:
    name, studies, outcomes = next(row for row in example() if row[0] == "TND-038")
    files = drawing_files(studies, outcomes, name, ["P14"])
    rungs = {rung.device: rung for rung in studies.ladder}
    told = texts(files["coordination-P14.svg"])
    for device in ("F-H", "F-PNL", "CB-PM", "PNL-13"):
        assert f"{rungs[device].prospective_a:.0f} A, the largest at {device}" in told
    assert f"{rungs['PNL-13'].far_a:.0f} A, the smallest at the far end, P14.load.pos" in told
    index = studies.network.index
    (hotel,) = [solved.full for solved in studies.conditions.solved if solved.operation.condition.id == "hotel"]
    assert isinstance(hotel, Flow)
    bank_v = hotel.across(index["BAT-H1A.pos"], index["BAT-H1B.neg"])
    lost_v = bank_v - hotel.across(index["P14.load.pos"], index["P14.load.neg"])
    assert f"{lost_v:.3f} V lost: hotel" in texts(files["voltage-P14.svg"])


def test_a_limit_stands_in_the_plot_at_its_share_of_the_nominal_voltage(tmp_path: Path) -> None:
    told = texts(drawn(SOUND, tmp_path)["voltage-LIGHTS.svg"])
    assert "limit 1.200 V" in told
    assert any(text.endswith("limit: 10 % of 12 V by voluntary-dc") for text in told)


def test_a_diagram_too_large_for_a_forge_is_split() -> None:
    tree = Node(Kind.BANK, "B", children=[
        Node(Kind.FUSE, f"F{i}", children=[Node(Kind.LOAD, f"L{i}-{j}") for j in range(30)]) for i in range(30)
    ])  # fmt: skip
    parts = list(mermaid._split(small_boat(), [tree]))
    diagrams = ["\n".join(mermaid._diagram(small_boat(), part)) for part in parts]
    assert len(parts) == 3
    assert max(text.count(" --- ") for text in diagrams) <= mermaid.MOST_EDGES
    assert sum(text.count('"L') for text in diagrams) == 900
    assert all('"bank B"' in text for text in diagrams)


def test_nothing_in_a_label_is_syntax() -> None:
    tree = Node(Kind.BANK, 'a"b;c#d<e>f`g', children=[Node(Kind.FUSE, 'x"]; click n1 "javascript:y')])
    lines = mermaid._diagram(small_boat(), [tree])
    assert lines == [
        "flowchart LR",
        '  n1[["bank a#quot;b#59;c#35;d&lt;e&gt;f\'g"]]',
        '  n2["fuse x#quot;]#59; click n1 #quot;javascript:y"]',
        "  n1 --- n2",
    ]


def test_a_hull_that_cannot_be_built_is_told(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    yard = SOUND.edit("to: F-MAIN.line", "to: F-NONE.line")
    with pytest.raises(UsageError, match="could not be studied"):
        opened(yard, tmp_path)
