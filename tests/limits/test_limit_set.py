"""Hold the loading of limit sets and the shipped tables: what is refused, what is cited, what is read."""

from __future__ import annotations

import pickle
import re
import shutil
import subprocess
import sys
from dataclasses import fields
from pathlib import Path
from typing import Any

import pytest
import yaml

from checker.errors import LimitSetError
from checker.limits import limit_set, table_file
from checker.limits.citation import Basis, Citation
from checker.limits.limit_set import (
    TABLES,
    LimitSet,
    limit_set_ids,
    load_limit_set,
    read_limit_set,
    standard_ratings,
    thin_margin_fraction,
)

FEDERAL = load_limit_set("cfr33-183-i")
VOLUNTARY = load_limit_set("voluntary-dc")
METRIC = load_limit_set("iso-13297")
SETS = [FEDERAL, VOLUNTARY, METRIC]
SILENT = "[battery_fuel, ignition, source_device, supports]"
SHIPPED = sorted(TABLES.glob("*/*.yaml"))


def refused(folder: Path, file: str, old: str, new: str) -> str:
    """Change one text in a copy of the voluntary set, and return the message that refuses it."""
    copy = folder / "voluntary-dc"
    shutil.copytree(TABLES / "voluntary-dc", copy)
    text = (copy / file).read_text(encoding="utf-8")
    assert text.count(old) == 1, f"{old!r} must stand once in {file}"
    (copy / file).write_text(text.replace(old, new), encoding="utf-8")
    with pytest.raises(LimitSetError) as caught:
        read_limit_set(copy)
    return str(caught.value)


@pytest.mark.parametrize(
    ("file", "old", "new", "message"),
    [
        ("drop.yaml", "citation:", "quoted:", "voluntary-dc/drop.yaml: the table cites nothing"),
        ("drop.yaml", "  clause: 11.14.2.6\n", "", "voluntary-dc/drop.yaml: citation: clause is missing"),
        ("drop.yaml", "  clause: 11.14.2.6\n", "  clause: ''\n", "clause must be a text that is not empty"),
        (
            "drop.yaml",
            "from memory",
            "hearsay",
            "basis must be one of law | standard | handbook | from memory",
        ),
        ("drop.yaml", "general_percent: 10", "", "voluntary-dc/drop.yaml: general_percent is missing"),
        (
            "drop.yaml",
            "general_percent: 10",
            "general_percent: yes",
            "general_percent must be a number above 0",
        ),
        (
            "drop.yaml",
            "general_percent: 10",
            "general_percent: -10",
            "general_percent must be a number above 0",
        ),
        (
            "drop.yaml",
            "general_percent: 10",
            "general_percent: .nan",
            "general_percent must be a number above 0",
        ),
        (
            "drop.yaml",
            "general_percent: 10",
            "general_percent: .inf",
            "general_percent must be a number above 0",
        ),
        ("drop.yaml", "general_percent: 10", "general_percent: 10\nlimit: 3", "limit is not known here"),
        ("drop.yaml", "[feeder,", "[feeder, radio,", "critical_services names radio twice"),
        ("drop.yaml", "[feeder,", "[1,", "critical_services must hold texts, not 1"),
        (
            "drop.yaml",
            "general_percent: 10",
            "general_percent: [",
            "voluntary-dc/drop.yaml: the file is no YAML",
        ),
        (
            "ampacity.yaml",
            "'00':",
            "00:",
            "ampacity.yaml: rows: the key 0 is no text; gauge names are quoted",
        ),
        ("ampacity.yaml", "'6':", "'7/0':", "'7/0' is no wire gauge"),
        ("ampacity.yaml", "[80, 95,", "[95,", "6 AWG has 6 figures for 7 columns"),
        ("ampacity.yaml", "[80, 95,", "[95, 80,", "6 AWG falls with the temperature"),
        ("ampacity.yaml", "[80, 95,", "[50, 95,", "6 AWG bears less than 8 AWG"),
        ("ampacity.yaml", "'6':", "'10.0':", "'10.0' is no wire gauge"),
        ("ampacity.yaml", "'6':", "'9':", "9 AWG must not follow 8 AWG"),
        ("ampacity.yaml", "[60, 75, 80,", "[60, 80, 75,", "columns_c must rise"),
        ("engine_factor.yaml", "factor: 0.58", "factor: 1.58", "a factor of 1.58 would raise the ampacity"),
        ("engine_factor.yaml", "column_c: 60", "column_c: 61", "differ in their columns"),
        ("engine_factor.yaml", "column_c: 60", "column_c: 76", "rows must rise with column_c"),
        ("bundle.yaml", "min: 2, max: 3", "min: 4, max: 3", "max 3 is below min 4"),
        ("bundle.yaml", "min: 4, max: 6", "min: 5, max: 6", "a gap or overlap stands before 5"),
        (
            "bundle.yaml",
            "{min: 25, factor: 0.4}",
            "{min: 25, max: 99, factor: 0.4}",
            "the last row must be open",
        ),
        ("bundle.yaml", "max: 24, factor: 0.5", "max: 24, factor: 0.65", "the factor rises at 7 conductors"),
        ("bundle.yaml", "min: 2, max: 3", "min: 2.5, max: 3", "min must be a whole number"),
        ("distance.yaml", "needs_reason: false", "needs_reason: 'no'", "needs_reason must be true or false"),
        ("distance.yaml", "\nenclosed_in: 40", "\nenclosed_in: 4", "enclosed_in is shorter than open_in"),
        ("distance.yaml", "  enclosed_in: {", "  sheathed_in: {", "figures: sheathed_in is not known here"),
        (
            "device_rating.yaml",
            "judges: sum",
            "judges: average",
            "judges must be sum or largest, not 'average'",
        ),
        ("device_rating.yaml", "to_percent: 150", "to_percent: 90", "next_standard_up_to_percent is below"),
        ("minimum_size.yaml", "single_awg: '16'", "single_awg: 16", "single_awg must be a text"),
        (
            "set.yaml",
            "id: voluntary-dc",
            "id: voluntary",
            "the id must be the name of the folder, 'voluntary-dc'",
        ),
        ("set.yaml", SILENT, SILENT.replace("[", "[drop, "), "drop.yaml is no table of this set"),
        (
            "set.yaml",
            SILENT,
            SILENT.replace("[", "[material, "),
            "only, not material",
        ),
        ("set.yaml", SILENT, "[]", "voluntary-dc/ignition.yaml: the file cannot be read"),
    ],
)
def test_a_malformed_table_is_refused_by_name(tmp_path: Path, file: str, old: str, new: str, message: str) -> None:
    assert message in refused(tmp_path, file, old, new)


