"""Give typed access to one entry of a yard's data, and collect what is wrong with it."""

from __future__ import annotations

from typing import Any

from checker.boat.patch import Patched
from checker.finding import Path, Span
from checker.reading.document import Fault
from checker.reading.quantity import EXAMPLES, Dimension, QuantityError, read_number, read_size
from checker.reading.words import nearest, shown
from checker.units import Size

NOT_RECORDED = "not recorded"


class Entry:
    """Read the fields of one mapping; a field that cannot be used becomes a fault, once."""

    __slots__ = ("_faults", "_source", "data", "path")

    def __init__(self, source: Patched, path: Path, data: dict[str, Any], faults: list[Fault]) -> None:
        self._source = source
        self.path = path
        self.data = data
        self._faults = faults

    @property
    def id(self) -> str:
        """Return the entry's own id: the last step of its path."""
        return str(self.path[-1])

    def at(self, *steps: str | int) -> Span:
        """Return where a field of the entry stands: its value; without steps, the entry's own name."""
        if not steps:
            return self._source.key_span(self.path)
        return self._source.span((*self.path, *steps))

    def key_at(self, *steps: str | int) -> Span:
        """Return where a field's name stands."""
        return self._source.key_span((*self.path, *steps))

    def fault(self, check: str, at: Span, message: str, remedy: str = "") -> None:
        """Note a fault."""
        self._faults.append(Fault(check, at, message, remedy))

    def has(self, name: str) -> bool:
        """Tell whether a field is written."""
        return name in self.data

    def text(self, name: str, default: str = "") -> str:
        """Return a text field."""
        value = self.data.get(name, default)
        return value if isinstance(value, str) else str(value)

    def needed(self, name: str, example: str = "") -> str | None:
        """Return a text field that must be there; None and a fault if it is not."""
        if name in self.data:
            return self.text(name)
        hint = f"add “{name}”" + (f", e.g. `{name}: {example}`" if example else "")
        self.fault("missing-field", self.at(), f"{self.words} has no “{name}”", hint)
        return None

    @property
    def words(self) -> str:
        """Name the entry for a reader: circuits “P22”."""
        steps = [str(step) for step in self.path]
        return f"{' '.join(steps[:-1])} “{shown(steps[-1])}”".strip()

    def flag(self, name: str, default: bool = False) -> bool:
        """Return a true/false field."""
        return bool(self.data.get(name, default))

    def whole(self, name: str, default: int = 0) -> int:
        """Return a whole-number field."""
        value = self.data.get(name, default)
        return int(value) if isinstance(value, (int, float)) else default  # 4.0 is a whole number too

    def items(self, name: str) -> tuple[str, ...]:
        """Return a field that is a list of texts."""
        value = self.data.get(name, ())
        return tuple(str(item) for item in value) if isinstance(value, list) else ()

    def fields(self, name: str) -> dict[str, Any]:
        """Return a field that holds fields."""
        value = self.data.get(name, {})
        return value if isinstance(value, dict) else {}

    def entries(self, name: str) -> list[Entry]:
        """Return the entries of a field that maps ids to fields, in the order of their ids."""
        children = self.fields(name)
        return [
            Entry(self._source, (*self.path, name, key), children[key], self._faults)
            for key in sorted(children)
            if isinstance(children[key], dict)
        ]

    def number(self, name: str, dimension: Dimension) -> float | None:
        """Return a quantity in SI; None where it is not written or not recorded."""
        return self.quantity_at((name,), self.data.get(name), dimension)

    def needed_number(self, name: str, dimension: Dimension) -> float | None:
        """Return a quantity that must be there."""
        if self.needed(name, EXAMPLES[dimension].split(" or ")[0]) is None:
            return None
        return self.number(name, dimension)

    def quantity_at(self, steps: tuple[str | int, ...], value: Any, dimension: Dimension) -> float | None:
        """Return the quantity at a deeper place of the entry."""
        if value is None or value == NOT_RECORDED:
            return None
        try:
            return read_number(str(value), dimension)
        except QuantityError as error:
            self.fault("bad-value", self.at(*steps), f"{steps[-1]}: {error}")
            return None

    def size(self, name: str) -> Size | None:
        """Return a conductor size that must be there."""
        text = self.needed(name, "6 AWG")
        if text is None:
            return None
        try:
            return read_size(text)
        except QuantityError as error:
            self.fault("bad-value", self.at(name), f"{name}: {error}")
            return None

    def unknown(self, what: str, name: str, at: Span, known: Any) -> None:
        """Note a reference to something that does not exist."""
        meant = nearest(name, known)
        remedy = f"did you mean “{meant}”?" if meant else f"add it, or name one that exists ({len(list(known))} known)"
        self.fault("unknown-reference", at, f"there is no {what} “{shown(name)}”", remedy)
