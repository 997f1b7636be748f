"""Read the tables that a yard enters from its own copy of a standard: limits/SET/TABLE.yaml.

They have the format of the shipped tables and are read by the same rules; but they are a yard's
data, so that whatever is wrong with one is a fault of its file. A table with a fault counts as
not entered.
"""

from __future__ import annotations

from collections.abc import Collection, Iterator, Sequence

from checker.finding import Path, Span
from checker.limits.limit_set import TABLES, limit_set_ids, reader_of, tables_left_to_yard
from checker.limits.rules import AmpacityTable, EngineFactor
from checker.limits.table_file import Table, TableError, given_table, read_table
from checker.reading.document import Document, Fault
from checker.reading.words import nearest, shown

Entered = dict[str, dict[str, Table]]
"""The tables that a yard has entered, by limit set and table."""


def read_entered(documents: Sequence[Document], faulty: Collection[str]) -> tuple[Entered, list[Fault]]:
    """Return the tables that can be used, and what is wrong with the others.

    Args:
        documents: The yard's files of limit tables.
        faulty: Paths of files that are known to have a fault already.
    """
    entered: Entered = {}
    faults: list[Fault] = []
    for document in documents:
        _, set_id, name = document.file.removesuffix(".yaml").split("/")
        misplaced = _misplaced(document, set_id, name)
        if misplaced is not None:
            faults.append(misplaced)
        elif document.file not in faulty:
            try:
                table = given_table(document.file, document.data)
                _make(name, table)
            except TableError as error:
                faults.append(_fault(document, error.steps, error.fault))
            else:
                entered.setdefault(set_id, {})[name] = table
    faults += [fault for document in documents for fault in _unlike_columns(document, entered)]
    for set_id in {fault.at.file.split("/")[1] for fault in faults} & entered.keys():
        told = {fault.at.file for fault in faults}
        entered[set_id] = {name: table for name, table in entered[set_id].items() if table.where not in told}
    return entered, faults


def _make(name: str, table: Table) -> object:
    read = reader_of(name)
    assert read is not None
    return read(table)


def _misplaced(document: Document, set_id: str, name: str) -> Fault | None:
    """Return the fault of a file that is no table which a yard enters, or None."""
    at = Span(document.file, 1, 1)
    if set_id not in limit_set_ids():
        meant = nearest(set_id, limit_set_ids())
        remedy = f"did you mean limits/{meant}/?" if meant else f"known: {', '.join(limit_set_ids())}"
        return Fault("unknown-reference", at, f"there is no limit set “{shown(set_id)}”", remedy)
    left = tables_left_to_yard(read_table(TABLES / set_id / "set.yaml"))
    if name in left:
        return None
    if reader_of(name) is not None:
        message = f"the table {name} of {set_id} is not one that a yard enters"
        return Fault("bad-value", at, message, "change a figure of it under `house: limits:` in yard.yaml instead")
    meant = nearest(name, left)
    remedy = f"did you mean {meant}.yaml?" if meant else f"a yard enters: {', '.join(left) or 'none'}"
    return Fault("unknown-reference", at, f"limit set {set_id} has no table “{shown(name)}”", remedy)


def _unlike_columns(document: Document, entered: Entered) -> Iterator[Fault]:
    """Tell an engine-space table whose columns are not those of the ampacity table."""
    _, set_id, name = document.file.removesuffix(".yaml").split("/")
    tables = entered.get(set_id, {})
    if name != "engine_factor" or not {"ampacity", "engine_factor"} <= tables.keys():
        return
    ampacity, factors = _make("ampacity", tables["ampacity"]), _make(name, tables[name])
    assert isinstance(ampacity, AmpacityTable)
    assert isinstance(factors, EngineFactor)
    columns_c = tuple(column_c for column_c, _ in factors.rows)
    if columns_c != ampacity.columns_c:
        wanted = ", ".join(f"{column_c:g}" for column_c in ampacity.columns_c)
        yield _fault(document, ("rows",), f"its columns are not those of ampacity.yaml: {wanted}")


def _fault(document: Document, steps: Path, message: str) -> Fault:
    """Return a fault at the nearest place above the steps that the file has."""
    while steps not in document.places and steps:
        steps = steps[:-1]
    key, value = document.places.get(steps, (Span(document.file, 1, 1),) * 2)
    is_missing = message.endswith("is missing")
    return Fault("missing-field" if is_missing else "bad-value", key if is_missing else value, message)
