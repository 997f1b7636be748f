"""Hold the smallest yard that can be read and studied, and write it into a folder.

It shows how files are read, patched, assembled and reported; whether the boat is sound does not
matter here. The yard is invented.
"""

from __future__ import annotations

import datetime
from collections.abc import Mapping
from pathlib import Path

from checker.pipeline import check_fleet
from checker.result.model import FleetResult

TODAY = datetime.date(2026, 12, 1)

YARD = """\
name: Dory Works
limit_sets: [voluntary-dc]
"""
PARTS = """\
parts:
  cell: {kind: battery, voltage: 12 V, capacity: 80 Ah, chemistry: agm-lead}
  blade: {kind: fuse, voltage: 32 V, ratings: {5 A: {}, 10 A: {}}}
  stud: {kind: bus, rating: 100 A}
  lamp: {kind: load, voltage: 12 V, current: 2 A}
  toggle: {kind: switch, posts: [in, out], states: {open: [], closed: [[in, out]]}}
  wire: {kind: cable, insulation: 105 C}
  twin: {kind: cable, insulation: 105 C, sheathed: true, cores: 2}
"""
CLASS = """\
class: {name: Dory 14, revision: 2, revisions: {"1": {what: first, electrical: true}, "2": {what: lamp moved,
  electrical: true}}, system_voltage: 12 V, reference: NEG}
facts: {length: 14 ft, generator_fuel: none}
defaults: {branch_cable: twin, single_conductor: wire}
zones:
  BOX: {name: battery box, ambient: 30 C}
  BOW: {name: bow locker, ambient: 30 C}
ways:
  keel: {zone: BOX, length: 2 m}
devices:
  BAT: {part: cell, zone: BOX, bank: HOUSE, string: 1}
  SW: {part: toggle, zone: BOX}
  POS: {part: stud, zone: BOX, positions: {first: PNL-01, last: PNL-04, takes: blade, returns: NEG}}
  NEG: {part: stud, zone: BOX}
conductors:
  W1: {from: BAT.pos, to: SW.in, size: 6 AWG, length: 0.1 m}
  W2: {from: SW.out, to: POS, size: 6 AWG, length: 0.3 m}
  W3: {from: BAT.neg, to: NEG, size: 6 AWG, length: 0.3 m}
circuits:
  C1: {name: Bow lamp, service: lighting, feed: PNL-01, protect: 5 A, cable: 14 AWG, route: [keel], tail: 1 m,
    load: lamp, zone: BOW}
  C2: {name: Stern lamp, service: lighting, feed: PNL-02, protect: 5 A, cable: 14 AWG, length: 3 m,
    load: lamp, zone: BOW}
bonds: {}
shields: {}
states:
  moored: {kind: normal, switches: {SW: closed}}
conditions:
  night: {name: Night, switches: {SW: closed}, loads: {C1: 2 A, C2: 2 A}}
"""
OPTION = """\
option: OPT-LAMP
name: Third lamp
changes:
  circuits:
    C3: {name: Mast lamp, service: lighting, feed: PNL-03, protect: 5 A, cable: 14 AWG, length: 4 m,
      load: lamp, zone: BOW}
"""
HULL = """\
hull: DORY-1
class: dory-14
revision: 2
status: planned
options: []
"""
DORY: Mapping[str, str] = {
    "yard.yaml": YARD,
    "parts/all.yaml": PARTS,
    "classes/dory-14/class.yaml": CLASS,
    "classes/dory-14/options/lamp.yaml": OPTION,
    "hulls/dory-1.yaml": HULL,
}


def edited(file: str, old: str, new: str, files: Mapping[str, str] = DORY) -> dict[str, str]:
    """Return the yard's files with one place of one file changed."""
    assert files[file].count(old) == 1, f"“{old}” stands {files[file].count(old)} times in {file}"
    return {**files, file: files[file].replace(old, new)}


def place(file: str, text: str, files: Mapping[str, str] = DORY) -> str:
    """Return file:line:column of the one place where a text stands in a file."""
    assert files[file].count(text) == 1, f"“{text}” stands {files[file].count(text)} times in {file}"
    before = files[file].partition(text)[0]
    return f"{file}:{before.count(chr(10)) + 1}:{len(before) - before.rfind(chr(10))}"


def write(folder: Path, files: Mapping[str, str]) -> Path:
    """Write files into a folder and return it."""
    for name, text in files.items():
        (folder / name).parent.mkdir(parents=True, exist_ok=True)
        (folder / name).write_bytes(text.encode("utf-8"))
    return folder


def checked(folder: Path, files: Mapping[str, str] = DORY) -> FleetResult:
    """Write the files and check the yard."""
    return check_fleet(write(folder, files), today=TODAY)


def told(result: FleetResult) -> list[tuple[str, str, str, str]]:
    """Return the findings of a yard's files: check, place, message and remedy, in report order."""
    files = [o for o in result.file_outcomes if o.check != "not-studied"]
    own = [o for s in result.subjects for o in s.outcomes if o.part.endswith(".yaml")]
    return [(o.check, str(o.at), o.fault, o.remedy) for o in (*files, *own)]
