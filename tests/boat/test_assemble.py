"""A hull is its class, its options and its changes; whatever names nothing or changes nothing is told."""

from __future__ import annotations

import random
from pathlib import Path
from typing import Any

import pytest
import yaml

from checker.boat.assemble import MOST_OPTION_SETS, Option, assemble, option_sets
from checker.finding import NOWHERE
from checker.reading.yard_files import read_yard
from tests.dory_yard import CLASS, DORY, HULL, OPTION, checked, edited, place, told, write

CLASS_FILE, OPTION_FILE, HULL_FILE = (
    "classes/dory-14/class.yaml",
    "classes/dory-14/options/lamp.yaml",
    "hulls/dory-1.yaml",
)
IDLE = "correct the id or the value, or take the line out"


def option(name: str, *excludes: str) -> Option:
    return Option(name, name, excludes, {}, {}, NOWHERE)


def changes(text: str) -> dict[str, str]:
    """Return the yard with an as-built change DEV-1 whose patch is a text in flow style."""
    return {**DORY, HULL_FILE: f"{HULL}changes:\n  DEV-1:\n    what: as built\n    set: {text}\n"}


# --- option sets


def test_every_set_of_options_that_do_not_exclude_each_other_is_listed_small_ones_first() -> None:
    options = {name: option(name) for name in ("C", "A", "B")}
    options["C"] = option("C", "A")
    assert option_sets(options) == [(), ("A",), ("B",), ("C",), ("A", "B"), ("B", "C")]


def test_excluding_counts_in_both_directions() -> None:
    assert option_sets({"A": option("A", "B"), "B": option("B")}) == [(), ("A",), ("B",)]
    assert option_sets({"A": option("A"), "B": option("B", "A")}) == [(), ("A",), ("B",)]


def test_a_class_without_options_has_one_set() -> None:
    assert option_sets({}) == [()]


def test_more_option_sets_than_can_be_studied_are_a_fault_and_not_a_hang(tmp_path: Path) -> None:
    files = {**DORY}
    for number in range(12):
        text = OPTION.replace("OPT-LAMP", f"OPT-{number}").replace("C3", f"X{number}")
        files[f"classes/dory-14/options/o{number}.yaml"] = text
    assembly = assemble(read_yard(write(tmp_path, files)))
    assert [(fault.check, str(fault.at), fault.message) for fault in assembly.faults] == [
        (
            "bad-value",
            place(CLASS_FILE, "class:"),
            f"class “dory-14” has more than {MOST_OPTION_SETS} legal option sets",
        )
    ]
    assert [subject.id for subject in assembly.subjects] == ["dory-14", "DORY-1"]


def test_every_option_set_and_every_hull_is_a_subject_and_alike_ones_share_a_key(tmp_path: Path) -> None:
    files = {**DORY, "hulls/dory-2.yaml": HULL.replace("DORY-1", "DORY-2").replace("[]", "[OPT-LAMP]")}
    assembly = assemble(read_yard(write(tmp_path, files)))
    assert [(subject.id, subject.is_hull, subject.options) for subject in assembly.subjects] == [
        ("dory-14", False, ()),
        ("dory-14 + OPT-LAMP", False, ("OPT-LAMP",)),
        ("DORY-1", True, ()),
        ("DORY-2", True, ("OPT-LAMP",)),
    ]
    keys = {subject.id: subject.key for subject in assembly.subjects}
    assert keys["DORY-1"] == keys["dory-14"]
    assert keys["DORY-2"] == keys["dory-14 + OPT-LAMP"]
    assert keys["DORY-1"] != keys["DORY-2"]


