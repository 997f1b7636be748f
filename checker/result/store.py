"""Keep studies from one run to the next, each under a name made of all that it rests on.

An entry is believed only if it names the very study that was asked for and its bytes have the
sum that it states. What is damaged, or of another yard or tool, is passed over and made anew, so
that a store never changes what a run tells.
"""

from __future__ import annotations

import contextlib
import hashlib
import json
import os
import re
import sys
from collections.abc import Iterable
from functools import cache
from pathlib import Path

from checker import __version__
from checker.result.studied import Studied, Written, read_study

SUFFIX = ".study"
FORMAT = "fairloom study 1"
KEPT_FOR_EACH_USED = 4
KEPT_AT_LEAST = 1_000
"""Entries beyond both are taken away, those first that were not used for longest."""
_HEAD_LIMIT = 1_000
_ENTRY = re.compile(r"[0-9a-f]{8}-[0-9a-f]{64}\.study")


@cache
def tool_sum() -> str:
    """Return a sum of this tool: its version, its code, its tables and schemas, and the Python that runs it."""
    package = Path(__file__).resolve().parents[1]
    total = hashlib.sha256(f"{__version__} {sys.version_info[:2]}".encode())
    schemas = package / "_schemas"
    folders = (package, schemas if schemas.is_dir() else package.parent / "schemas")
    for folder in folders:
        for file in sorted(folder.rglob("*")):
            if file.suffix in (".py", ".yaml", ".json"):
                total.update(f"{file.relative_to(folder).as_posix()}\0".encode())
                total.update(hashlib.sha256(file.read_bytes()).digest())
    return total.hexdigest()


def study_name(*rests_on: Iterable[str]) -> str:
    """Return the name of a study, made of the tool and of everything that the study rests on."""
    text = json.dumps([tool_sum(), *(list(group) for group in rests_on)])
    return hashlib.sha256(text.encode()).hexdigest()


class Store:
    """Hold studies in a folder. What cannot be read or written costs time and changes nothing."""

    def __init__(self, folder: Path) -> None:
        self._folder = folder
        self._used: set[str] = set()
        self.taken = 0
        self.trouble = ""

    def take(self, name: str, *, lists_passes: bool) -> Studied | None:
        """Return a study that was kept, or None."""
        file = self._file(name)
        try:
            with file.open("rb") as source:
                head = json.loads(source.readline(_HEAD_LIMIT))
                found = Written(source.read(int(head["most"][0])), source.read())
            if head["format"] != FORMAT or head["study"] != name:
                return None
            if head["most"][1] != _sum(found.most) or head["passes"][1] != _sum(found.passes):
                return None
            studied = read_study(found, lists_passes=lists_passes)
        except (OSError, ValueError, KeyError, TypeError, IndexError, OverflowError, RecursionError):
            return None
        with contextlib.suppress(OSError):
            os.utime(file)
        self._used.add(file.name)
        self.taken += 1
        return studied

    def keep(self, name: str, one: Written) -> None:
        """Keep a study; it must list its passes."""
        head = {"format": FORMAT, "study": name, "most": [len(one.most), _sum(one.most)],
                "passes": [len(one.passes), _sum(one.passes)]}  # fmt: skip
        file = self._file(name)
        part = file.with_suffix(f".{os.getpid()}.part")
        try:
            self._folder.mkdir(parents=True, exist_ok=True)
            part.write_bytes(json.dumps(head).encode() + b"\n" + one.most + one.passes)
            part.replace(file)  # whole or not at all, whoever else writes here
        except OSError as error:
            self.trouble = error.strerror or str(error)
        self._used.add(file.name)

    def tidy(self) -> None:
        """Take away entries of other tools, and the oldest beyond what is worth keeping."""
        with contextlib.suppress(OSError):
            entries = [file for file in self._folder.iterdir() if _ENTRY.fullmatch(file.name)]
            own = [file for file in entries if file.name.startswith(_prefix())]
            spare = [file for file in own if file.name not in self._used]
            spare.sort(key=lambda file: file.stat().st_mtime)
            most = max(KEPT_AT_LEAST, KEPT_FOR_EACH_USED * len(self._used))
            for file in [*(set(entries) - set(own)), *spare[: max(0, len(own) - most)]]:
                file.unlink(missing_ok=True)

    def _file(self, name: str) -> Path:
        return self._folder / f"{_prefix()}{name}{SUFFIX}"


def _prefix() -> str:
    return f"{tool_sum()[:8]}-"


def _sum(data: bytes) -> str:
    return hashlib.sha256(data).hexdigest()
