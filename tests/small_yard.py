"""Hold a small, complete and sound yard; edit it by its text, check it, and tell what was found.

Each test seeds one fault: it starts from `SOUND`, changes what an author would change, and
asserts all findings with the lines that they point at. The yard is invented.
"""

from __future__ import annotations

import datetime
import tempfile
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path

from checker.finding import Outcome, Verdict
from checker.pipeline import check_fleet
from checker.result.model import FleetResult, SubjectResult

TODAY = datetime.date(2026, 12, 1)
HULL = "SKIFF-1"
LAW, PRACTICE, BOTH, NEITHER = "law", "practice", "both", ""
"""Short names of the limit sets in an expected finding; NEITHER rests on physics or on the yard's own data."""

YARD_YAML = """\
name: Small Yard
limit_sets: [cfr33-183-i, voluntary-dc]
"""

PARTS_YAML = """\
parts:
  house-battery: {kind: battery, voltage: 12 V, capacity: 100 Ah, chemistry: agm-lead,
    terminal: clamp, cover: true, torque: 12 Nm, smallest_size: 22 AWG, largest_size: 4/0 AWG,
    emf_full: 12.8 V,
    emf_low: 11.9 V, resistance_full: 4 mohm, resistance_low: 6 mohm, short_circuit: 3200 A}
  start-battery: {kind: battery, voltage: 12 V, capacity: 75 Ah, chemistry: agm-lead, emf_full: 12.8 V,
    emf_low: 11.9 V, resistance_full: 4 mohm, resistance_low: 6 mohm, short_circuit: 3200 A,
    terminal: stud, stud: M10, cover: true, torque: 12 Nm, smallest_size: 22 AWG, largest_size: 4/0 AWG}
  battery-switch:
    kind: switch
    posts: [in, out]
    states: {open: [], closed: [[in, out]]}
    continuous: 300 A
    intermittent: 600 A
    contact_resistance: 0.05 mohm
    ignition_protected: true
    terminal: stud
    stud: M10
    cover: true
    torque: 14 Nm
    smallest_size: 22 AWG
    largest_size: 4/0 AWG
  shunt-300: {kind: shunt, resistance: 0.17 mohm, rating: 300 A, short_time: {current: 400 A, time: 10 s},
    terminal: stud, stud: M10, torque: 15 Nm, smallest_size: 22 AWG, largest_size: 4/0 AWG}
  bus-250: {kind: bus, rating: 250 A, studs: 4, stud: M10, torque: 15 Nm}
  bus-100: {kind: bus, rating: 100 A, studs: 2, screws: 10, stud: M8, screw_thread: M4, torque: 10 Nm}
  bolt-fuse: {kind: fuse, voltage: 32 V, interrupting: 10 kA, band: slow, resistance: 0.3 mohm,
    ratings: {30 A: {}, 60 A: {}, 80 A: {}, 125 A: {}, 150 A: {}, 200 A: {}},
    terminal: stud, stud: M8, cover: true, torque: 10 Nm, smallest_size: 22 AWG, largest_size: 4/0 AWG}
  blade-fuse: {kind: fuse, voltage: 32 V, interrupting: 5 kA, band: slow, resistance: 5 mohm,
    ratings: {1 A: {}, 2 A: {}, 5 A: {}, 10 A: {}, 15 A: {}},
    terminal: screw, stud: M4, cover: true, torque: 1.5 Nm, smallest_size: 22 AWG, largest_size: 6 AWG}
  panel-breaker:
    kind: breaker
    voltage: 32 V
    interrupting: 5 kA
    band: quick
    polarised: true
    resistance: 10 mohm
    trip_free: true
    reset: manual
    terminal: screw
    stud: M4
    torque: 2 Nm
    smallest_size: 22 AWG
    largest_size: 6 AWG
    ratings: {5 A: {}, 10 A: {}, 15 A: {}, 20 A: {}, 30 A: {}}
  single-105: {kind: cable, insulation: 105 C, core_colours: [red]}
  duplex-105: {kind: cable, insulation: 105 C, sheathed: true, cores: 2, core_colours: [red, yellow]}
  engine-block: {kind: metal}
  sacrificial-anode: {kind: metal}
  starter: {kind: load, voltage: 12 V, current: 200 A, motor: true, feed_post: B, return_post: case,
    terminal: stud, stud: M10, cover: true, torque: 12 Nm, smallest_size: 22 AWG, largest_size: 4/0 AWG}
  regulator: {kind: load, voltage: 12 V, current: 0.1 A, standby: 5 mA, feed_post: sense, return_post: gnd, regulator: true,
    terminal: screw, stud: M4, torque: 1.5 Nm, smallest_size: 22 AWG, largest_size: 6 AWG}
  monitor-head: {kind: load, voltage: 12 V, current: 0.05 A, standby: 0.05 A}
  plotter: {kind: load, voltage: 12 V, current: 1 A, min_voltage: 10 V, max_device: 5 A, terminal: plug}
  cabin-lights: {kind: load, voltage: 12 V, current: 3 A, max_device: 10 A, terminal: lead}
  cooling-pump: {kind: load, voltage: 12 V, current: 8 A, max_device: 15 A, motor: true,
    stall_protection: device, stall_current: 40 A, terminal: lead}
  bow-light: {kind: load, voltage: 12 V, current: 0.5 A, max_device: 5 A, terminal: lead, ingress: IP67}
  vapour-sensor: {kind: load, voltage: 12 V, current: 0.2 A, max_device: 5 A, ignition_protected: true,
    terminal: plug}
  alternator-60:
    kind: source
    outputs: {B: {return: case, max: 60 A, voltage: 14.4 V, limited: true}}
    terminal: stud
    stud: M8
    torque: 10 Nm
    smallest_size: 22 AWG
    largest_size: 4/0 AWG
  charger-20:
    kind: source
    outputs: {out: {return: neg, max: 20 A, voltage: 14.4 V, limited: true}}
    terminal: stud
    stud: M6
    smallest_size: 22 AWG
    largest_size: 4/0 AWG
    torque: 5 Nm
bands:
  slow:
    engine_space_factor: 0.9
    points:
      - {multiple: 1.35, earliest: 100 s, latest: never}
      - {multiple: 2, earliest: 5 s, latest: 100 s}
      - {multiple: 4, earliest: 0.2 s, latest: 1 s}
      - {multiple: 10, earliest: 0.02 s, latest: 0.05 s}
      - {multiple: 100, earliest: 0.0005 s, latest: 0.001 s}
      - {multiple: 300, earliest: 0.0001 s, latest: 0.0002 s}
  quick:
    engine_space_factor: 0.9
    points:
      - {multiple: 1.2, earliest: 60 s, latest: never}
      - {multiple: 1.5, earliest: 1 s, latest: 30 s}
      - {multiple: 2, earliest: 0.2 s, latest: 4 s}
      - {multiple: 4, earliest: 0.02 s, latest: 0.2 s}
      - {multiple: 10, earliest: 0.002 s, latest: 0.01 s}
      - {multiple: 100, earliest: 0.0002 s, latest: 0.0005 s}
      - {multiple: 300, earliest: 0.00005 s, latest: 0.0001 s}
"""