def test_the_order_in_which_a_hull_names_its_options_does_not_matter(tmp_path: Path) -> None:
    other = OPTION.replace("OPT-LAMP", "OPT-A").replace("C3", "C4").replace("PNL-03", "PNL-04")
    files = {**DORY, "classes/dory-14/options/a.yaml": other, HULL_FILE: HULL.replace("[]", "[OPT-LAMP, OPT-A]")}
    files["hulls/dory-2.yaml"] = HULL.replace("DORY-1", "DORY-2").replace("[]", "[OPT-A, OPT-LAMP]")
    first, second = [s for s in assemble(read_yard(write(tmp_path, files))).subjects if s.is_hull]
    assert first.options == second.options == ("OPT-A", "OPT-LAMP")
    assert first.key == second.key


# --- hulls and options that name nothing


@pytest.mark.parametrize(
    ("old", "new", "what", "remedy"),
    [
        ("[]", "[OPT-LAMPS]", "there is no option “OPT-LAMPS”", "did you mean “OPT-LAMP”?"),
        ("[]", "[OPT-LAMP, HEATING]", "there is no option “HEATING”", "add it, or name one that exists (1 known)"),
        ("dory-14", "dory-41", "there is no class “dory-41”", "did you mean “dory-14”?"),
        ("dory-14", "sloop", "there is no class “sloop”", "add it, or name one that exists (1 known)"),
    ],
)
def test_a_hull_of_an_unknown_option_or_class_is_told_and_not_studied(
    tmp_path: Path, old: str, new: str, what: str, remedy: str
) -> None:
    files = edited(HULL_FILE, old, new)
    result = checked(tmp_path, files)
    at = place(HULL_FILE, what.split("“")[1].rstrip("”"), files)
    assert told(result) == [("unknown-reference", at, what, remedy)]
    assert result.unstudied == ("hull DORY-1",)


def test_options_that_exclude_each_other_on_one_hull_are_told(tmp_path: Path) -> None:
    other = OPTION.replace("OPT-LAMP", "OPT-MAST").replace("name: Third", "excludes: [OPT-LAMP]\nname: Other")
    files = {**DORY, "classes/dory-14/options/mast.yaml": other, HULL_FILE: HULL.replace("[]", "[OPT-MAST, OPT-LAMP]")}
    result = checked(tmp_path, files)
    assert told(result) == [
        ("excluded-options", place(HULL_FILE, "[OPT-MAST", files), "OPT-LAMP and OPT-MAST exclude each other",
         "take one of them out")
    ]  # fmt: skip
    assert result.unstudied == ("hull DORY-1",)


def test_an_option_that_excludes_an_unknown_one_is_told(tmp_path: Path) -> None:
    files = edited(OPTION_FILE, "changes:", "excludes: [OPT-LAMB]\nchanges:")
    assert told(checked(tmp_path, files)) == [
        ("unknown-reference", place(OPTION_FILE, "OPT-LAMB", files), "there is no option “OPT-LAMB”",
         "did you mean “OPT-LAMP”?")
    ]  # fmt: skip


# --- the same id twice


def test_an_id_in_two_files_of_a_class_is_told_with_both_places(tmp_path: Path) -> None:
    more = "devices:\n  NEG: {part: stud, zone: BOX}\n  EXTRA: {part: stud, zone: BOX}\n"
    files = {**DORY, "classes/dory-14/more.yaml": more}
    assert told(checked(tmp_path, files)) == [
        ("repeated-key", "classes/dory-14/more.yaml:2:3", "devices “NEG” is written twice in this class",
         f"the other one stands in {place(CLASS_FILE, 'NEG: {part')}")
    ]  # fmt: skip


def test_sections_of_several_files_of_a_class_are_merged(tmp_path: Path) -> None:
    more = "devices:\n  EXTRA: {part: stud, zone: BOX}\n"
    assembly = assemble(read_yard(write(tmp_path, {**DORY, "classes/dory-14/more.yaml": more})))
    assert assembly.faults == []
    base = assembly.classes["dory-14"].base
    assert sorted(base.data["devices"]) == ["BAT", "EXTRA", "NEG", "POS", "SW"]
    assert str(base.key_span(("devices", "EXTRA"))) == "classes/dory-14/more.yaml:2:3"


