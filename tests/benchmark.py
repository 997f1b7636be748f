"""Measure a check of a large fleet: `python tests/benchmark.py --help` (a script, not a test).

A seeded generator writes sister hulls of the example class into a temporary folder: `--hulls` of
them with `--distinct` different as-built contents. Each measurement runs in a process of its own,
so that its peak memory is its own; every figure is a median. Machines differ and are shared, so
each time also stands as a multiple of a fixed loop that is timed in the same process, and the
whole check as a multiple of merely parsing the same bytes.

`--study` measures one large hull instead: where the processor time of its study goes, and what
ngspice takes for the currents alone, called once for each switch state and condition. `--kept`
measures what a cache saves.
"""

from __future__ import annotations

import argparse
import datetime
import gc
import json
import random
import resource
import shutil
import statistics
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any

ROOT = Path(__file__).resolve().parents[1]
EXAMPLE = ROOT / "fleet_example"
CLASS = EXAMPLE / "classes" / "tindral-36"
TODAY = datetime.date(2026, 12, 1)
OPTION_SETS = (
    (),
    ("OPT-SOL2",),
    ("OPT-THR12",),
    ("OPT-24V",),
    ("OPT-THR12", "OPT-SOL2"),
    ("OPT-24V", "OPT-SOL2"),
)
STATUSES = ("planned", "in-build", "signed", "delivered")
SHELL_RUNS = 7

EXTRA_PANELS = 3
PANEL_CIRCUITS = 38
STUDY_CONDITIONS = ("hotel", "night_passage", "anchoring", "crank", "motoring", "shore_power")

Timed = dict[str, float]


def write_fleet(folder: Path, *, hulls: int, distinct: int, seed: int) -> None:
    """Write the example's parts and class, and hulls whose measured tails the seed decides."""
    chance = random.Random(seed)
    for name in ("yard.yaml", "parts", "classes"):
        source = EXAMPLE / name
        (shutil.copytree if source.is_dir() else shutil.copy)(source, folder / name)
    branches = _branches()
    contents = [_content(chance, branches, number) for number in range(distinct)]
    (folder / "hulls").mkdir()
    for number in range(hulls):
        options, changes = contents[number % distinct]
        text = (
            "# yaml-language-server: $schema=../../schemas/hull.json\n"
            f"hull: TND-{number:04}\nclass: tindral-36\nrevision: 4\nstatus: {STATUSES[number % len(STATUSES)]}\n"
            f"options: [{', '.join(options)}]\n{changes}"
        )
        (folder / "hulls" / f"tnd-{number:04}.yaml").write_text(text, encoding="utf-8")


def _branches() -> dict[str, float]:
    """Return the branch circuits of the example's panel, which no option takes away, and their tails, m."""
    import yaml

    circuits = yaml.safe_load((CLASS / "panel.yaml").read_text(encoding="utf-8"))["circuits"]
    return {name: float(c["tail"].removesuffix(" m")) for name, c in circuits.items() if "cable" in c}


def _content(chance: random.Random, branches: dict[str, float], number: int) -> tuple[tuple[str, ...], str]:
    """Return options and as-built changes; tenths of a millimetre tell every content apart."""
    lines = ["changes:"]
    for index, circuit in enumerate(chance.sample(sorted(branches), chance.randrange(1, 5)), start=1):
        tail_m = branches[circuit] * chance.uniform(0.85, 0.95) + (number / 10_000 if index == 1 else 0)
        lines += [
            f"  DEV-{index}:",
            f"    what: tail of {circuit} measured as built",
            "    state: recorded",
            "    set:",
            "      circuits:",
            f"        {circuit}: {{tail: {tail_m:.4f} m}}",
        ]
    return OPTION_SETS[number % len(OPTION_SETS)], "\n".join(lines) + "\n"