def test_a_table_that_is_no_mapping_is_refused(tmp_path: Path) -> None:
    (tmp_path / "set.yaml").write_text("- id\n", encoding="utf-8")
    with pytest.raises(LimitSetError, match="a mapping is wanted here"):
        read_limit_set(tmp_path)


def test_an_ampacity_table_without_rows_is_refused(tmp_path: Path) -> None:
    copy = tmp_path / "voluntary-dc"
    shutil.copytree(TABLES / "voluntary-dc", copy)
    text = (copy / "ampacity.yaml").read_text(encoding="utf-8")
    (copy / "ampacity.yaml").write_text(text.split("rows:")[0] + "rows: {}\n", encoding="utf-8")
    with pytest.raises(LimitSetError, match=r"ampacity\.yaml: rows: the table has no rows"):
        read_limit_set(copy)


def test_a_stray_file_is_refused_since_it_may_be_a_misspelt_table(tmp_path: Path) -> None:
    copy = tmp_path / "voluntary-dc"
    shutil.copytree(TABLES / "voluntary-dc", copy)
    (copy / "voltage_drop.yaml").write_text("{}\n", encoding="utf-8")
    with pytest.raises(LimitSetError, match=r"voltage_drop\.yaml is no table of this set"):
        read_limit_set(copy)


def test_an_unknown_set_is_refused_with_the_known_ones() -> None:
    with pytest.raises(LimitSetError, match="no limit set 'iso'; known: cfr33-183-i, voluntary-dc, iso-13297"):
        load_limit_set("iso")


def test_the_ids_name_the_folders_of_tables() -> None:
    assert {path.name for path in TABLES.iterdir()} == {*limit_set_ids(), "common"}
    assert [load_limit_set(set_id).id for set_id in limit_set_ids()] == list(limit_set_ids())


