"""Assemble and build one hull without a study: what is written about it, checked or not."""

from __future__ import annotations

from collections.abc import Iterable
from pathlib import Path

from checker.boat.assemble import Assembly, assemble
from checker.boat.build import build_boat
from checker.boat.catalogue import read_catalogue
from checker.errors import UsageError
from checker.output.aboard import Aboard, named_aboard
from checker.reading.document import Fault
from checker.reading.words import flat, nearest
from checker.reading.yard_files import YardFiles, read_yard

MOST_FAULTS = 10


def hull_aboard(folder: Path, hull: str) -> Aboard:
    """Return a hull's boat as its class, options and as-built changes make it.

    Raises:
        FleetNotFoundError: If the folder holds no yard.
        UsageError: If there is no such hull, or its files have faults.
    """
    files = read_yard(folder)
    assembly = assemble(files)
    faults = [*files.faults, *assembly.faults]
    subject = next((one for one in assembly.subjects if one.is_hull and one.id == hull), None)
    if subject is None:
        raise _not_there(hull, files, assembly, faults)
    catalogue, part_faults = read_catalogue(files.parts)
    source = assembly.content[subject.key]
    boat, boat_faults = build_boat(source, subject.class_id, catalogue)
    if boat is None or part_faults:
        raise _faulty(hull, [*faults, *part_faults, *boat_faults])
    return named_aboard(hull, boat, source.data, (document.data for document in files.parts))


def _not_there(hull: str, files: YardFiles, assembly: Assembly, faults: Iterable[Fault]) -> UsageError:
    written = {str(d.data["hull"]) for d in files.hulls if isinstance(d.data, dict) and "hull" in d.data}
    if hull in written:
        return _faulty(hull, faults)
    meant = nearest(hull, written | {subject.id for subject in assembly.subjects if subject.is_hull})
    return UsageError(f"there is no hull {flat(hull)}" + (f"; did you mean {flat(meant)}?" if meant else ""))


def _faulty(hull: str, faults: Iterable[Fault]) -> UsageError:
    told = sorted({f"{fault.at}: {fault.message}{f'; {fault.remedy}' if fault.remedy else ''}" for fault in faults})
    lines = [f"  - {flat(line)}" for line in told[:MOST_FAULTS]]
    if len(told) > MOST_FAULTS:
        lines.append(f"  - and {len(told) - MOST_FAULTS} more: see `fairloom check`")
    return UsageError("\n".join([f"hull {flat(hull)} cannot be assembled; mend first:", *lines]))