def write_large_hull(folder: Path) -> None:
    """Write one hull of about 400 conductors, 8 switch states and 6 conditions.

    The example's class with more distribution panels of the same circuits. Each is fed over a
    change-over switch, of which neither way shows all that the other does: 2 x 2 x 2 states.
    """
    import yaml

    for name in ("yard.yaml", "parts", "classes"):
        source = EXAMPLE / name
        (shutil.copytree if source.is_dir() else shutil.copy)(source, folder / name)
    design = folder / "classes" / CLASS.name
    shutil.rmtree(design / "options")
    ways = {"one": [["a", "out"]], "two": [["b", "out"]]}
    change_over = {"kind": "switch", "name": "change-over switch", "posts": ["a", "b", "out"], "states": ways,
                   "continuous": "300 A", "intermittent": "500 A", "contact_resistance": "0.1 mohm"}  # fmt: skip
    _write(folder / "parts" / "study.yaml", {"parts": {"change-over": change_over}})
    panel = yaml.safe_load((design / "panel.yaml").read_text("utf-8"))
    conditions = yaml.safe_load((design / "conditions.yaml").read_text("utf-8"))
    conditions["states"] = {"in-use": conditions["states"]["in-use"]}
    conditions["conditions"] = {name: conditions["conditions"][name] for name in STUDY_CONDITIONS}
    for letter in "QRSTUV"[:EXTRA_PANELS]:
        _write(design / f"panel-{letter}.yaml", _panel(panel, letter))
        for condition in conditions["conditions"].values():
            loads = condition["loads"]
            more = {letter + name[1:]: amps for name, amps in loads.items() if name in panel["circuits"]}
            condition["loads"] = loads | more
            condition["switches"][f"SEL-{letter}"] = "one"
    _write(design / "conditions.yaml", conditions)
    (folder / "hulls").mkdir()
    hull = {"hull": "TND-0001", "class": CLASS.name, "revision": 4, "status": "planned", "options": []}
    _write(folder / "hulls" / "tnd-0001.yaml", hull)


def _write(file: Path, data: Any) -> None:
    """Write data as JSON, which is YAML too, and never has an alias."""
    file.write_text(json.dumps(data, indent=1) + "\n", encoding="utf-8")


def _panel(panel: dict[str, Any], letter: str) -> dict[str, Any]:
    """Return a panel like the example's, its ids told apart by a letter, fed over a change-over switch."""
    branches = [dict(circuit) for circuit in panel["circuits"].values() if "cable" in circuit]
    branches += [dict(circuit) for circuit in branches[: PANEL_CIRCUITS - len(branches)]]
    for number, circuit in enumerate(branches, start=1):
        circuit["feed"] = f"PN{letter}-{number:02}"
    buses = {f"BUS-{letter}P": panel["devices"]["BUS-PP"], f"BUS-{letter}N": panel["devices"]["BUS-PN"]}
    positions = panel["devices"]["BUS-PP"]["positions"]
    positions = positions | {"first": f"PN{letter}-01", "last": f"PN{letter}-38", "returns": f"BUS-{letter}N"}
    devices = {
        f"F-{letter}A": panel["devices"]["F-PNL"], f"F-{letter}B": panel["devices"]["F-PNL"],
        f"SEL-{letter}": {"part": "change-over", "zone": "Z-BATT"},
        f"CB-{letter}": panel["devices"]["CB-PM"] | {"mount": {"load": f"BUS-{letter}P"}},
        **buses, f"BUS-{letter}P": panel["devices"]["BUS-PP"] | {"positions": positions},
    }  # fmt: skip
    feeder = {
        "name": f"feeder of panel {letter}", "service": "feeder", "current": "60 A",
        "conductors": {
            f"W{letter}{number}": {"from": start, "to": end, "size": "2/0 AWG", "length": length}
            for number, (start, end, length) in enumerate([
                ("BUS-HP", f"F-{letter}A.line", "0.05 m"), ("BUS-HP", f"F-{letter}B.line", "0.05 m"),
                (f"F-{letter}A.load", f"SEL-{letter}.a", "0.4 m"), (f"F-{letter}B.load", f"SEL-{letter}.b", "0.4 m"),
                (f"SEL-{letter}.out", f"CB-{letter}.line", "2.6 m"), (f"BUS-{letter}N", "BUS-N", "2.6 m"),
            ])
        },
    }  # fmt: skip
    circuits = {f"{letter}{number:02}": circuit for number, circuit in enumerate(branches, start=1)}
    return {"devices": devices, "circuits": {f"M-{letter}": feeder, **circuits}}


def timed(run: Callable[[], Any]) -> tuple[float, Any]:
    """Return the seconds that a call took, and its value."""
    start = time.perf_counter()
    value = run()
    return time.perf_counter() - start, value