@pytest.mark.parametrize("path", SHIPPED, ids=lambda path: f"{path.parent.name}/{path.name}")
def test_no_shipped_table_gives_a_key_twice(path: Path) -> None:
    nodes: list[Any] = [yaml.compose(path.read_text(encoding="utf-8"))]
    while nodes:
        node = nodes.pop()
        if isinstance(node, yaml.MappingNode):
            keys = [key.value for key, _ in node.value]
            assert len(keys) == len(set(keys)), f"{path.name}: {keys}"
            nodes.extend(value for _, value in node.value)
        elif isinstance(node, yaml.SequenceNode):
            nodes.extend(node.value)


@pytest.mark.parametrize("limits", SETS, ids=lambda limits: limits.id)
def test_every_table_is_cited_with_document_clause_and_edition(limits: LimitSet) -> None:
    for name, citation in limits.citations():
        assert citation.document, name
        assert citation.clause, name
        assert citation.edition, name


@pytest.mark.parametrize("limits", SETS, ids=lambda limits: limits.id)
def test_every_rule_of_a_set_is_in_its_citations(limits: LimitSet) -> None:
    head = {"id", "title", "basis", "edition", "caution", "entered", "not_entered"}
    rules = {field.name for field in fields(limits)} - head - set(limits.silent_on) - set(limits.not_entered)
    assert {name.split(":")[0] for name, _ in limits.citations()} == rules


def test_the_law_rests_on_memory_for_six_factors_the_exemptions_from_protection_the_alternator_and_a_gap() -> None:
    from_memory = [name for name, citation in FEDERAL.citations() if citation.basis is Basis.FROM_MEMORY]
    assert from_memory == [
        *(f"engine_factor: {column_c} C" for column_c in (60, 75, 80, 90, 125, 200)),
        "exemptions: protection_exempt_roles",
        "self_limiting_source",
        "ignition: bulkhead_gap_in",
    ]
    assert FEDERAL.from_memory_count == len(from_memory)


def test_nothing_of_the_voluntary_set_claims_to_be_read_in_its_document() -> None:
    bases = {citation.basis for _, citation in VOLUNTARY.citations()}
    assert bases == {Basis.FROM_MEMORY, Basis.COMMON_PRACTICE}
    assert "licensed edition governs" in VOLUNTARY.caution


def test_a_figure_with_its_own_citation_is_told_apart_from_its_table() -> None:
    assert FEDERAL.engine_factor.citation_at(105).basis is Basis.LAW
    assert FEDERAL.engine_factor.citation_at(60).basis is Basis.FROM_MEMORY
    assert FEDERAL.distance.citation_of("enclosed_in").text == "33 CFR Part 183, Subpart I, § 183.455(b)(2)"
    assert VOLUNTARY.distance.citation_of("battery_enclosed_in").clause == "11.10.1.1.1, exception 2"


def test_a_citation_without_clause_is_its_document_alone() -> None:
    assert Citation("Common practice", "", "", Basis.COMMON_PRACTICE).text == "Common practice"


def test_a_set_is_silent_where_its_document_is() -> None:
    assert FEDERAL.silent_on == ("drop", "insulation", "interrupting", "source_device", "supports")
    assert VOLUNTARY.silent_on == ("battery_fuel", "ignition", "source_device", "supports")
    assert METRIC.silent_on == ("battery_fuel", "ignition", "interrupting", "terminals")
    assert (FEDERAL.drop, FEDERAL.insulation, VOLUNTARY.ignition) == (None, None, None)


def test_only_the_law_binds_a_boat_by_itself() -> None:
    assert [limits.applies.binds_petrol_inboard for limits in SETS] == [True, False, False]
    assert [limits.basis for limits in SETS] == [Basis.LAW, Basis.STANDARD, Basis.STANDARD]


def test_a_set_is_loaded_once_and_can_be_sent_to_a_worker() -> None:
    assert load_limit_set("cfr33-183-i") is FEDERAL
    assert pickle.loads(pickle.dumps(VOLUNTARY)) == VOLUNTARY
    assert pickle.loads(pickle.dumps(METRIC)) == METRIC