CLASS_YAML = """\
class:
  name: Skiff
  revision: 2
  revisions:
    "1": {what: first issue, electrical: true}
    "2": {what: legends reworded, electrical: false}
  system_voltage: 12 V
  reference: BUS-N
facts:
  engines:
    MAIN: {fuel: diesel, mounting: inboard, block: ENGINE}
  monitored: [HOUSE]
  ac_aboard: true
defaults: {branch_cable: duplex-105, single_conductor: single-105}
workmanship:
  terminal: ring
  ring_hole: as-stud
  barrel: as-conductor
  stacking: largest-first
  labels: both
  passages: grommet
  supports: 300 mm
  ac: sheathed
  fuse_marks: true
  switch_marks: true

zones:
  LOCKER: {name: battery locker, ambient: 30 C, fuel_parts: false, hydrogen_vent: true, access: at-once}
  CABIN: {name: cabin and panel, ambient: 30 C,
    isolated_from: {FUEL: {by: bulkhead, height: 4 ft, tight_to: 12 in, gap: 6 mm}}}
  ENGINE-SPACE: {name: engine space, ambient: 50 C, engine_space: true}
  BOW: {name: bow, ambient: 30 C, wet: true, bilge_water: true}
  FUEL: {name: "locker for the tender's petrol", ambient: 30 C, petrol_vapour: true}
ways:
  cabin-way: {zone: CABIN, length: 2 m, lay: single}
  engine-way: {zone: ENGINE-SPACE, length: 1.5 m, lay: single}
  bow-way: {zone: BOW, length: 3 m, lay: single}
  locker-pipe: {zone: LOCKER, length: 0.5 m, kind: conduit, lay: single}

devices:
  BAT-H: {part: house-battery, zone: LOCKER, bank: HOUSE}
  F-MAIN: {part: bolt-fuse, zone: LOCKER, rating: 150 A}
  SW-H: {part: battery-switch, zone: LOCKER}
  BUS-P: {part: bus-250, zone: LOCKER, name: positive bus}
  SHUNT: {part: shunt-300, zone: LOCKER, measures: HOUSE}
  BUS-N: {part: bus-250, zone: LOCKER, name: negative bus}

  F-PANEL: {part: bolt-fuse, zone: LOCKER, rating: 60 A, mount: {line: BUS-P}}
  PANEL: {part: bus-100, zone: CABIN, positions: {first: P1, last: P8, takes: panel-breaker, returns: PANEL-N}}
  PANEL-N: {part: bus-100, zone: CABIN}

  BAT-S: {part: start-battery, zone: LOCKER, bank: START}
  SW-S: {part: battery-switch, zone: LOCKER}
  STARTER: {part: starter, zone: ENGINE-SPACE, engine_mounted: true}
  ENGINE: {part: engine-block, zone: ENGINE-SPACE}

  ALT: {part: alternator-60, zone: ENGINE-SPACE, engine_mounted: true}
  F-ALT: {part: bolt-fuse, zone: LOCKER, rating: 80 A, mount: {line: BAT-H.pos}}
  CHARGER: {part: charger-20, zone: CABIN}
  F-CHARGER: {part: bolt-fuse, zone: LOCKER, rating: 30 A}
  REGULATOR: {part: regulator, zone: ENGINE-SPACE, regulates: ALT}
  F-SENSE: {part: blade-fuse, zone: LOCKER, rating: 2 A}

  F-MONITOR: {part: blade-fuse, zone: LOCKER, rating: 1 A}
  MONITOR: {part: monitor-head, zone: LOCKER, belongs_to: SHUNT, mount: {pos: SHUNT.vbat, neg: SHUNT.bat},
    set: {capacity: 100 Ah, ratio: 300 A = 50 mV}}
  ANODE: {part: sacrificial-anode, zone: BOW}

circuits:
  MAIN:
    name: House bank main
    service: feeder
    current: 80 A
    conductors:
      M1: {from: BAT-H.pos, to: F-MAIN.line, size: 2 AWG, length: 5.9 in}
      M2: {from: F-MAIN.load, to: SW-H.in, size: 2 AWG, length: 0.4 m}
      M3: {from: SW-H.out, to: BUS-P, size: 2 AWG, length: 0.3 m}
      M4: {from: BAT-H.neg, to: SHUNT.bat, size: 2 AWG, length: 0.3 m, colour: yellow}
      M5: {from: SHUNT.sys, to: BUS-N, size: 2 AWG, length: 0.3 m, colour: yellow}
  FEED:
    name: Panel feeder
    service: feeder
    current: 30 A
    conductors:
      D1: {from: F-PANEL.load, to: PANEL, size: 6 AWG, length: 1.5 m}
      D2: {from: PANEL-N, to: BUS-N, size: 6 AWG, length: 1.5 m, colour: yellow}
  CRANK:
    name: Starter
    service: cranking
    current: 200 A
    conductors:
      S1: {from: BAT-S.pos, to: SW-S.in, size: 2/0 AWG, length: 0.4 m, role: cranking, reason: cranking motor}
      S2: {from: SW-S.out, to: STARTER.B, size: 2/0 AWG, length: 1.5 m, role: cranking, reason: cranking motor}
      S3: {from: STARTER.case, to: BUS-N, size: 2/0 AWG, length: 1.5 m, role: cranking, reason: cranking motor,
        colour: yellow}
      S4: {from: BUS-N, to: BAT-S.neg, size: 2/0 AWG, length: 0.4 m, role: cranking, reason: cranking motor,
        colour: yellow}
  ALT-OUT:
    name: Alternator, back through the engine block
    service: charging
    current: 60 A
    conductors:
      A1: {from: ALT.B, to: F-ALT.load, size: 6 AWG, length: 2 m}
  CHARGE:
    name: Shore charger
    service: charging
    current: 20 A
    conductors:
      C1: {from: CHARGER.out, to: F-CHARGER.load, size: 10 AWG, length: 2 m}
      C2: {from: CHARGER.neg, to: BUS-N, size: 10 AWG, length: 2 m, colour: yellow}
      C3: {from: F-CHARGER.line, to: BAT-H.pos, size: 10 AWG, length: 0.1 m}
  SENSE:
    name: Voltage sense of the regulator
    service: sense
    current: 0.1 A
    conductors:
      V1: {from: BAT-H.pos, to: F-SENSE.line, size: 16 AWG, length: 0.1 m}
      V2: {from: F-SENSE.load, to: REGULATOR.sense, size: 16 AWG, length: 2 m}
      V3: {from: REGULATOR.gnd, to: BUS-N, size: 16 AWG, length: 2 m, colour: yellow}
  WATCH:
    name: Battery monitor
    service: sense
    current: 0.05 A
    conductors:
      Q1: {from: BAT-H.pos, to: F-MONITOR.line, size: 16 AWG, length: 0.1 m}
      Q2: {from: F-MONITOR.load, to: SHUNT.vbat, size: 16 AWG, length: 0.4 m}
  PLOTTER:
    name: Chart plotter
    service: electronics
    feed: P1
    protect: 5 A
    cable: 16 AWG
    route: [cabin-way]
    tail: 0.5 m
    load: plotter
    zone: CABIN
  LIGHTS:
    name: Cabin lights
    service: lighting
    feed: P2
    protect: 10 A
    legend: LIGHTS 10 A
    cable: 18 AWG
    bare_tail: 6 in
    route: [cabin-way]
    tail: 1 m
    load: cabin-lights
    zone: CABIN
  PUMP:
    name: Cooling pump
    service: pump
    feed: P3
    protect: 15 A
    cable: 14 AWG
    route: [cabin-way, engine-way]
    tail: 0.5 m
    load: cooling-pump
    zone: ENGINE-SPACE
  BOW-LIGHT:
    name: Bow light
    service: navigation-light
    feed: P4
    protect: 5 A
    cable: 16 AWG
    length: 16 ft 5 in
    load: bow-light
    zone: BOW
  SENSOR:
    name: Vapour sensor
    service: alarm
    feed: P5
    protect: 5 A
    cable: 16 AWG
    length: 4 m
    load: vapour-sensor
    zone: FUEL

bonds:
  B1: {from: ANODE, to: BUS-N, size: 8 AWG, length: 4 m, colour: green}
joints:
  J-ALT: {from: ALT.case, to: ENGINE}
  J-STARTER: {from: STARTER.case, to: ENGINE}
shields:
  PLOTTER-SHIELD: {joins: [PLOTTER.load.neg]}

conditions:
  under-way:
    loads: {PLOTTER: 1 A, LIGHTS: 3 A, PUMP: 8 A, BOW-LIGHT: 0.5 A, SENSOR: 0.2 A}
    sources: {ALT: 60 A}
  moored:
    loads: {LIGHTS: 3 A, SENSOR: 0.2 A}
    sources: {CHARGER: 20 A}
  start:
    loads: {STARTER: 200 A}
    short_time: 5 s
"""

