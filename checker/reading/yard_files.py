"""Find and read all files of a yard's repository.

Where a file lies says what kind of document it is. Files are taken in the order of their
paths, never of the directory, so that reports do not depend on the machine.
"""

from __future__ import annotations

import hashlib
import os
import re
from collections.abc import Iterator
from dataclasses import dataclass, field
from pathlib import Path

from checker.errors import FleetNotFoundError
from checker.finding import Span
from checker.reading.document import Document, Fault, compose
from checker.reading.schema import schema_faults
from checker.reading.sheet_csv import read_sheet_csv
from checker.reading.words import nearest, shown

YARD_FILE = "yard.yaml"
_PLACES = (
    ("yard", re.compile(r"yard\.yaml\Z")),
    ("waivers", re.compile(r"waivers\.yaml\Z")),
    ("parts", re.compile(r"parts/[^/]+\.yaml\Z")),
    ("option", re.compile(r"classes/([^/]+)/options/[^/]+\.yaml\Z")),
    ("class", re.compile(r"classes/([^/]+)/[^/]+\.yaml\Z")),
    ("hull", re.compile(r"hulls/[^/]+\.yaml\Z")),
    ("limits", re.compile(r"limits/([^/]+)/[^/]+\.yaml\Z")),
    ("sheet", re.compile(r"sheets/[^/]+\.(?:yaml|csv)\Z")),
)
SHEETS = "sheets"
_FOLDERS = ("parts", "classes", "hulls", "limits", SHEETS)
_PLAIN_ID = re.compile(r"[A-Za-z0-9][A-Za-z0-9_-]{0,39}\Z")


@dataclass(slots=True)
class YardFiles:
    """Hold every document of a yard by kind, in the order of their paths.

    A document with faults stays here, so that others can still be read; `faulty` names the
    files that cannot be trusted. `sums` has the SHA-256 of each file's bytes by its path.
    """

    yard: Document | None = None
    parts: list[Document] = field(default_factory=list)
    classes: dict[str, list[Document]] = field(default_factory=dict)
    options: dict[str, list[Document]] = field(default_factory=dict)
    hulls: list[Document] = field(default_factory=list)
    waivers: Document | None = None
    limits: list[Document] = field(default_factory=list)
    sheets: list[Document] = field(default_factory=list)
    faults: list[Fault] = field(default_factory=list)
    bytes_read: int = 0
    sums: dict[str, str] = field(default_factory=dict)

    @property
    def faulty(self) -> frozenset[str]:
        """Return the paths of the files that have a fault."""
        return frozenset(fault.at.file for fault in self.faults)


def read_yard(folder: Path) -> YardFiles:
    """Read the yard in a folder; all faults of all files are collected.

    Raises:
        FleetNotFoundError: If the folder holds no yard file.
    """
    if not (folder / YARD_FILE).is_file():
        raise FleetNotFoundError(f"no {YARD_FILE} in {folder}: give the folder of a yard's repository")
    files = YardFiles()
    _look_for_misspelt_folders(folder, files)
    for name, path in _yaml_files(folder, files):
        kind, owner = _kind_of(name)
        if kind is None:
            files.faults.append(_misplaced(name))
            continue
        content = _content(folder, path, name, files)
        if content is None:
            # It stays among the others as a faulty one, so that what rests on it is not studied without it.
            _file_in(files, kind, owner, Document(name))
            continue
        files.bytes_read += len(content)
        files.sums[name] = hashlib.sha256(content).hexdigest()
        document = read_sheet_csv(content, name) if name.endswith(".csv") else compose(content, name)
        faults = document.faults or schema_faults(document, kind)
        files.faults += faults
        _file_in(files, kind, owner, document)
    return files


def hull_file(folder: Path, hull: str) -> str:
    """Return the name of the file that a hull of a sound yard is written in."""
    files = read_yard(folder)
    return next(d.file for d in files.hulls if isinstance(d.data, dict) and d.data.get("hull") == hull)


