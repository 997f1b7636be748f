"""Lay a comparison out in sections, worst news first; text and Markdown render the same sections."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from checker.output.compare_aboard_words import difference_words, retrofit_words
from checker.output.compare_words import (
    Names,
    count_words,
    fact_words,
    figures_words,
    headroom_words,
)
from checker.result.cards import NOT_STUDIED
from checker.result.comparison import (
    FILES,
    Comparison,
    FindingChange,
    FindingKind,
    Headroom,
    LimitMove,
    Lost,
    LostKind,
    Silenced,
    SilencedKind,
    Standing,
)
from checker.result.gather import natural

MOST_IN_FULL = 3
"""Findings of one check on the same hulls that are told in full."""


@dataclass(frozen=True, slots=True)
class Item:
    """Hold one line of a section, and lines that belong to it."""

    text: str
    details: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True)
class Section:
    """Hold a section; `is_folded` is what a reader opens only when he wants it."""

    title: str
    items: tuple[Item, ...]
    is_folded: bool = False
    none: str = ""
    count: int | None = None

    @property
    def heading(self) -> str:
        """Return the title with what the section counts: its items, or what it says."""
        return f"{self.title}: {len(self.items) if self.count is None else self.count}"


def verdict(comparison: Comparison) -> str:
    """Tell the change in one line: hulls worse, better, unchanged; new errors, and those on hulls already built."""
    hulls = [subject for subject in comparison.subjects if subject.is_hull]
    errors = comparison.new_errors
    words = [f"{_standings([hull.standing for hull in hulls], 'hull')}; {count_words(len(errors), 'new error')}"]
    if errors:
        built = [hull for hull in hulls if hull.is_built and any(hull.id in error.on for error in errors)]
        told = ", ".join(hull.id for hull in built[:6]) + (" …" if len(built) > 6 else "")
        words.append(f"on {count_words(len(built), 'hull')} already built{f' ({told})' if told else ''}")
    return ", ".join(words)


def _standings(standings: Sequence[Standing], word: str) -> str:
    counts = {one: standings.count(one) for one in Standing}
    words = [f"{count_words(counts[Standing.WORSE], word)} worse"]
    words += [f"{counts[one]} {one.value}" for one in (Standing.BETTER, Standing.UNCHANGED)]
    words += [f"{counts[one]} {one.value}" for one in (Standing.NEW, Standing.GONE) if counts[one]]
    return ", ".join(words)


def preface(comparison: Comparison) -> Iterator[str]:
    """Yield the lines under the verdict: what was compared, the option sets, what one cannot know."""
    yield f"compared: {comparison.base} -> {comparison.head}"
    sets = [subject.standing for subject in comparison.subjects if not subject.is_hull]
    if sets:
        yield f"option sets that may be sold: {_standings(sets, 'set').replace(' sets', '').replace(' set', '')}"
    if comparison.limits and comparison.differences == ():
        yield "no boat changed: what they are held against did"


def sections(comparison: Comparison) -> tuple[Section, ...]:
    """Return all sections in reading order."""
    names = Names(comparison.subjects)
    ours = [change for change in comparison.findings if not change.by_limits]
    new = [change for change in ours if change.kind is FindingKind.NEW]
    errors = [change for change in new if change.found.level == "error"]
    others = [change for change in new if change.found.level != "error"]
    moved = sum(error.by_limits for error in comparison.new_errors)
    by_limits = f"; {moved} by changed limits are told below" if moved else ""
    found = [
        Section("new errors", tuple(_findings(errors, names)), count=len(errors),
                none=f"new errors by changes of the boats: none{by_limits}"),
        Section("new warnings and notes", tuple(_findings(others, names, short=True)), count=len(others)),
        Section("what says less now", tuple(_silenced(one, names) for one in comparison.silenced),
                none="what says less now (waivers, limits, exemptions, roles, facts of zones): nothing"),
        Section("looked at no more", tuple(_lost(one, names) for one in comparison.lost),
                none="looked at no more: nothing"),
        Section("headroom lost near the limit",
                tuple(_headroom(one, names) for one in comparison.headroom if not one.by_limits),
                none="headroom lost near the limit: none"),
        Section("changed limits, apart from the boats", tuple(_limits(comparison, names))),
        *_differences(comparison, names),
        Section("hulls already built that the change reaches", tuple(_built(comparison)), count=_reached(comparison)),
        Section("fixed", tuple(_gone(one, names) for one in ours if one.kind is FindingKind.FIXED), is_folded=True),
        Section("moved, still there", tuple(_moved(one, names) for one in ours if one.kind is FindingKind.MOVED),
                is_folded=True),
    ]  # fmt: skip
    return tuple(section for section in found if section.items or section.none)


def _subject(change: FindingChange) -> str:
    found = change.found
    return found.part if found.circuit in ("", found.part) else f"{found.part} of {found.circuit}"


def _finding(change: FindingChange, names: Names, *, short: bool = False) -> Item:
    found = change.found
    was = f" ({change.was})" if change.was else ""
    is_of_many = len(change.on) > 1 and found.part in change.on
    subject = f"{_subject(change)}: " if found.check != NOT_STUDIED.id and not is_of_many else ""
    details = [f"on {names.on(change.on)}"] if change.on != (FILES,) else []
    if not short and found.at:
        details.append(f"at {found.at}")
    if not short and change.after is not None:
        sets = f" ({' and '.join(change.limit_sets)})" if change.limit_sets else ""
        was_figures = f", was {figures_words(change.before)}" if change.before else ""
        details.append(f"measured {figures_words(change.after)}{was_figures}{sets}")
    if found.remedy:
        details.append(f"remedy: {found.remedy}")
    if not short and found.path:
        details.append(f"path: {' > '.join(found.path)}")
    return Item(f"{found.level}: {subject}{found.fault} [{found.check}]{was}", tuple(details))


def _findings(changes: Sequence[FindingChange], names: Names, *, short: bool = False) -> Iterator[Item]:
    """Tell findings; of many of one check on the same hulls the worst in full, the others by name."""
    groups: dict[tuple[object, ...], list[FindingChange]] = {}
    for change in changes:
        groups.setdefault((change.found.check, change.found.level, change.on, bool(change.was)), []).append(change)
    for rows in groups.values():
        worst = sorted(rows, key=_headroom_left) if len(rows) > MOST_IN_FULL else rows
        yield from (_finding(one, names, short=short) for one in worst[:MOST_IN_FULL])
        more = sorted((_subject(one) for one in worst[MOST_IN_FULL:]), key=natural)
        if more:
            found = rows[0].found
            yield Item(f"{found.level}: {len(more)} more like these [{found.check}]: {', '.join(more)}")


def _headroom_left(change: FindingChange) -> float:
    headroom = change.after.headroom if change.after else None
    return float("inf") if headroom is None else headroom


def _gone(change: FindingChange, names: Names) -> Item:
    return Item(f"{_subject(change)}: {change.found.fault} [{change.found.check}]: {names.short(change.on)}")


def _moved(change: FindingChange, names: Names) -> Item:
    worse = "worse: " if change.is_worse else ""
    where = f" (was at {change.moved_from})" if change.moved_from else ""
    figures = ""
    if change.before is not None and change.after is not None:
        figures = f": {figures_words(change.before)} -> {figures_words(change.after)}"
    text = f"{worse}{_subject(change)}{where}{figures or f': {change.found.fault}'} [{change.found.check}]"
    return Item(f"{text}: {names.short(change.on)}")


_SILENCED = {
    SilencedKind.RULE: "rule of the yard", SilencedKind.LIMIT_SET: "no longer judged by",
    SilencedKind.WAIVER_ADDED: "new waiver", SilencedKind.WAIVER_WIDENED: "waiver that accepts more",
    SilencedKind.WAIVER_EXTENDED: "waiver that lasts longer", SilencedKind.LEVEL: "level of",
    SilencedKind.EXEMPTION: "now exempt from",
}  # fmt: skip


def _silenced(one: Silenced, names: Names) -> Item:
    if one.fact is not None and one.kind is SilencedKind.FACT:
        text = f"{one.where}: {fact_words(one.fact)}" if one.fact.key else f"{one.where} is studied no more"
    elif one.kind in (SilencedKind.WAIVER_ADDED, SilencedKind.WAIVER_WIDENED, SilencedKind.WAIVER_EXTENDED):
        was = f"{one.old} -> " if one.old else ""
        text = f"{_SILENCED[one.kind]} {one.where}, until {was}{one.new}"
    elif one.kind is SilencedKind.EXEMPTION:
        text = f"{_SILENCED[one.kind]} {one.where}: {one.new}"
    else:
        change = f": {one.old} -> {one.new}" if one.new else ""
        text = f"{_SILENCED[one.kind]} {one.where}{change}"
    details = [f"on {names.on(one.on)}"] if one.on else []
    if one.hides:
        details.append(f"hides: {_hidden(one.hides)}")
    if one.reason:
        details.append(f"reason: {one.reason}")
    return Item(text, tuple(details))


def _hidden(hides: Sequence[tuple[str, str]]) -> str:
    """Name what is hidden: each check once, with its parts."""
    by_check: dict[str, list[str]] = {}
    for check, part in hides:
        by_check.setdefault(check, []).append(part)
    told = [
        f"{check} at {', '.join(parts[:8])}{f' and {len(parts) - 8} more' if len(parts) > 8 else ''}"
        for check, parts in by_check.items()
    ]
    return "; ".join(told)


def _lost(one: Lost, names: Names) -> Item:
    more = len(one.names) - 8
    listed = ", ".join(one.names[:8]) + (f" and {more} more" if more > 0 else "")
    if one.kind is LostKind.SUBJECT:
        return Item(f"not there any more: {listed}")
    if one.kind is LostKind.STUDY:
        return Item(f"could not be studied: {listed}")
    where = f"on {names.on(one.on)}"
    if one.kind is LostKind.CIRCUIT:
        return Item(f"{'circuit' if len(one.names) == 1 else 'circuits'} gone: {listed}", (where,))
    if one.kind is LostKind.PLACES:
        return Item(f"{one.check} looks at {count_words(len(one.names), 'place')} less: {listed}", (where,))
    fill_in = (f"fill in: {one.why}",) if one.why else ()
    return Item(f"not assessed any more: {one.check} at {listed}", (where, *fill_in))


def _headroom(one: Headroom, names: Names) -> Item:
    left = f"headroom {headroom_words(one.before)} -> {headroom_words(one.after)}"
    return Item(f"{one.part}: {figures_words(one.after)}, {left} [{', '.join(one.checks)}]: {names.short(one.on)}")


def _limits(comparison: Comparison, names: Names) -> Iterator[Item]:
    for move in comparison.limits:
        yield Item(_move_words(move), (f"reason: {move.reason}",) if move.reason else ())
    moved = [change for change in comparison.findings if change.by_limits]
    yield from _findings([change for change in moved if change.kind is FindingKind.NEW], names)
    for kind, word in (
        (FindingKind.ACCEPTED, "finding by this that a waiver accepts"), (FindingKind.FIXED, "finding gone by this"),
        (FindingKind.MOVED, "finding with other figures"),
    ):  # fmt: skip
        rows = [change for change in moved if change.kind is kind]
        if rows:
            listed = ", ".join(f"{one.found.check} at {one.found.part}" for one in rows[:6])
            plural = word.replace("finding", "findings")
            yield Item(f"{count_words(len(rows), word, plural)}: {listed}{' …' if len(rows) > 6 else ''}")
    thin = [one for one in comparison.headroom if one.by_limits]
    if thin:
        listed = ", ".join(f"{one.part} ({headroom_words(one.after)} left)" for one in thin[:6])
        yield Item(f"{count_words(len(thin), 'place')} with less headroom by this: {listed}"
                   f"{' …' if len(thin) > 6 else ''}")  # fmt: skip


def _move_words(move: LimitMove) -> str:
    if move.kind == "tool":
        return f"fairloom {move.old} -> {move.new}"
    if move.kind == "table":
        return f"limit table {move.what} says something else"
    if move.kind == "tables":
        return move.what
    return f"rule of the yard: {move.what}: {move.old} -> {move.new}"


def _differences(comparison: Comparison, names: Names) -> Iterator[Section]:
    title = "what changed aboard"
    if comparison.differences is None:
        yield Section(title, (), none=f"{title}: not told, since a JSON result does not record what is aboard")
        return
    items = tuple(Item(difference_words(one, names.short(one.on))) for one in comparison.differences)
    yield Section(title, items, none=f"{title}: nothing")


def _reached(comparison: Comparison) -> int:
    reached = {hull for one in comparison.retrofits for hull in one.hulls} | {row.hull for row in comparison.behind}
    return len(reached)


def _built(comparison: Comparison) -> Iterator[Item]:
    for one in comparison.retrofits:
        yield Item(f"{', '.join(one.hulls)} ({one.status}): change aboard, or record what was built",
                   tuple(retrofit_words(one)))  # fmt: skip
    behind: dict[tuple[int, int, bool], list[str]] = {}
    for row in comparison.behind:
        behind.setdefault((row.revision, row.class_revision, row.is_new), []).append(row.hull)
    for (revision, class_revision, is_new), hulls in behind.items():
        since = "now behind" if is_new else "behind before, too"
        yield Item(f"{', '.join(hulls)}: built to revision {revision}, the class is at {class_revision} ({since})")
    for name in comparison.same_revision:
        yield Item(f"the revision of class {name} did not rise: raise it, so that these hulls show as behind")