def test_a_section_that_is_no_map_in_two_files_is_told(tmp_path: Path) -> None:
    result = checked(tmp_path, {**DORY, "classes/dory-14/more.yaml": "bonds: not recorded\n"})
    assert told(result) == [
        ("repeated-key", "classes/dory-14/more.yaml:1:1", "section “bonds” is written twice in this class", "")
    ]


def test_an_option_in_two_files_is_told(tmp_path: Path) -> None:
    result = checked(tmp_path, {**DORY, "classes/dory-14/options/lamp2.yaml": OPTION})
    assert told(result) == [
        ("repeated-key", "classes/dory-14/options/lamp2.yaml:1:9", "option “OPT-LAMP” is written twice",
         f"the other one stands in {OPTION_FILE}:1:9")
    ]  # fmt: skip


def test_a_hull_in_two_files_is_told(tmp_path: Path) -> None:
    result = checked(tmp_path, {**DORY, "hulls/dory-2.yaml": HULL})
    assert told(result) == [("repeated-key", "hulls/dory-2.yaml:1:7", "hull “DORY-1” is written in two files", "")]
    assert [subject.id for subject in result.subjects if subject.is_hull] == ["DORY-1"]


def test_a_part_in_two_files_is_told_and_nothing_is_studied(tmp_path: Path) -> None:
    result = checked(tmp_path, {**DORY, "parts/more.yaml": "parts:\n  stud: {kind: bus, rating: 50 A}\n"})
    assert told(result) == [
        ("repeated-key", "parts/more.yaml:2:3", "part “stud” is written twice",
         f"the other one stands in {place('parts/all.yaml', 'stud')}")
    ]  # fmt: skip
    assert result.subjects == ()
    assert result.unstudied == ("hull DORY-1", "option set dory-14", "option set dory-14 + OPT-LAMP")


def test_a_conductor_id_used_in_two_circuits_is_told(tmp_path: Path) -> None:
    trunk = "C9: {name: Link, service: feeder, current: 1 A, conductors: {W1: {from: POS, to: NEG, size: 6 AWG, length: 1 m}}}"
    files = edited(CLASS_FILE, "bonds: {}", "bonds: {W1: {from: NEG, to: NEG, size: 6 AWG, length: 1 m}}")
    files = edited(CLASS_FILE, "circuits:\n", f"circuits:\n  {trunk}\n", files)
    result = checked(tmp_path, files)
    places = sorted(
        (at, fault) for check, at, fault, _ in told(result) if (check, fault.split()[1]) == ("repeated-key", "“W1”")
    )
    assert len(places) == 2
    assert {fault for _, fault in places} == {"conductor “W1” is written twice aboard"}


# --- patches


def test_a_patch_that_changes_nothing_is_told_at_its_line(tmp_path: Path) -> None:
    files = changes("{circuits: {C1: {protect: 5 A, cable: 12 AWG}}}")
    assert told(checked(tmp_path, files)) == [
        ("patch-without-effect", place(HULL_FILE, "protect", files),
         "change DEV-1 changes circuits.C1.protect to what it already is, or removes nothing", IDLE)
    ]  # fmt: skip


def test_a_patch_that_removes_what_is_not_there_is_told(tmp_path: Path) -> None:
    files = changes("{circuits: {C7: null, C2: null}, conditions: {night: {loads: {C2: null}}}}")
    assert told(checked(tmp_path, files)) == [
        ("patch-without-effect", place(HULL_FILE, "C7", files),
         "change DEV-1 changes circuits.C7 to what it already is, or removes nothing", IDLE)
    ]  # fmt: skip


def test_a_change_that_sets_nothing_is_told(tmp_path: Path) -> None:
    files = changes("{}")
    assert told(checked(tmp_path, files)) == [
        (
            "patch-without-effect",
            place(HULL_FILE, "DEV-1", files),
            "change DEV-1 sets nothing",
            "write what was changed",
        )
    ]


