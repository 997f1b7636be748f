"""Write the reports that other programs read, all from one result."""

from __future__ import annotations

import os
from collections.abc import Callable, Mapping
from pathlib import Path

from checker.errors import UsageError
from checker.finding import Card
from checker.result.model import FleetResult

STANDARD_OUTPUT = "-"
FORMATS = ("sarif", "sarif_upload", "junit", "code_quality", "summary")
"""Names of the formats, as the command's options have them."""

Render = Callable[[FleetResult, Mapping[str, Card], str], str]


def further_report(name: str, result: FleetResult, cards: Mapping[str, Card], prefix: str) -> str:
    """Return the text of a report; what it takes to write it is loaded only here."""
    return _render(name)(result, cards, prefix)


def _render(name: str) -> Render:
    match name:
        case "sarif":
            from checker.output.sarif import sarif_report as render
        case "sarif_upload":
            from checker.output.sarif import sarif_upload as render
        case "junit":
            from checker.output.junit import junit_report as render
        case "code_quality":
            from checker.output.code_quality import code_quality_report as render
        case _:
            from checker.output.summary import summary_report as render
    return render


def write_further(
    asked: Mapping[str, str], result: FleetResult, cards: Mapping[str, Card], prefix: str
) -> tuple[str, list[str]]:
    """Write reports to their files; return the text for standard output, and what could not be written.

    Args:
        asked: The file of each format asked for; "-" is standard output.
        result: What the run found.
        cards: The checks.
        prefix: The yard's folder as seen from the root of its repository.
    """
    printed = ""
    failed: list[str] = []
    for name, file in asked.items():
        text = further_report(name, result, cards, prefix)
        if file == STANDARD_OUTPUT:
            printed = text
            continue
        try:
            Path(file).parent.mkdir(parents=True, exist_ok=True)
            # A job's steps share one summary; every other report stands alone.
            with open(file, "ab" if name == "summary" else "wb") as stream:
                stream.write(text.encode("utf-8"))
        except (OSError, ValueError) as error:  # ValueError: a name with a null byte
            reason = error.strerror if isinstance(error, OSError) else str(error)
            failed.append(f"{file} cannot be written: {reason}")
    return printed, failed


def folder_in_repository(folder: Path) -> str:
    """Return a folder's path from the root of its git repository, "" where it is the root or in none."""
    here = folder.resolve()
    for above in (here, *here.parents):
        if (above / ".git").exists():
            inside = here.relative_to(above).as_posix()
            return "" if inside == "." else os.fsencode(inside).decode("utf-8", "backslashreplace")
    return ""


def given_prefix(text: str) -> str:
    """Return a folder's path from the root of its repository as somebody wrote it.

    Raises:
        UsageError: If it does not lead down from the root.
    """
    steps = [step for step in text.replace("\\", "/").split("/") if step not in ("", ".")]
    if text.startswith(("/", "\\")) or ".." in steps or ":" in text.partition("/")[0]:
        raise UsageError(f"--yard-path: “{text}” is no path from the root of a repository; write e.g. boats/yard")
    return "/".join(steps)
