"""Write all reports of a run into a folder, and take away those of hulls that are no more.

Option sets are told in the fleet's report and in the JSON result; a file each is for what exists.
"""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path

from checker.errors import UsageError
from checker.finding import Card
from checker.output.json_report import json_report
from checker.output.text import fleet_report, hull_report, passes_text
from checker.reading.words import shown
from checker.result.model import FleetResult

_LEAD = 40
"""How much of a line is told ahead of where it differs."""
FLEET_FILE, JSON_FILE, HULL_FOLDER = "fleet.txt", "result.json", "hulls"


def report_files(result: FleetResult, cards: Mapping[str, Card]) -> dict[str, str]:
    """Return the text of every report by its name under the folder."""
    files = {FLEET_FILE: fleet_report(result, cards), JSON_FILE: json_report(result, cards)}
    passes: dict[str, str] = {}
    for subject in result.subjects:
        if subject.is_hull:
            if subject.study not in passes:
                passes[subject.study] = passes_text(subject.passes, subject.ladder, subject.tightest)
            files[f"{HULL_FOLDER}/{subject.id}.txt"] = hull_report(subject, cards, passes[subject.study])
    return files


def write_reports(result: FleetResult, cards: Mapping[str, Card], folder: Path) -> int:
    """Write the reports; return how many. Reports of hulls that are gone are removed.

    Raises:
        UsageError: If the folder cannot be written.
    """
    files = report_files(result, cards)
    try:
        hulls = folder / HULL_FOLDER
        hulls.mkdir(parents=True, exist_ok=True)
        for old in sorted(hulls.glob("*.txt")):
            if f"{HULL_FOLDER}/{old.name}" not in files and _is_ours(old):
                old.unlink()
        for name, text in sorted(files.items()):
            (folder / name).write_bytes(text.encode("utf-8"))
    except OSError as error:
        raise UsageError(f"reports cannot be written to {folder}: {error.strerror}") from error
    return len(files)


def stale_lines(result: FleetResult, cards: Mapping[str, Card], folder: Path) -> list[str]:
    """Tell where the reports in a folder differ from what the data give: a line a file, and its first difference.

    Returns nothing where they are the same to the byte.
    """
    files = report_files(result, cards)
    hulls = folder / HULL_FOLDER
    strangers = [f"{HULL_FOLDER}/{old.name}" for old in hulls.glob("*.txt") if hulls.is_dir() and _is_ours(old)]
    lines: list[str] = []
    for name in sorted({*files, *strangers}):
        if name not in files:
            lines.append(f"{name}: its hull is no more")
        elif not (folder / name).is_file():
            lines.append(f"{name}: is not there")
        else:
            lines += _difference(name, (folder / name).read_bytes(), files[name])
    return lines


def _difference(name: str, there: bytes, due: str) -> list[str]:
    """Tell the first line in which a report differs, as it is and as it ought to be."""
    if there == due.encode():
        return []
    old, new = there.decode("utf-8", "replace").split("\n"), due.split("\n")
    number = next((n for n, (a, b) in enumerate(zip(old, new, strict=False)) if a != b), min(len(old), len(new)))
    was, due_line = (rows[number].strip() if number < len(rows) else "(end of the report)" for rows in (old, new))
    start = max(0, next((n for n, (a, b) in enumerate(zip(was, due_line, strict=False)) if a != b), 0) - _LEAD)
    lead = "…" if start else ""
    return [f"{name}:{number + 1}", f"  is:  {lead}{shown(was[start:])}", f"  due: {lead}{shown(due_line[start:])}"]


def _is_ours(report: Path) -> bool:
    """Tell whether a file is a report of this tool: nothing else in the folder is touched."""
    with report.open("rb") as file:
        return file.read(6) == b"hull: "