def reference_loop() -> None:
    """Do a fixed amount of plain work: the yardstick of a machine."""
    seen: dict[int, str] = {}
    for number in range(400_000):
        seen[number * 7919 % 65_521] = f"{number}"


def measure_check(folder: Path, workers: int) -> Timed:
    """Check a fleet and write its reports; return the seconds of each stage and the memory, MB."""
    from checker import pipeline
    from checker.output.files import write_reports

    spent: Timed = {}

    def watch(name: str, stage: str) -> None:
        work = getattr(pipeline, name)

        def watched(*words: Any, **named: Any) -> Any:
            seconds, value = timed(lambda: work(*words, **named))
            spent[stage] = spent.get(stage, 0.0) + seconds
            return value

        setattr(pipeline, name, watched)

    loop, _ = timed(reference_loop)
    for name, stage in (("read_yard", "read"), ("assemble", "assemble"), ("_study_all", "study")):
        watch(name, stage)
    whole, result = timed(lambda: pipeline.check_fleet(folder, today=TODAY, workers=workers))
    spent["gather"] = whole - sum(spent.values())
    cards = {card.id: card for card in pipeline.all_cards()}
    with tempfile.TemporaryDirectory() as reports:
        spent["write"], _ = timed(lambda: write_reports(result, cards, Path(reports)))
    spent["whole"] = whole + spent["write"]
    spent["loop"] = loop
    spent["peak MB"] = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024
    # Nothing where the fleet is too small for worker processes.
    spent["peak MB of the largest worker"] = resource.getrusage(resource.RUSAGE_CHILDREN).ru_maxrss / 1024
    return spent


def measure_parsing(folder: Path, _: int) -> Timed:
    """Parse the same bytes and throw the result away; the garbage collector is off, as it is in a check."""
    import yaml

    texts = [path.read_bytes() for path in sorted(folder.rglob("*.yaml"))]
    gc.disable()
    loop, _ = timed(reference_loop)
    events, _ = timed(lambda: [None for text in texts for _ in yaml.parse(text, Loader=yaml.CSafeLoader)])
    load, _ = timed(lambda: [yaml.load(text, Loader=yaml.CSafeLoader) for text in texts])
    return {"events": events, "load": load, "loop": loop, "bytes": float(sum(map(len, texts)))}


def measure_reading(folder: Path, _: int) -> Timed:
    """Start, read and assemble a fleet, and study nothing: what no cache can save."""
    from checker.boat.assemble import assemble
    from checker.reading.yard_files import read_yard

    gc.disable()
    loop, _ = timed(reference_loop)
    seconds, _ = timed(lambda: assemble(read_yard(folder)))
    return {"read and assemble": seconds, "loop": loop}


def measure_study(folder: Path, _: int) -> Timed:
    """Study one hull; return the processor seconds of each part, and those of ngspice for the currents alone."""
    from checker import pipeline
    from checker.checks.catalogue import CHECKS
    from checker.checks.check import Case, House
    from checker.limits.limit_set import load_limit_set
    from tests.networks import studies_of

    gc.disable()
    spent: Timed = {}

    def spend(name: str, work: Callable[[], Any]) -> Any:
        start = time.process_time()
        value = work()
        spent[name] = spent.get(name, 0.0) + time.process_time() - start
        return value

    loop = time.process_time()
    reference_loop()
    loop = time.process_time() - loop
    ((_, studies),) = studies_of(folder)
    for name, work in (
        ("graph and states", lambda: (studies.network, studies.states)),
        ("potentials", lambda: studies.potentials),
        ("what could feed a fault", lambda: studies.exposures),
        ("solved conditions", lambda: studies.conditions),
        ("fault levels", lambda: studies.fault_levels),
        ("far ends", lambda: studies.far_ends),
        ("coordination", lambda: studies.selectivity),
        ("banks", lambda: studies.banks),
    ):
        spend(name, work)
    sets = tuple(load_limit_set(name) for name in ("cfr33-183-i", "voluntary-dc"))
    case = Case(studies, sets[0], sets, House())
    for check in CHECKS:
        family = check.run.__module__.rsplit(".", 1)[-1]
        for one in sets if check.is_per_set else sets[:1]:
            spend(f"checks: {family}", lambda check=check, one=one: list(check.run(case.under(one))))  # type: ignore[misc]
    whole = {"all studies and checks": sum(spent.values())}
    facts = {"conductors": len(studies.boat.conductors), "states": len(studies.states.kept),
             "conditions": len(studies.boat.conditions), "posts": len(studies.network.posts)}  # fmt: skip
    assert facts["states"] == 2**EXTRA_PANELS and facts["conditions"] == len(STUDY_CONDITIONS)
    whole["the same in one call"], _ = _processor(
        lambda: pipeline.run_checks(pipeline.study_boat(studies.boat), sets, House())
    )
    return {**spent, **whole, **_currents_alone(studies), "loop": loop, **facts}