def _yaml_files(folder: Path, files: YardFiles) -> Iterator[tuple[str, Path]]:
    """Yield name and path of each YAML file of the yard, sorted by name."""
    found = [path for path in folder.iterdir() if _is_yaml(path) and not path.name.startswith(".")]
    for sub in _FOLDERS:
        if (folder / sub).is_dir():
            inside = list((folder / sub).rglob("*"))
            found += [path for path in inside if _is_yaml(path) or (sub == SHEETS and path.suffix == ".csv")]
            for link in (path for path in inside if path.is_symlink() and path.is_dir()):
                at = Span(_name_of(folder, link), 1, 1)
                files.faults.append(Fault("unreadable-file", at, "a linked folder is not read", "copy the files in"))
    yield from sorted((_name_of(folder, path), path) for path in found)


def _look_for_misspelt_folders(folder: Path, files: YardFiles) -> None:
    """Tell a folder that is all but named like one of a yard's: what lies in it would be read by nobody."""
    for path in sorted(folder.iterdir()):
        if path.is_dir() and path.name not in _FOLDERS and not path.name.startswith("."):
            meant = nearest(path.name, _FOLDERS)
            if meant and any(_is_yaml(inside) for inside in path.rglob("*")):
                at = Span(_name_of(folder, path), 1, 1)
                message = "no files are read from this folder"
                files.faults.append(Fault("unreadable-file", at, message, f"did you mean {meant}/?"))


def _is_yaml(path: Path) -> bool:
    return path.suffix.lower() in (".yaml", ".yml")


def _name_of(folder: Path, path: Path) -> str:
    """Return a path as text that is alike under every locale and can always be written."""
    return os.fsencode(path.relative_to(folder).as_posix()).decode("utf-8", "backslashreplace")


def _kind_of(name: str) -> tuple[str | None, str]:
    for kind, place in _PLACES:
        match = place.match(name)
        if match:
            return kind, match[1] if match.groups() else ""
    return None, ""


def _misplaced(name: str) -> Fault:
    if not name.endswith(".yaml"):
        remedy = f"rename it to {shown(name.rpartition('.')[0])}.yaml"
        return Fault("unreadable-file", Span(name, 1, 1), "files of a yard end in .yaml", remedy)
    meant = nearest(name.removesuffix(".yaml"), ("yard", "waivers"))  # without the ending, in which all names agree
    remedy = (
        f"did you mean {meant}.yaml?"
        if meant
        else (
            "a yard keeps yard.yaml, waivers.yaml, parts/*.yaml, classes/ID/*.yaml, classes/ID/options/*.yaml, "
            "hulls/*.yaml, limits/SET/*.yaml, sheets/*.yaml, sheets/*.csv"
        )
    )
    return Fault("unreadable-file", Span(name, 1, 1), "no kind of document is kept at this place", remedy)


def _content(folder: Path, path: Path, name: str, files: YardFiles) -> bytes | None:
    """Return a file's bytes, or None with a fault where it is not ours to read."""
    at = Span(name, 1, 1)
    try:
        if path.resolve().is_relative_to(folder.resolve()):
            return path.read_bytes()
        message, remedy = "the file is a link that leaves the repository", "copy the file in"
    except OSError as error:
        message, remedy = f"the file cannot be read: {error.strerror}", ""
    except RuntimeError:  # so some versions of Python tell a link that leads to itself
        message, remedy = "the file is a link that leads to itself", "copy the file in"
    files.faults.append(Fault("unreadable-file", at, message, remedy))
    return None


def _file_in(files: YardFiles, kind: str, owner: str, document: Document) -> None:
    if owner and not _PLAIN_ID.match(owner):
        files.faults.append(Fault("bad-value", Span(document.file, 1, 1), f"folder “{shown(owner)}” is not a plain id"))
    match kind:
        case "yard":
            files.yard = document
        case "waivers":
            files.waivers = document
        case "parts":
            files.parts.append(document)
        case "class":
            files.classes.setdefault(owner, []).append(document)
        case "option":
            files.options.setdefault(owner, []).append(document)
        case "limits":
            files.limits.append(document)
        case "sheet":
            files.sheets.append(document)
        case _:
            files.hulls.append(document)