HULL_YAML = """\
hull: SKIFF-1
class: skiff
revision: 2
status: in-build
options: []
"""

PARTS_FILE, CLASS_FILE, HULL_FILE = "parts/parts.yaml", "classes/skiff/class.yaml", "hulls/skiff-1.yaml"


@dataclass(frozen=True)
class Yard:
    """Hold the files of a yard by name, and make edited copies of it."""

    files: Mapping[str, str]

    def edit(self, old: str, new: str) -> Yard:
        """Return the yard with one text changed; it must occur exactly once in all files together."""
        count = sum(text.count(old) for text in self.files.values())
        assert count == 1, f"{old!r} occurs {count} times"
        return Yard({name: text.replace(old, new) for name, text in self.files.items()})

    def without(self, *starts: str) -> Yard:
        """Return the yard without the lines that start so; each must be one line of all files together."""
        yard = self
        for start in starts:
            lines = [x for text in yard.files.values() for x in text.splitlines() if x.strip().startswith(start)]
            assert len(lines) == 1, f"{len(lines)} lines start with {start!r}"
            yard = yard.edit(f"{lines[0]}\n", "")
        return yard

    def also_in_yard(self, text: str) -> Yard:
        """Return the yard with more sections in its own file."""
        return Yard({**self.files, "yard.yaml": self.files["yard.yaml"] + text})

    def also(self, text: str) -> Yard:
        """Return the yard with more sections for the class, in a file of their own."""
        return self.with_file(f"classes/skiff/more-{len(self.files)}.yaml", text)

    def also_parts(self, text: str) -> Yard:
        """Return the yard with more parts, one a line."""
        lines = "".join(f"  {line}\n" for line in text.strip().splitlines())
        return self.with_file(f"parts/more-{len(self.files)}.yaml", f"parts:\n{lines}")

    def with_file(self, name: str, text: str) -> Yard:
        """Return the yard with one file more."""
        assert name not in self.files, name
        return Yard({**self.files, name: text})

    def line(self, file: str, number: int) -> str:
        """Return a line of a file without its indentation; empty for a place that is in no file."""
        return self.files[file].splitlines()[number - 1].strip() if file else ""