def test_an_option_that_changes_nothing_is_told_once_for_all_its_hulls(tmp_path: Path) -> None:
    files = edited(OPTION_FILE, "circuits:", "devices: {SW: {zone: BOX}}\n  circuits:")
    files = edited(HULL_FILE, "[]", "[OPT-LAMP]", files)
    files["hulls/dory-2.yaml"] = files[HULL_FILE].replace("DORY-1", "DORY-2")
    assert told(checked(tmp_path, files)) == [
        ("patch-without-effect", place(OPTION_FILE, "zone: BOX}}", files),
         "option OPT-LAMP changes devices.SW.zone to what it already is, or removes nothing", IDLE)
    ]  # fmt: skip


@pytest.mark.parametrize("section", ["devices", "circuits", "conductors", "zones", "ways", "facts", "defaults"])
def test_a_patch_that_puts_a_scalar_where_a_map_belongs_is_refused_by_its_schema(tmp_path: Path, section: str) -> None:
    files = changes(f"{{{section}: 4}}")
    result = checked(tmp_path, files)
    assert [(check, at) for check, at, _, _ in told(result)] == [("bad-value", place(HULL_FILE, "4}", files))]
    assert result.unstudied == ("hull DORY-1",)


def test_a_hull_whose_change_removes_a_whole_section_is_told_and_does_not_crash(tmp_path: Path) -> None:
    for section in ("class", "zones", "devices", "ways", "defaults", "facts", "conditions", "states", "circuits"):
        result = checked(tmp_path / section, changes(f"{{{section}: null}}"))
        assert result.unstudied == ("hull DORY-1",) or section in ("facts", "conditions", "states", "circuits", "ways")
        if section == "class":
            assert [fault for _, _, fault, _ in told(result)] == ["class “dory-14” has no section “class”"]


# --- what is named but is not there


def found(tmp_path: Path, files: dict[str, str]) -> list[tuple[str, str, str]]:
    """Return place, message and remedy of each unknown reference."""
    return [
        (at, fault, remedy)
        for check, at, fault, remedy in told(checked(tmp_path, files))
        if check == "unknown-reference"
    ]


