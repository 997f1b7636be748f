"""Read a table file, and refuse it with its name when it is malformed.

The tables are typed by hand. A key that is missing, misspelt or of the wrong kind must stop
the run: read as "no limit", it would pass every boat. A table that a yard enters is read in
the same way; there the refusal becomes a fault of its file.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace
from functools import cache
from pathlib import Path
from typing import NoReturn

import yaml

from checker.errors import LimitSetError
from checker.finding import Path as Steps
from checker.limits.citation import CITABLE, Basis, Citation
from checker.reading.words import shown

# The C parser reads the same language about ten times faster, but not every build has it.
_LOADER = getattr(yaml, "CSafeLoader", yaml.SafeLoader)

TABLES = Path(__file__).parent / "tables"

_CITATION_KEYS = frozenset({"document", "clause", "edition", "basis"})
_CITATION_OPTIONAL = frozenset({"note", "page"})


class TableError(LimitSetError):
    """A table is malformed or cites nothing: what is wrong with it, and the steps down to the place in its file."""

    def __init__(self, where: str, fault: str, steps: Steps = ()) -> None:
        super().__init__(f"{where}: {fault}")
        self.where, self.fault, self.steps = where, fault, steps

    def __reduce__(self) -> tuple[type[TableError], tuple[str, str, Steps]]:
        return TableError, (self.where, self.fault, self.steps)


@dataclass(frozen=True, slots=True)
class Table:
    """Give checked access to one mapping of a table file.

    `where` names it in messages, `steps` lead to it in its file. `changed` are the figures that
    a yard's own rule has changed, each with the citation that says so.
    """

    where: str
    values: Mapping[str, object]
    steps: Steps = ()
    changed: tuple[tuple[str, Citation], ...] = ()

    def refuse(self, fault: str, *steps: str | int) -> NoReturn:
        """Raise the error that names this table; `steps` lead from here to what is wrong.

        Raises:
            TableError: Always.
        """
        raise TableError(self.where, fault, (*self.steps, *steps))

    def with_figures(self, figures: Mapping[str, object], citation: Citation) -> Table:
        """Return the table with some of its figures changed by a yard's own rule."""
        told = (*self.changed, *((name, citation) for name in figures))
        return replace(self, values={**self.values, **figures}, changed=told)

    def expect(self, required: Iterable[str], optional: Iterable[str] = ()) -> None:
        """Refuse a mapping that lacks a required key or holds an unknown one."""
        needed = set(required)
        if missing := sorted(needed - self.values.keys()):
            self.refuse(f"{missing[0]} is missing")
        if unknown := sorted(map(str, self.values.keys() - needed - set(optional))):
            self.refuse(f"{shown(unknown[0])} is not known here", unknown[0])

    def has(self, key: str) -> bool:
        """Tell whether a key is given."""
        return key in self.values

    def text(self, key: str) -> str:
        """Return a text that is not empty."""
        value = self._value(key)
        if not isinstance(value, str) or not value.strip():
            self.refuse(f"{key} must be a text that is not empty, not {_told(value)}", key)
        return value.strip()

    def number(self, key: str) -> float:
        """Return a number above 0."""
        return self._as_number(key, self._value(key))

    def count(self, key: str) -> int:
        """Return a whole number above 0."""
        value = self.number(key)
        if value != int(value):
            self.refuse(f"{key} must be a whole number, not {_told(value)}", key)
        return int(value)

    def flag(self, key: str) -> bool:
        """Return true or false."""
        value = self._value(key)
        if not isinstance(value, bool):
            self.refuse(f"{key} must be true or false, not {_told(value)}", key)
        return value

    def numbers(self, key: str) -> tuple[float, ...]:
        """Return a list of numbers above 0, in the order of the file."""
        return tuple(self._as_number(key, value, index) for index, value in enumerate(self._list(key)))

    def names(self, key: str) -> tuple[str, ...]:
        """Return a list of texts without repetition, in the order of the file; it may be empty."""
        found: list[str] = []
        for value in self._list(key):
            if not isinstance(value, str) or not value.strip():
                self.refuse(f"{key} must hold texts, not {_told(value)}", key)
            if value in found:
                self.refuse(f"{key} names {shown(value)} twice", key)
            found.append(value)
        return tuple(found)

    def table(self, key: str) -> Table:
        """Return the mapping under a key; its keys must be texts."""
        return _as_table(f"{self.where}: {key}", self._value(key), (*self.steps, key))

    def tables(self, key: str) -> tuple[Table, ...]:
        """Return a list of mappings under a key."""
        return tuple(
            _as_table(f"{self.where}: {key}[{index}]", value, (*self.steps, key, index))
            for index, value in enumerate(self._list(key))
        )

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
            page=cited.text("page") if cited.has("page") else "",
        )

    def figure_citations(self, known: Iterable[str]) -> tuple[tuple[str, Citation], ...]:
        """Return the citations of single figures that rest on something else than their table.

        Args:
            known: The names a figure of this table may have; any other is refused.
        """
        cited: dict[str, Citation] = {}
        if self.has("figures"):
            figures = self.table("figures")
            figures.expect((), known)
            base = self.citation()
            cited = {name: _changed(base, figures.table(name)) for name in figures.values}
        return tuple({**cited, **dict(self.changed)}.items())

    def basis(self) -> Basis:
        """Return the basis, one of the texts of `Basis`."""
        given = self.text("basis")
        basis = next((basis for basis in CITABLE if basis.value == given), None)
        if basis is None:
            known = " | ".join(basis.value for basis in CITABLE)
            self.refuse(f"basis must be one of {known}, not {_told(given)}", "basis")
        return basis

    def _value(self, key: str) -> object:
        if key not in self.values:
            self.refuse(f"{key} is missing")
        return self.values[key]

    def _list(self, key: str) -> list[object]:
        value = self._value(key)
        if not isinstance(value, list):
            self.refuse(f"{key} must be a list, not {_told(value)}", key)
        return value

    def _as_number(self, key: str, value: object, *steps: int) -> float:
        # bool is a number to Python; a table that says `limit_in: yes` is a slip.
        if isinstance(value, bool) or not isinstance(value, int | float) or not 0 < value < float("inf"):
            self.refuse(f"{key} must be a number above 0, not {_told(value)}", key, *steps)
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
        raise TableError(where, f"the file cannot be read: {fault.strerror}") from fault
    except (yaml.YAMLError, UnicodeDecodeError) as fault:
        raise TableError(where, f"the file is no YAML: {' '.join(str(fault).split())}") from fault
    return _as_table(where, document)