def test_each_table_file_is_read_once(monkeypatch: pytest.MonkeyPatch) -> None:
    read: list[str] = []
    real = Path.read_text

    def counted(self: Path, *args: Any, **kwargs: Any) -> str:
        read.append(f"{self.parent.name}/{self.name}")
        return real(self, *args, **kwargs)

    for cached in (load_limit_set, standard_ratings, thin_margin_fraction, table_file.common_table):
        cached.cache_clear()
    monkeypatch.setattr(Path, "read_text", counted)
    for _ in range(2):
        for set_id in limit_set_ids():
            load_limit_set(set_id)
        standard_ratings()
        thin_margin_fraction()
    assert len(read) == len(set(read))
    assert "common/standard_ratings.yaml" in read


def test_importing_the_limits_brings_in_no_package_but_yaml() -> None:
    # The C parser leaves modules without a file behind; they are no packages.
    code = (
        "import sys; before = set(sys.modules); import checker.limits.limit_set, checker.limits.formulas; "
        "new = {name for name in set(sys.modules) - before if getattr(sys.modules[name], '__file__', None)}; "
        "print(*sorted({name.split('.')[0] for name in new} - sys.stdlib_module_names))"
    )
    root = Path(limit_set.__file__).parents[2]
    run = subprocess.run([sys.executable, "-c", code], cwd=root, capture_output=True, text=True, check=True)
    assert run.stdout.split() == ["checker", "yaml"]


# --- a set whose tables the yard enters


def test_the_metric_set_ships_what_was_seen_in_published_copies_and_leaves_the_rest_to_the_yard() -> None:
    assert METRIC.not_entered == (
        "ampacity", "engine_factor", "bundle", "exemptions", "distance", "device_rating", "device_voltage", "breaker",
        "self_limiting_source", "material", "insulation",
    )  # fmt: skip
    shipped = {name for name, citation in METRIC.citations() if citation.basis is Basis.STANDARD}
    assert shipped == {"minimum_size", "supports", "source_device", "drop", "drop: resistivity_ohm_mm2_per_m"}


def test_the_metric_set_has_the_figures_of_the_clauses() -> None:
    size, drop = METRIC.minimum_size, METRIC.drop
    assert (size.single.text, size.sheathed.text, size.max_out_of_sheath_m) == ("1 mm2", "0.75 mm2", 0.8)
    assert METRIC.source_device is not None
    assert (METRIC.source_device.max_distance_m, METRIC.source_device.is_self_limiting_exempt) == (1.8, True)
    assert METRIC.supports is not None
    assert (METRIC.supports.single_m, METRIC.supports.sheathed_m, METRIC.supports.battery_m) == (0.45, 0.3, 0.3)
    assert drop is not None
    assert "bilge-pump" in drop.critical_services
    assert drop.critical_fraction == 0.03
    # 0.0179 ohm mm2/m x 0.3048 m/ft / 5.067e-4 mm2/cmil
    assert drop.k_ohm_cmil_per_ft == pytest.approx(10.767, abs=0.001)


def test_a_figure_of_a_table_that_was_not_entered_cannot_be_asked_for_in_silence() -> None:
    with pytest.raises(LookupError, match="table ampacity was not entered"):
        _ = METRIC.ampacity.sizes
    assert METRIC.lacks(["drop", "ampacity", "bundle"]) == ("ampacity", "bundle")
    assert FEDERAL.lacks(["drop", "ampacity", "bundle"]) == ()


@pytest.mark.parametrize(
    ("old", "new", "message"),
    [
        (
            "material, insulation]",
            "material, supprots]",
            "entered_by_yard names supprots, which is no table of the set",
        ),
        (
            "material, insulation]",
            "material, ignition]",
            "entered_by_yard names ignition, which is no table of the set",
        ),
        ("material, insulation]", "material, insulation, drop]", "drop.yaml is no table of this set"),
        ("material, insulation]", "material]", "iso-13297/insulation.yaml: the file cannot be read"),
    ],
)
def test_a_set_says_plainly_which_tables_the_yard_enters(tmp_path: Path, old: str, new: str, message: str) -> None:
    copy = tmp_path / "iso-13297"
    shutil.copytree(TABLES / "iso-13297", copy)
    text = (copy / "set.yaml").read_text(encoding="utf-8")
    assert text.count(old) == 1
    (copy / "set.yaml").write_text(text.replace(old, new), encoding="utf-8")
    with pytest.raises(LimitSetError, match=re.escape(message)):
        read_limit_set(copy)
