"""Read the files of a yard at a git revision, without touching the working tree, the index or any ref.

git is asked for a commit's list of files and for their content; nothing is checked out.
"""

from __future__ import annotations

import os
import re
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path, PurePosixPath

from checker.errors import CheckerError
from checker.reading.words import shown

LINK, FILE = "120000", ("100644", "100755")
_COMMIT = re.compile(r"[0-9a-f]{40}(?:[0-9a-f]{24})?\Z")
_ENVIRONMENT = {
    "GIT_OPTIONAL_LOCKS": "0",  # nothing is written, not even a refreshed index
    "GIT_TERMINAL_PROMPT": "0",
    "GIT_NO_LAZY_FETCH": "1",
    "LC_ALL": "C",
}
_SET_BY_HOOKS = ("GIT_DIR", "GIT_WORK_TREE", "GIT_INDEX_FILE", "GIT_PREFIX")


class RevisionError(CheckerError):
    """A revision cannot be read."""


@dataclass(frozen=True, slots=True)
class Revision:
    """Name a commit of the repository that a folder is in, and the folder's path from its top, ending in `/`."""

    folder: Path
    name: str
    commit: str
    prefix: str


def find_revision(folder: Path, name: str) -> Revision:
    """Return the commit that a name stands for in the repository of a folder.

    Raises:
        RevisionError: If git is not there, the folder is in no repository, or there is no such commit.
    """
    if not is_possible(name):
        raise RevisionError(f"“{shown(name)}” is no name of a revision, and no folder or file")
    prefix = _git(folder, "rev-parse", "--show-prefix").removesuffix("\n")
    commit = _commit(folder, name)
    if commit is None:
        raise RevisionError(_no_such(folder, name))
    return Revision(folder, name, commit, prefix)


def is_possible(name: str) -> bool:
    """Tell whether a name may be given to git: nothing that would be an option, no character that cannot be seen."""
    return bool(name) and not name.startswith("-") and name.isprintable()


def is_revision(folder: Path, name: str) -> bool:
    """Tell whether a name stands for a commit; where there is no git or no repository it does not."""
    try:
        return is_possible(name) and _commit(folder, name) is not None
    except RevisionError:
        return False


def _commit(folder: Path, name: str) -> str | None:
    try:
        told = _git(folder, "rev-parse", "--verify", "--quiet", f"{name}^{{commit}}").strip()
    except _GitFailedError as error:
        if error.told:
            raise
        return None
    return told if _COMMIT.match(told) else None


def _no_such(folder: Path, name: str) -> str:
    """Say what to do about a revision that is not there."""
    message = f"there is no revision “{shown(name)}” in this repository"
    if _commit(folder, f"refs/remotes/origin/{name}") is not None:
        return f"{message}; did you mean origin/{shown(name)}?"
    if _git(folder, "rev-parse", "--is-shallow-repository").strip() == "true":
        return (
            f"{message}, which is a shallow clone: fetch it first, e.g. `git fetch --depth=1 origin {shown(name)}`, "
            "or clone the whole history (fetch-depth: 0 in the checkout step)"
        )
    return message


def write_yard(revision: Revision, target: Path, yard_file: str) -> None:
    """Write the YAML files of a revision's yard into an empty folder.

    Raises:
        RevisionError: If the revision has no yard in this folder, or its content is not in this clone.
    """
    rows = list(_files(revision))
    if not any(path == yard_file for _, _, path in rows):
        where = f" in {shown(revision.prefix)}" if revision.prefix else ""
        raise RevisionError(f"no {yard_file}{where} at revision “{shown(revision.name)}”: there is no yard to compare")
    contents = _contents(revision, [blob for _, blob, _ in rows])
    for (mode, _, path), content in zip(rows, contents, strict=True):
        place = target.joinpath(*PurePosixPath(path).parts)
        place.parent.mkdir(parents=True, exist_ok=True)
        if mode == LINK:
            os.symlink(os.fsdecode(content), place)
        else:
            place.write_bytes(content)


def _files(revision: Revision) -> Iterator[tuple[str, str, str]]:
    """Yield mode, blob and path under the yard's folder of each YAML file."""
    listed = _git_bytes(revision.folder, "ls-tree", "-r", "-z", "--full-tree", revision.commit)
    for row in listed.split(b"\0"):
        head, _, raw_path = row.partition(b"\t")
        path = os.fsdecode(raw_path)
        if not path.startswith(revision.prefix):
            continue
        inside = path.removeprefix(revision.prefix)
        mode, _, blob = head.decode("ascii").partition(" blob ")
        if mode not in (LINK, *FILE) or not inside.lower().endswith((".yaml", ".yml")):
            continue
        if any(step in ("", ".", "..") for step in inside.split("/")):
            raise RevisionError(f"revision “{shown(revision.name)}” has a file at a path that leaves its folder")
        yield mode, blob, inside


def _contents(revision: Revision, blobs: list[str]) -> Iterator[bytes]:
    """Yield the content of blobs, in order."""
    asked = "".join(f"{blob}\n" for blob in blobs).encode("ascii")
    told = _git_bytes(revision.folder, "cat-file", "--batch", given=asked)
    at = 0
    for _ in blobs:
        end = told.index(b"\n", at)
        words = told[at:end].split(b" ")
        if len(words) != 3 or words[1] != b"blob":
            raise RevisionError(
                f"the files of revision “{shown(revision.name)}” are not all in this clone: fetch them first"
            )
        size = int(words[2])
        yield told[end + 1 : end + 1 + size]
        at = end + 1 + size + 1


class _GitFailedError(RevisionError):
    """git ended with an error; `told` is what it said."""

    def __init__(self, told: str) -> None:
        super().__init__(f"git: {shown(told)}" if told else "git failed without saying why")
        self.told = told


def _git(folder: Path, *words: str) -> str:
    return os.fsdecode(_git_bytes(folder, *words))


def _git_bytes(folder: Path, *words: str, given: bytes = b"") -> bytes:
    """Run git on the repository of a folder and return what it printed."""
    import subprocess  # costs more than the rest of a small comparison's imports

    environment = {key: value for key, value in os.environ.items() if key not in _SET_BY_HOOKS} | _ENVIRONMENT
    try:
        done = subprocess.run(
            ["git", "-C", str(folder), *words], input=given, capture_output=True, check=False, env=environment
        )
    except FileNotFoundError as error:
        raise RevisionError("git is not installed: compare folders or JSON results, or install git") from error
    except OSError as error:
        raise RevisionError(f"git cannot be run: {error.strerror}") from error
    if done.returncode:
        lines = os.fsdecode(done.stderr).strip().splitlines()
        raise _GitFailedError(lines[0].removeprefix("fatal: ") if lines else "")
    return done.stdout