@dataclass(frozen=True, slots=True)
class CommonChanges:
    """Hold the figures of the common tables that a yard's own rules change: table, figure, value.

    It can be hashed, so that what is made of a changed table is made once.
    """

    figures: tuple[tuple[str, str, object], ...] = ()

    def of(self, table: str) -> dict[str, object]:
        """Return the changed figures of one table."""
        return {figure: value for name, figure, value in self.figures if name == table}


AS_SHIPPED = CommonChanges()
HOUSE = Citation("House rule of the yard", "yard.yaml", "as committed", Basis.YARD_RULE)
"""What a figure rests on that a yard's own rule has changed."""


def house_table(name: str, changes: CommonChanges) -> Table:
    """Return a table that belongs to no set, with the figures that a yard's own rules change."""
    table, figures = common_table(name), changes.of(name)
    return table.with_figures(figures, HOUSE) if figures else table


@cache
def common_table(name: str) -> Table:
    """Return a table that belongs to no set, read once.

    Raises:
        LimitSetError: If the table is missing or malformed.
    """
    return read_table(TABLES / "common" / f"{name}.yaml")


def given_table(where: str, value: object) -> Table:
    """Return a table that was read elsewhere: one that a yard enters.

    Raises:
        TableError: If it is no mapping with text keys.
    """
    return _as_table(where, value)


def _as_table(where: str, value: object, steps: Steps = ()) -> Table:
    if not isinstance(value, dict):
        raise TableError(where, f"a mapping is wanted here, not {_told(value)}", steps)
    for key in value:
        # An unquoted 00 is the number 0 to YAML: the row of 2/0 would become that of 1/0.
        if not isinstance(key, str):
            raise TableError(where, f"the key {key!r} is no text; gauge names are quoted", steps)
    return Table(where, value, steps)


def _told(value: object) -> str:
    """Show a value of a table in a message: what a yard wrote may be long and is not to be trusted."""
    if isinstance(value, (dict, list)):
        return "a mapping" if isinstance(value, dict) else "a list"
    return repr(shown(value)) if isinstance(value, str) else repr(value)


def _changed(base: Citation, figure: Table) -> Citation:
    """Return a table's citation with what one figure of it states differently."""
    figure.expect((), _CITATION_KEYS | _CITATION_OPTIONAL)
    texts = {key: figure.text(key) for key in figure.values if key != "basis"}
    return replace(base, basis=figure.basis() if figure.has("basis") else base.basis, **texts)