@pytest.mark.parametrize(
    ("old", "new", "at", "message", "remedy"),
    [
        ("BAT: {part: cell", "BAT: {part: cel", "cel,", "there is no part “cel”", "did you mean “cell”?"),
        ("SW: {part: toggle, zone: BOX}", "SW: {part: toggle, zone: BOXX}", "BOXX", "there is no zone “BOXX”",
         "did you mean “BOX”?"),
        ("keel: {zone: BOX", "keel: {zone: BOG", "BOG", "there is no zone “BOG”", "did you mean “BOX”?"),
        ("route: [keel]", "route: [keels]", "keels", "there is no way “keels”", "did you mean “keel”?"),
        ("protect: 5 A, cable: 14 AWG, route", "protect: 7 A, cable: 14 AWG, route", "7 A",
         "blade is not made at 7 A", "made at: 5 A, 10 A"),
        ("length: 3 m,\n    load: lamp", "length: 3 m,\n    load: lamb", "lamb", "there is no load part “lamb”",
         "did you mean “lamp”?"),
        ("W2: {from: SW.out", "W2: {from: SW.on", "W2", "W2 ends at “SW.on”, but SW has no such post",
         "its posts: SW.in, SW.out"),
        ("W3: {from: BAT.neg, to: NEG", "W3: {from: BAT.neg, to: NAG", "W3", "there is no post for W3 “NAG”",
         "did you mean “NEG”?"),
        ("takes: blade", "takes: blades", "blades", "there is no fuse or breaker part “blades”",
         "did you mean “blade”?"),
        ("branch_cable: twin", "branch_cable: twins", "twins", "there is no cable part “twins”",
         "did you mean “twin”?"),
        ("reference: NEG", "reference: NEGG", "NEGG", "there is no post “NEGG”", "did you mean “NEG”?"),
        ("moored: {kind: normal, switches: {SW:", "moored: {kind: normal, switches: {SWW:", "SWW",
         "there is no switch “SWW”", "did you mean “SW”?"),
        ("moored: {kind: normal, switches: {SW: closed", "moored: {kind: normal, switches: {SW: close", "close}",
         "there is no state of SW “close”", "did you mean “closed”?"),
        ("loads: {C1: 2 A, C2", "loads: {C7: 2 A, C2", "C7", "there is no circuit, load or source “C7”", None),
        ("bonds: {}", "bonds: {B1: {from: NEG, to: KEEL, size: 6 AWG, length: 1 m}}", "B1",
         "there is no post for B1 “KEEL”", None),
        ("shields: {}", "shields: {S1: {name: screen, joins: [NEG, BAT.nag]}}", "BAT.nag",
         "S1 ends at “BAT.nag”, but BAT has no such post", "its posts: BAT.pos, BAT.neg"),
        ("bonds: {}", "bonds: {}\njoints: {J1: {from: NEG, to: HULL}}", "HULL", "there is no post for J1 “HULL”", None),
        ("generator_fuel: none", "generator_fuel: none, engines: {E: {fuel: diesel, mounting: inboard, block: BLOCK}}",
         "BLOCK", "there is no device “BLOCK”", None),
        ("NEG: {part: stud, zone: BOX}", "NEG: {part: stud, zone: BOX, measures: HOUS}", "HOUS}",
         "there is no bank “HOUS”", "did you mean “HOUSE”?"),
        ("conditions:\n  night: {name: Night,", "conditions:\n  night: {name: Night, closed: [POS],", "POS]",
         "there is no relay or contactor “POS”", "did you mean “POS”?"),
        ("SW: {part: toggle, zone: BOX}", "SW: {part: toggle, zone: BOX, mount: {inn: POS}}", "inn",
         "there is no post on SW “inn”", "did you mean “in”?"),
        ("SW: {part: toggle, zone: BOX}", "SW: {part: toggle, zone: BOX, mount: {in: POSS}}", "SW: {part",
         "there is no post for SW “POSS”", "did you mean “POS”?"),
    ],
)  # fmt: skip
def test_a_name_of_nothing_in_a_class_is_told_at_its_place_with_the_nearest(
    tmp_path: Path, old: str, new: str, at: str, message: str, remedy: str | None
) -> None:
    files = edited(CLASS_FILE, old, new)
    shown = found(tmp_path, files)
    expected = (place(CLASS_FILE, at, files), message)
    assert expected in [(where, fault) for where, fault, _ in shown]
    if remedy is not None:
        assert (*expected, remedy) in shown


def test_a_name_of_nothing_is_told_once_however_many_boats_have_it(tmp_path: Path) -> None:
    files = edited(CLASS_FILE, "W3: {from: BAT.neg, to: NEG", "W3: {from: BAT.neg, to: NAG")
    files["hulls/dory-2.yaml"] = HULL.replace("DORY-1", "DORY-2").replace("[]", "[OPT-LAMP]")
    assert found(tmp_path, files) == [(place(CLASS_FILE, "W3"), "there is no post for W3 “NAG”", "did you mean “NEG”?")]


def test_an_option_that_removes_what_is_still_named_elsewhere_is_told_where_it_is_named(tmp_path: Path) -> None:
    files = edited(OPTION_FILE, "changes:\n", "changes:\n  devices: {SW: null}\n")
    result = checked(tmp_path, files)
    assert {(at, fault) for check, at, fault, _ in told(result) if check == "unknown-reference"} == {
        (place(CLASS_FILE, "W1:"), "there is no post for W1 “SW.in”"),
        (place(CLASS_FILE, "W2:"), "there is no post for W2 “SW.out”"),
        (place(CLASS_FILE, "SW: closed}}", files), "there is no switch “SW”"),
        (place(CLASS_FILE, "SW: closed}, loads", files), "there is no switch “SW”"),
    }
    assert result.unstudied == ("option set dory-14 + OPT-LAMP",)
    assert [subject.id for subject in result.subjects] == ["dory-14", "DORY-1"]


