"""Assemble what is to be studied: every legal option set of every class, and every hull.

A hull is its class, its options and its as-built changes, and nothing else.
"""

from __future__ import annotations

import json
from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import Any

from checker.boat.entry import Entry
from checker.boat.patch import Patched, Places, apply_patch, places_under, without_effect
from checker.finding import Path, Span
from checker.reading.document import Document, Fault
from checker.reading.words import shown
from checker.reading.yard_files import YardFiles

MOST_OPTION_SETS = 512
STATUSES = ("planned", "in-build", "signed", "delivered")


@dataclass(frozen=True, slots=True, kw_only=True)
class Signature:
    """Tell who signed a hull off and when, by role, and the marks of what was signed for."""

    role: str
    date: str
    content: str
    tool: str
    tables: str
    at: Span = field(compare=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class Subject:
    """Name one thing to study: a hull, or an option set of a class that may be sold.

    `key` tells which subjects assemble to the same content; they are studied once.
    """

    id: str
    is_hull: bool
    class_id: str
    options: tuple[str, ...]
    status: str = ""
    revision: int = 0
    changes: tuple[str, ...] = ()
    key: str = ""
    at: Span = field(compare=False)
    at_revision: Span = field(compare=False)
    signed: Signature | None = None


@dataclass(frozen=True, slots=True)
class Option:
    """Hold an option: what it excludes, and its patch with positions."""

    id: str
    name: str
    excludes: tuple[str, ...]
    patch: dict[str, Any]
    places: Places
    at: Span


@dataclass(slots=True)
class ClassDesign:
    """Hold a class: its merged sections, its options, its revisions."""

    id: str
    base: Patched
    options: dict[str, Option]
    revision: int
    revisions: dict[int, tuple[str, bool]]
    assembled: dict[tuple[str, ...], Patched] = field(default_factory=dict)

    def with_options(self, options: tuple[str, ...]) -> Patched:
        """Return the class with options applied in the order of their ids."""
        if options not in self.assembled:
            if not options:
                self.assembled[options] = self.base
            else:
                option = self.options[options[-1]]
                target = self.with_options(options[:-1])
                self.assembled[options] = apply_patch(target, option.patch, option.places)
        return self.assembled[options]


@dataclass(slots=True)
class Assembly:
    """Hold all subjects in report order, their data by key, and what is wrong in the files.

    `written_in` names the hull's file that gives a key's data their positions, where one does.
    """

    subjects: list[Subject] = field(default_factory=list)
    content: dict[str, Patched] = field(default_factory=dict)
    written_in: dict[str, str] = field(default_factory=dict)
    classes: dict[str, ClassDesign] = field(default_factory=dict)
    faults: list[Fault] = field(default_factory=list)
    unstudied: list[str] = field(default_factory=list)


def assemble(files: YardFiles) -> Assembly:
    """Assemble every option set and hull whose files can be trusted."""
    assembly = Assembly()
    faulty = files.faulty
    shared = [document for document in (files.yard, *files.parts) if document]
    # A file with another ending, or at no known place, is not among the documents: its folder tells.
    shared_fault = any(document.file in faulty for document in shared) or any(f.startswith("parts/") for f in faulty)
    for class_id, documents in sorted(files.classes.items()):
        options = files.options.get(class_id, [])
        own_fault = any(document.file in faulty for document in (*documents, *options))
        if shared_fault or own_fault or any(file.startswith(f"classes/{class_id}/") for file in faulty):
            assembly.unstudied.append(f"class {shown(class_id)}")
            continue
        design = _design(class_id, documents, options, files.yard, assembly.faults)
        assembly.classes[class_id] = design
        _add_designs(assembly, design)
    for class_id in sorted(set(files.options) - set(files.classes)):
        at = Span(files.options[class_id][0].file, 1, 1)
        message = f"options of a class “{shown(class_id)}” that has no file of its own"
        assembly.faults.append(Fault("unknown-reference", at, message, f"add classes/{shown(class_id)}/class.yaml"))
    for document in files.hulls:
        if document.file in faulty:
            assembly.unstudied.append(f"hull {_hull_name(document)}")
        else:
            _add_hull(assembly, document, class_ids=set(files.classes))
    # By their ids, so that a hull keeps its place in the reports when its file is renamed.
    assembly.subjects.sort(key=lambda subject: (subject.is_hull, subject.id if subject.is_hull else ""))
    return assembly


def _hull_name(document: Document) -> str:
    data = document.data
    name = data.get("hull") if isinstance(data, dict) else None
    return shown(name if isinstance(name, str) else document.file)


def _design(
    class_id: str, documents: Sequence[Document], options: Sequence[Document], yard: Document | None,
    faults: list[Fault],
) -> ClassDesign:  # fmt: skip
    base = _with_usual(_merge_sections(documents, faults), yard)
    read = _read_options(options, base, faults)
    head = base.data.get("class", {})
    revisions = {
        int(number): (str(row.get("what", "")), bool(row.get("electrical", True)))
        for number, row in head.get("revisions", {}).items()
        if str(number).isdigit()
    }
    return ClassDesign(class_id, base, read, int(head.get("revision", 0)), revisions)


USUAL = "workmanship"


def _with_usual(base: Patched, yard: Document | None) -> Patched:
    """Put the yard's own workmanship under that of a class, where the class writes nothing else."""
    usual = yard.data.get(USUAL) if yard is not None else None
    own = base.data.get(USUAL, {})
    if yard is None or not usual or not isinstance(own, dict):
        return base
    places = {path: spans for path, spans in yard.places.items() if path[:1] == (USUAL,)}
    return Patched({**base.data, USUAL: {**usual, **own}}, (*base.layers, places))


def _merge_sections(documents: Sequence[Document], faults: list[Fault]) -> Patched:
    """Merge the sections of a class's files; the same id in two files is a fault."""
    sections: dict[str, Any] = {}
    places: dict[Any, tuple[Span, Span]] = {}
    for document in documents:
        for section, content in document.data.items():
            if section not in sections:
                sections[section] = dict(content) if isinstance(content, dict) else content
            elif not isinstance(content, dict) or not isinstance(sections[section], dict):
                at = document.places[(section,)][0]
                faults.append(Fault("repeated-key", at, f"section “{section}” is written twice in this class"))
            else:
                for name in content:
                    if name in sections[section]:
                        at = document.places[(section, name)][0]
                        message = f"{section} “{name}” is written twice in this class"
                        other = places[(section, name)][0]
                        faults.append(Fault("repeated-key", at, message, f"the other one stands in {other}"))
                    else:
                        sections[section][name] = content[name]
        for path, spans in document.places.items():
            places.setdefault(path, spans)
    return Patched(sections, (places,))


def _read_options(documents: Sequence[Document], base: Patched, faults: list[Fault]) -> dict[str, Option]:
    options: dict[str, Option] = {}
    for document in documents:
        row = Entry(Patched(document.data, (document.places,)), (), document.data, faults)
        name = row.text("option")
        if name in options:
            row.fault("repeated-key", row.at("option"), f"option “{name}” is written twice",
                      f"the other one stands in {options[name].at}")  # fmt: skip
            continue
        patch = row.fields("changes")
        places = places_under(document.places, ("changes",))
        for path in without_effect(base.data, patch):
            _no_effect(row, ("changes",), path, f"option {name}")
        options[name] = Option(name, row.text("name"), row.items("excludes"), patch, places, row.at("option"))
    for document in documents:
        row = Entry(Patched(document.data, (document.places,)), (), document.data, faults)
        for index, other in enumerate(row.items("excludes")):
            if other not in options:
                row.unknown("option", other, row.at("excludes", index), options)
    return options


def _no_effect(row: Entry, prefix: Path, path: Path, who: str) -> None:
    message = f"{who} changes {'.'.join(str(step) for step in path)} to what it already is, or removes nothing"
    row.fault("patch-without-effect", row.key_at(*prefix, *path), message,
              "correct the id or the value, or take the line out")  # fmt: skip


def _excluded(options: dict[str, Option], names: Sequence[str]) -> tuple[str, str] | None:
    """Return the first two of some options that exclude each other."""
    for first in names:
        for second in names:
            if first < second and (second in options[first].excludes or first in options[second].excludes):
                return first, second
    return None


def option_sets(options: dict[str, Option]) -> list[tuple[str, ...]]:
    """Return every legal set of options, the empty one first, smaller ones before larger."""
    sets: list[tuple[str, ...]] = [()]
    for name in sorted(options):
        sets += [chosen for one in sets if not _excluded(options, chosen := (*one, name))]
        if len(sets) > MOST_OPTION_SETS:
            break
    return sorted(sets, key=lambda one: (len(one), one))


def _add_designs(assembly: Assembly, design: ClassDesign) -> None:
    at = design.base.key_span(("class",))
    sets = option_sets(design.options)
    if len(sets) > MOST_OPTION_SETS:
        message = f"class “{design.id}” has more than {MOST_OPTION_SETS} legal option sets"
        assembly.faults.append(Fault("bad-value", at, message, "say which options exclude each other"))
        sets = [()]
    for options in sets:
        name = " + ".join((design.id, *options))
        key = _key(design.id, options, [])
        assembly.content.setdefault(key, design.with_options(options))
        assembly.subjects.append(
            Subject(
                id=name,
                is_hull=False,
                class_id=design.id,
                options=options,
                status="design",
                revision=design.revision,
                key=key,
                at=at,
                at_revision=at,
            )
        )


def _key(class_id: str, options: tuple[str, ...], patches: Any) -> str:
    return json.dumps([class_id, options, patches], sort_keys=True, ensure_ascii=True)


def _add_hull(assembly: Assembly, document: Document, class_ids: set[str]) -> None:
    row = Entry(Patched(document.data, (document.places,)), (), document.data, assembly.faults)
    name = row.text("hull")
    before = len(assembly.faults)
    if any(subject.is_hull and subject.id == name for subject in assembly.subjects):
        row.fault("repeated-key", row.at("hull"), f"hull “{name}” is written in two files")
        return
    twin = next((s.id for s in assembly.subjects if s.is_hull and s.id.lower() == name.lower()), None)
    if twin is not None:
        row.fault("bad-value", row.at("hull"), f"hulls “{twin}” and “{name}” differ in capitals only",
                  "some file systems keep one report for both: rename one")  # fmt: skip
        return
    design = assembly.classes.get(row.text("class"))
    if design is None:
        if row.text("class") not in class_ids:
            row.unknown("class", row.text("class"), row.at("class"), class_ids)
        assembly.unstudied.append(f"hull {name}")
        return
    options = _hull_options(row, design)
    if len(assembly.faults) > before or options is None:
        assembly.unstudied.append(f"hull {name}")
        return
    patches = {change.id: change.fields("set") for change in row.entries("changes")}
    key = _key(design.id, options, list(patches.values()))
    applied = _apply_changes(row, document, design.with_options(options))
    if key not in assembly.content:
        assembly.content[key] = applied
        assembly.written_in[key] = document.file
    assembly.subjects.append(
        Subject(
            id=name,
            is_hull=True,
            class_id=design.id,
            options=options,
            status=row.text("status"),
            revision=row.whole("revision"),
            changes=tuple(patches),
            key=key,
            at=row.at("hull"),
            at_revision=row.at("revision"),
            signed=_signature(row),
        )
    )
    if row.whole("revision") > design.revision:
        message = f"hull “{name}” is at class revision {row.whole('revision')}, but the class is at {design.revision}"
        row.fault("bad-value", row.at("revision"), message)


def _signature(row: Entry) -> Signature | None:
    written = row.fields("signed")
    if not written:
        return None
    return Signature(**{name: str(written.get(name, "")) for name in ("role", "date", "content", "tool", "tables")},
                     at=row.at("signed"))  # fmt: skip


def _hull_options(row: Entry, design: ClassDesign) -> tuple[str, ...] | None:
    names = row.items("options")
    known = True
    for index, name in enumerate(names):
        if name not in design.options:
            row.unknown("option", name, row.at("options", index), design.options)
            known = False
    if not known:
        return None
    clash = _excluded(design.options, sorted(set(names)))
    if clash:
        row.fault("excluded-options", row.at("options"), f"{clash[0]} and {clash[1]} exclude each other",
                  "take one of them out")  # fmt: skip
        return None
    return tuple(sorted(set(names)))


def _apply_changes(row: Entry, document: Document, target: Patched) -> Patched:
    for change in row.entries("changes"):
        patch = change.fields("set")
        prefix = ("changes", change.id, "set")
        for path in without_effect(target.data, patch):
            _no_effect(row, prefix, path, f"change {change.id}")
        if not patch:
            row.fault("patch-without-effect", change.at(), f"change {change.id} sets nothing", "write what was changed")
        target = apply_patch(target, patch, places_under(document.places, prefix))
    return target
