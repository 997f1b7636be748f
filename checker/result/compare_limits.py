"""Compare what boats are held against on two sides: tables, the tool, the yard's own rules."""

from __future__ import annotations

from collections.abc import Iterator

from checker.result.comparison import LimitMove
from checker.result.side import Rule, Side


def limit_moves(base: Side, head: Side) -> tuple[LimitMove, ...]:
    """Return what moved; what is loosened by the yard comes first."""
    moves = [*_rules(base, head), *_sizes(base, head), *_tool(base, head), *_tables(base, head)]
    return tuple(sorted(moves, key=lambda move: not move.is_loosened))


def _tool(base: Side, head: Side) -> Iterator[LimitMove]:
    if base.tool_version != head.tool_version:
        yield LimitMove("tool", "fairloom", base.tool_version, head.tool_version)


def _tables(base: Side, head: Side) -> Iterator[LimitMove]:
    if not base.marks or not head.marks:
        if bool(base.marks) != bool(head.marks):
            side = head if base.marks else base
            yield LimitMove("tables", f"{side.name} does not tell which limit tables it used", "", "")
        return
    for owner in sorted({*base.marks, *head.marks}):
        old, new = base.marks.get(owner, {}), head.marks.get(owner, {})
        for table in sorted({*old, *new}):
            if old.get(table) != new.get(table):
                whose = "tables of no set" if owner == "common" else owner
                yield LimitMove("table", f"{table} ({whose})", old.get(table, "none"), new.get(table, "none"))


def _sizes(base: Side, head: Side) -> Iterator[LimitMove]:
    old, new = dict(base.sizes), dict(head.sizes)
    for name in sorted({*old, *new}):
        if old.get(name) != new.get(name):
            now = new.get(name, "not assessed")
            yield LimitMove("rule", name, old.get(name, "not assessed"), now, is_loosened=name in new)


def _rules(base: Side, head: Side) -> Iterator[LimitMove]:
    old, new = ({(r.kind, r.what, r.limit_set): r for r in side.rules} for side in (base, head))
    for key in sorted({*old, *new}):
        before, after = old.get(key), new.get(key)
        if before is not None and after is not None and before.new == after.new:
            continue
        rule = after or before
        assert rule is not None
        what = f"{rule.what} of {rule.limit_set}" if rule.limit_set else rule.what
        was = before.new if before else rule.old
        now = after.new if after else rule.old
        yield LimitMove("rule", what, was, now, _is_looser(before, after), after.reason if after else "")


def _is_looser(before: Rule | None, after: Rule | None) -> bool:
    """Tell whether a rule of the yard lets pass more than it did."""
    if before is None:
        return after is not None and after.is_loosened
    if after is None:
        return not before.is_loosened
    if before.is_loosened is not after.is_loosened:
        return after.is_loosened
    if after.kind == "drop group":
        return bool(_services(before) - _services(after))
    gaps = [_gap(rule) for rule in (before, after)]
    if gaps[0] is None or gaps[1] is None:
        return after.is_loosened
    return gaps[1] > gaps[0] if after.is_loosened else gaps[1] < gaps[0]


def _services(rule: Rule) -> set[str]:
    return set(rule.new.removesuffix(" in the critical group").split(", "))


def _gap(rule: Rule) -> float | None:
    """Return how far a rule is from what the limit set says, or None where it is no figure."""
    try:
        return abs(float(rule.new) - float(rule.old))
    except ValueError:
        return None