def _processor(work: Callable[[], Any]) -> tuple[float, Any]:
    """Return the processor seconds of a call, and its value."""
    start = time.process_time()
    value = work()
    return time.process_time() - start, value


def _currents_alone(studies: Any) -> Timed:
    """Return what the currents of every condition in every state take, here and by ngspice, one call each."""
    from checker.network.flow import Grid
    from tests.spice import NGSPICE, Netlist, solved

    copper = studies.coppers.working
    pairs = [(potentials.state, op) for potentials in studies.potentials for op in studies.operations]

    def ours() -> None:
        for state in dict.fromkeys(state for state, _ in pairs):
            grid = Grid(studies.network, state, copper, is_full=True)
            for other, operation in pairs:
                if other is state:
                    assert grid.solve(operation.draws, operation.feeds).currents_a

    found: Timed = {}
    found["currents alone, here"], _ = _processor(ours)
    if NGSPICE is None:
        return found
    netlists = []
    for state, operation in pairs:
        netlists.append(Netlist(studies.network, state.closed, copper.ohm_mm2_per_m, is_full=True))
        netlists[-1].add(operation.draws, operation.feeds)
    before = resource.getrusage(resource.RUSAGE_CHILDREN)
    found["currents alone, ngspice, waiting"], _ = timed(lambda: [solved([netlist]) for netlist in netlists])
    after = resource.getrusage(resource.RUSAGE_CHILDREN)
    used = after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime
    found["currents alone, ngspice"] = used
    return found


MEASUREMENTS = {"check": measure_check, "parsing": measure_parsing, "reading": measure_reading, "study": measure_study}


def medians(what: str, folder: Path, workers: int, runs: int) -> Timed:
    """Return the medians over several processes of their own."""
    command = [
        sys.executable,
        __file__,
        "--measure",
        what,
        "--folder",
        str(folder),
        "--workers",
        str(workers),
    ]
    found: list[Timed] = []
    for _ in range(runs):
        run = subprocess.run(command, capture_output=True, text=True, check=True, cwd=ROOT)
        found.append(json.loads(run.stdout))
    return {key: statistics.median(one[key] for one in found) for key in found[0]}


def shell_seconds(words: list[str]) -> float:
    """Return the median seconds of a command from its start to its end."""
    return statistics.median(
        timed(lambda: subprocess.run(words, cwd=ROOT, capture_output=True, check=False))[0] for _ in range(SHELL_RUNS)
    )


def print_times(times: Timed, keys: list[str]) -> None:
    """Print seconds, each with its multiple of the reference loop."""
    for key in keys:
        print(f"  {key:10} {times[key]:8.3f} s  {times[key] / times['loop']:8.1f} loops")


def print_fleet(folder: Path, workers: list[int], runs: int) -> None:
    """Print what parsing and checking a fleet cost."""
    parsing = medians("parsing", folder, 1, runs)
    print(f"parsing its {parsing['bytes'] / 1e6:.2f} MB and no more (reference loop {parsing['loop']:.3f} s)")
    print_times(parsing, ["events", "load"])
    for number in workers:
        check = medians("check", folder, number, runs)
        print(f"check with {number} {'worker' if number == 1 else 'workers'} (reference loop {check['loop']:.3f} s)")
        print_times(check, ["read", "assemble", "study", "gather", "write", "whole"])
        for name in ("events", "load"):
            print(f"  {check['whole'] / parsing[name]:.1f} times the parsing ({name})")
        for key in (key for key, value in check.items() if key.startswith("peak") and value):
            print(f"  {key}: {check[key]:.0f}")