SOUND = Yard({"yard.yaml": YARD_YAML, PARTS_FILE: PARTS_YAML, CLASS_FILE: CLASS_YAML, HULL_FILE: HULL_YAML})
LAW_ONLY = SOUND.edit("[cfr33-183-i, voluntary-dc]", "[cfr33-183-i]")
PRACTICE_ONLY = SOUND.edit("[cfr33-183-i, voluntary-dc]", "[voluntary-dc]")

_SHORT = {"": NEITHER, "cfr33-183-i": LAW, "voluntary-dc": PRACTICE}
Told = tuple[str, str, str, str]
"""Check, part, limit sets (LAW, PRACTICE, BOTH, NEITHER), and the text of the line that is pointed at."""


def check_yard(yard: Yard, today: datetime.date = TODAY) -> FleetResult:
    """Write a yard to a new folder, check it, and return the result."""
    with tempfile.TemporaryDirectory() as folder:
        for name, text in yard.files.items():
            path = Path(folder, name)
            path.parent.mkdir(parents=True, exist_ok=True)
            path.write_text(text, encoding="utf-8")
        return check_fleet(Path(folder), today=today)


def the_hull(result: FleetResult, name: str = HULL) -> SubjectResult:
    """Return what was found of a hull; the yard's files must be sound, or nothing was studied."""
    assert not result.unstudied, [f"{o.at}: {o.fault}" for o in result.file_outcomes]
    return next(subject for subject in result.subjects if subject.id == name)


