"""Read a shipped table file, and refuse it with its name when it is malformed.

The tables are typed by hand. A key that is missing, misspelt or of the wrong kind must stop
the run: read as "no limit", it would pass every boat.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace
from functools import cache
from pathlib import Path
from typing import NoReturn

import yaml

from checker.errors import LimitSetError
from checker.limits.citation import CITABLE, Basis, Citation

# The C parser reads the same language about ten times faster, but not every build has it.
_LOADER = getattr(yaml, "CSafeLoader", yaml.SafeLoader)

TABLES = Path(__file__).parent / "tables"

_CITATION_KEYS = frozenset({"document", "clause", "edition", "basis"})
_CITATION_OPTIONAL = frozenset({"note"})


@dataclass(frozen=True, slots=True)
class Table:
    """Give checked access to one mapping of a table file; `where` names it in messages."""

    where: str
    values: Mapping[str, object]

    def refuse(self, fault: str) -> NoReturn:
        """Raise the error that names this table.

        Raises:
            LimitSetError: Always.
        """
        raise LimitSetError(f"{self.where}: {fault}")

    def expect(self, required: Iterable[str], optional: Iterable[str] = ()) -> None:
        """Refuse a mapping that lacks a required key or holds an unknown one."""
        needed = set(required)
        if missing := sorted(needed - self.values.keys()):
            self.refuse(f"{missing[0]} is missing")
        if unknown := sorted(map(str, self.values.keys() - needed - set(optional))):
            self.refuse(f"{unknown[0]} is not known here")

    def has(self, key: str) -> bool:
        """Tell whether a key is given."""
        return key in self.values

    def text(self, key: str) -> str:
        """Return a text that is not empty."""
        value = self._value(key)
        if not isinstance(value, str) or not value.strip():
            self.refuse(f"{key} must be a text that is not empty, not {value!r}")
        return value.strip()

    def number(self, key: str) -> float:
        """Return a number above 0."""
        return self._as_number(key, self._value(key))

    def count(self, key: str) -> int:
        """Return a whole number above 0."""
        value = self.number(key)
        if value != int(value):
            self.refuse(f"{key} must be a whole number, not {value!r}")
        return int(value)

    def flag(self, key: str) -> bool:
        """Return true or false."""
        value = self._value(key)
        if not isinstance(value, bool):
            self.refuse(f"{key} must be true or false, not {value!r}")
        return value

    def numbers(self, key: str) -> tuple[float, ...]:
        """Return a list of numbers above 0, in the order of the file."""
        return tuple(self._as_number(key, value) for value in self._list(key))

    def names(self, key: str) -> tuple[str, ...]:
        """Return a list of texts without repetition, in the order of the file; it may be empty."""
        found: list[str] = []
        for value in self._list(key):
            if not isinstance(value, str) or not value.strip():
                self.refuse(f"{key} must hold texts, not {value!r}")
            if value in found:
                self.refuse(f"{key} names {value} twice")
            found.append(value)
        return tuple(found)

    def table(self, key: str) -> Table:
        """Return the mapping under a key; its keys must be texts."""
        return _as_table(f"{self.where}: {key}", self._value(key))

    def tables(self, key: str) -> tuple[Table, ...]:
        """Return a list of mappings under a key."""
        return tuple(_as_table(f"{self.where}: {key}[{index}]", value) for index, value in enumerate(self._list(key)))

    def citation(self) -> Citation:
        """Return the citation of this table; a table that cites nothing is refused."""
        if not self.has("citation"):
            self.refuse("the table cites nothing: citation is missing")
        cited = self.table("citation")
        cited.expect(_CITATION_KEYS, _CITATION_OPTIONAL)
        basis = cited.basis()
        # Common practice has no clause and no edition to give; everything else has.
        is_bare = basis is Basis.COMMON_PRACTICE
        return Citation(
            document=cited.text("document"),
            clause="" if is_bare and cited.values["clause"] == "" else cited.text("clause"),
            edition="" if is_bare and cited.values["edition"] == "" else cited.text("edition"),
            basis=basis,
            note=cited.text("note") if cited.has("note") else "",
        )

    def figure_citations(self, known: Iterable[str]) -> tuple[tuple[str, Citation], ...]:
        """Return the citations of single figures that rest on something else than their table.

        Args:
            known: The names a figure of this table may have; any other is refused.
        """
        if not self.has("figures"):
            return ()
        figures = self.table("figures")
        figures.expect((), known)
        base = self.citation()
        return tuple((name, _changed(base, figures.table(name))) for name in figures.values)

    def basis(self) -> Basis:
        """Return the basis, one of the texts of `Basis`."""
        given = self.text("basis")
        basis = next((basis for basis in CITABLE if basis.value == given), None)
        if basis is None:
            known = " | ".join(basis.value for basis in CITABLE)
            self.refuse(f"basis must be one of {known}, not {given!r}")
        return basis

    def _value(self, key: str) -> object:
        if key not in self.values:
            self.refuse(f"{key} is missing")
        return self.values[key]

    def _list(self, key: str) -> list[object]:
        value = self._value(key)
        if not isinstance(value, list):
            self.refuse(f"{key} must be a list, not {value!r}")
        return value

    def _as_number(self, key: str, value: object) -> float:
        # bool is a number to Python; a table that says `limit_in: yes` is a slip.
        if isinstance(value, bool) or not isinstance(value, int | float) or not 0 < value < float("inf"):
            self.refuse(f"{key} must be a number above 0, not {value!r}")
        return float(value)


def read_table(path: Path) -> Table:
    """Read one table file.

    Raises:
        LimitSetError: If the file is missing, is no YAML or holds no mapping with text keys.
    """
    where = f"{path.parent.name}/{path.name}"
    try:
        document = yaml.load(path.read_text(encoding="utf-8"), Loader=_LOADER)
    except OSError as fault:
        raise LimitSetError(f"{where}: the file cannot be read: {fault.strerror}") from fault
    except (yaml.YAMLError, UnicodeDecodeError) as fault:
        raise LimitSetError(f"{where}: the file is no YAML: {' '.join(str(fault).split())}") from fault
    return _as_table(where, document)


@cache
def common_table(name: str) -> Table:
    """Return a table that belongs to no set, read once.

    Raises:
        LimitSetError: If the table is missing or malformed.
    """
    return read_table(TABLES / "common" / f"{name}.yaml")


def _as_table(where: str, value: object) -> Table:
    if not isinstance(value, dict):
        raise LimitSetError(f"{where}: a mapping is wanted here, not {value!r}")
    for key in value:
        # An unquoted 00 is the number 0 to YAML: the row of 2/0 would become that of 1/0.
        if not isinstance(key, str):
            raise LimitSetError(f"{where}: the key {key!r} is no text; gauge names are quoted")
    return Table(where, value)


def _changed(base: Citation, figure: Table) -> Citation:
    """Return a table's citation with what one figure of it states differently."""
    figure.expect((), _CITATION_KEYS | _CITATION_OPTIONAL)
    texts = {key: figure.text(key) for key in figure.values if key != "basis"}
    return replace(base, basis=figure.basis() if figure.has("basis") else base.basis, **texts)