def print_kept(folder: Path, runs: int) -> None:
    """Print what a run costs with nothing kept, with all studies kept, and after one line of one hull has changed."""
    reading = medians("reading", folder, 1, runs)
    print(f"  {'reading and assembling alone':34}{reading['read and assemble']:8.3f} s")
    with tempfile.TemporaryDirectory() as kept:
        words = [sys.executable, "-m", "checker", "check", str(folder), "--today", TODAY.isoformat()]
        words_kept = [*words, "--cache", kept]

        def shown(name: str, command: list[str]) -> None:
            seconds, _ = timed(lambda: subprocess.run(command, cwd=ROOT, capture_output=True, check=False))
            print(f"  {name:34}{seconds:8.3f} s  {seconds / reading['read and assemble']:5.1f} times the reading")

        shown("no cache", words)
        shown("cold: the cache is empty", words_kept)
        shown("warm: nothing has changed", words_kept)
        hull = sorted((folder / "hulls").glob("*.yaml"))[-1]
        text = hull.read_text("utf-8")
        hull.write_text(text.replace("tail: ", "tail: 1", 1), "utf-8")
        shown("warm: one line of one hull changed", words_kept)
        hull.write_text(text, "utf-8")


def print_study(folder: Path, runs: int) -> None:
    """Print where the processor time of one large hull goes."""
    times = medians("study", folder, 1, runs)
    facts = ("conductors", "posts", "states", "conditions")
    print(", ".join(f"{times.pop(name):.0f} {name}" for name in facts) + f"; medians of {runs}; processor seconds")
    loop, whole = times.pop("loop"), times["all studies and checks"]
    print(f"(reference loop {loop:.3f} s)")
    for name, seconds in times.items():
        print(f"  {name:36}{seconds:8.3f} s {seconds / loop:8.1f} loops {100 * seconds / whole:6.1f} % of all")
    if "currents alone, ngspice" in times:
        ngspice = times["currents alone, ngspice"]
        print(f"  all studies and checks: {whole / ngspice:.2f} times ngspice's currents alone")


def print_shell() -> None:
    """Print what a person waits for at the shell."""
    bare = shell_seconds([sys.executable, "-c", "pass"])
    version = shell_seconds([sys.executable, "-m", "checker", "--version"])
    example = shell_seconds([sys.executable, "-m", "checker", "check", "fleet_example", "--today", TODAY.isoformat()])
    print(f"bare interpreter            {bare:8.3f} s")
    print(f"fairloom --version          {version:8.3f} s  {version / bare:.1f} times the bare interpreter")
    print(f"fairloom check fleet_example{example:8.3f} s")


def main() -> None:
    """Read the arguments; measure and print."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--hulls", type=int, default=1000, metavar="N", help="hulls of the fleet (default 1000)")
    parser.add_argument("--distinct", type=int, default=50, metavar="D", help="different contents (default 50)")
    parser.add_argument("--seed", type=int, default=1, metavar="S", help="seed of the generator (default 1)")
    parser.add_argument("--runs", type=int, default=3, metavar="R", help="runs to take the median of (default 3)")
    parser.add_argument("--workers", type=int, nargs="+", default=[1, 2], metavar="W", help="(default 1 2)")
    parser.add_argument("--folder", type=Path, help="write the fleet here and keep it")
    parser.add_argument("--study", action="store_true", help="measure the study of one large hull instead")
    parser.add_argument("--kept", action="store_true", help="measure runs with and without kept studies instead")
    parser.add_argument("--measure", choices=sorted(MEASUREMENTS), help=argparse.SUPPRESS)
    options = parser.parse_args()
    sys.path.insert(0, str(ROOT))
    if options.measure:
        print(json.dumps(MEASUREMENTS[options.measure](options.folder, options.workers[0])))
        return
    with tempfile.TemporaryDirectory() as scratch:
        folder = options.folder or Path(scratch) / "fleet"
        folder.mkdir(parents=True)
        if options.study:
            write_large_hull(folder)
            print_study(folder, options.runs)
            return
        write_fleet(folder, hulls=options.hulls, distinct=options.distinct, seed=options.seed)
        print(f"{options.hulls} hulls, {options.distinct} contents, seed {options.seed}; medians of {options.runs}")
        if options.kept:
            print_kept(folder, options.runs)
            return
        print_fleet(folder, options.workers, options.runs)
    print_shell()


if __name__ == "__main__":
    main()