def outcomes(yard: Yard, verdict: Verdict, today: datetime.date = TODAY) -> list[Outcome]:
    """Return the outcomes of the hull and of the files that ended with a verdict."""
    result = check_yard(yard, today)
    return [o for o in (*result.file_outcomes, *the_hull(result).outcomes) if o.verdict is verdict]


def tell(yard: Yard, some: list[Outcome]) -> list[Told]:
    """Return outcomes as sorted tuples of check, part, limit sets and line."""
    sets: dict[tuple[str, str, str], set[str]] = {}
    for outcome in some:
        line = yard.line(outcome.at.file, outcome.at.line)
        sets.setdefault((outcome.check, outcome.part, line), set()).add(_SHORT[outcome.limit_set])
    return sorted(
        (check, part, BOTH if names == {LAW, PRACTICE} else "".join(names), line)
        for (check, part, line), names in sets.items()
    )


def found(yard: Yard, today: datetime.date = TODAY) -> list[Told]:
    """Check a yard and return everything that was found."""
    return tell(yard, outcomes(yard, Verdict.FINDING, today))


def not_assessed(yard: Yard) -> list[Told]:
    """Check a yard and return what could not be assessed."""
    return tell(yard, outcomes(yard, Verdict.NOT_ASSESSED))


def passed(yard: Yard) -> set[tuple[str, str, str]]:
    """Check a yard and return what passed: check, part, limit set ("law", "practice" or "")."""
    return {(o.check, o.part, _SHORT[o.limit_set]) for o in outcomes(yard, Verdict.PASSED)}


def finding(yard: Yard, check: str, part: str, limit_set: str = "") -> Outcome:
    """Return the one finding of a check at a part, under a limit set if one is named."""
    (one,) = _matching(yard, check, part, limit_set)
    return one


def _matching(yard: Yard, check: str, part: str, limit_set: str) -> Iterator[Outcome]:
    for outcome in outcomes(yard, Verdict.FINDING):
        if (outcome.check, outcome.part) == (check, part) and limit_set in ("", _SHORT[outcome.limit_set]):
            yield outcome
