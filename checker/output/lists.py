"""Write the lists of one hull into a folder: what an electrician and the store work from."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from pathlib import Path

from checker.errors import UsageError
from checker.output.aboard import Aboard
from checker.output.csv_table import Table, csv_text
from checker.output.part_lists import device_schedule, parts_list
from checker.output.wire_lists import label_list, landing_list, wire_list

LISTS: Mapping[str, Callable[[Aboard], Table]] = {
    "wires": wire_list,
    "devices": device_schedule,
    "landings": landing_list,
    "labels": label_list,
    "parts": parts_list,
}


def list_files(aboard: Aboard) -> dict[str, str]:
    """Return the text of every list by the name of its file."""
    return {f"{aboard.hull}-{name}.csv": csv_text(make(aboard)) for name, make in LISTS.items()}


def write_lists(aboard: Aboard, folder: Path) -> list[str]:
    """Write the lists; return the names of their files.

    Raises:
        UsageError: If the folder cannot be written.
    """
    files = list_files(aboard)
    try:
        folder.mkdir(parents=True, exist_ok=True)
        for name, text in files.items():
            (folder / name).write_bytes(text.encode("utf-8"))
    except OSError as error:
        raise UsageError(f"lists cannot be written to {folder}: {error.strerror}") from error
    return list(files)