def test_a_reference_in_a_patch_is_told_in_the_patch(tmp_path: Path) -> None:
    files = changes("{circuits: {C1: {zone: BOWW}}}")
    told_in_patch = (place(HULL_FILE, "BOWW", files), "there is no zone “BOWW”", "did you mean “BOW”?")
    assert told_in_patch in found(tmp_path, files)


def test_a_class_in_which_every_state_is_forbidden_is_told(tmp_path: Path) -> None:
    files = edited(CLASS_FILE, "kind: normal", "kind: forbidden")
    assert [(check, fault) for check, _, fault, _ in told(checked(tmp_path, files))] == [
        ("bad-value", "every state is forbidden, so the boat can be in none")
    ]


def test_a_switch_without_a_state_is_told(tmp_path: Path) -> None:
    files = edited("parts/all.yaml", "states: {open: [], closed: [[in, out]]}", "states: {}")
    assert told(checked(tmp_path, files)) == [
        (
            "bad-value",
            place("parts/all.yaml", "{}}\n  wire", files),
            "parts “toggle” has no state",
            "add one, e.g. `open: []`",
        )
    ]


# --- revisions


def test_a_hull_ahead_of_its_class_is_told(tmp_path: Path) -> None:
    files = edited(HULL_FILE, "revision: 2", "revision: 3")
    message = "hull “DORY-1” is at class revision 3, but the class is at 2"
    assert told(checked(tmp_path, files)) == [("bad-value", place(HULL_FILE, "3", files), message, "")]


@pytest.mark.parametrize("written", ["2", "2.0", "2e0"])
def test_a_whole_number_is_read_in_every_spelling(tmp_path: Path, written: str) -> None:
    result = checked(tmp_path, edited(HULL_FILE, "revision: 2", f"revision: {written}"))
    assert [s.revision for s in result.subjects if s.is_hull] == [2]
    assert told(result) == []


# --- order


def shuffled(value: Any, rng: random.Random) -> Any:
    """Return data with the fields of every map in another order."""
    if isinstance(value, dict):
        keys = list(value)
        rng.shuffle(keys)
        return {key: shuffled(value[key], rng) for key in keys}
    return [shuffled(item, rng) for item in value] if isinstance(value, list) else value


@pytest.mark.parametrize("seed", range(4))
def test_the_order_of_fields_in_a_file_changes_nothing_but_places(tmp_path: Path, seed: int) -> None:
    rng = random.Random(seed)
    files = {**changes("{circuits: {C1: {cable: 18 AWG}}, devices: {SW: {name: main}}}")}
    mixed = {
        name: yaml.safe_dump(shuffled(yaml.load(text, Loader=yaml.BaseLoader), rng), sort_keys=False)
        for name, text in files.items()
    }
    for name in ("revision", "revisions", "electrical", "cores", "sheathed", "string"):
        mixed = {file: text.replace(f"{name}: '", f"{name}: ").replace("'\n", "\n") for file, text in mixed.items()}
    mixed = {name: text.replace("'1':", '"1":').replace("'2':", '"2":') for name, text in mixed.items()}
    plain, other = checked(tmp_path / "a", dict(files)), checked(tmp_path / "b", mixed)
    assert told(other) == told(plain) == []
    outcomes = [
        sorted(
            (s.id, o.verdict.value, o.check, o.part, o.fault, o.remedy, str(o.measure))
            for s in r.subjects
            for o in s.outcomes
        )
        for r in (plain, other)
    ]
    assert outcomes[0] == outcomes[1]
    assert len(outcomes[0]) > 100


def test_the_class_text_of_these_tests_is_sound(tmp_path: Path) -> None:
    assert told(checked(tmp_path)) == []
    assert CLASS.count("zone: BOX") == 5
