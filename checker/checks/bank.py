"""Judge the banks: like batteries, even shares, take-offs, links, devices for strings."""

from __future__ import annotations

from collections.abc import Iterator

from checker.boat.parts import Battery
from checker.checks.bearing import SIZING
from checker.checks.check import Case, Place, Told, at_conductor, check
from checker.checks.words import BATTERY_FIGURES, ampere, no_figures, plain
from checker.finding import Basis, Level, Measure, Outcome
from checker.limits.limit_set import bank_figures, surge_s
from checker.network.bank import Bank, bare_strings, inner_landings, row_links
from checker.network.flow import Flow, Grid
from checker.network.solved import Solved

LITHIUM = ("lithium-iron-phosphate", "other-lithium")


def _banks(case: Case) -> Iterator[tuple[Bank, Place]]:
    for bank in case.studies.banks:
        first = case.boat.devices[bank.strings[0][0]] if bank.strings else None
        yield bank, Place(bank.id, first.at if first else case.boat.at)


@check(
    title="The batteries of a bank are alike",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    formula="in series V = Σ V, in parallel Ah = Σ Ah, of like batteries only",
    why="the weaker battery is overcharged or reversed",
    level=Level.WARNING,
    catalogue=("BNK-01",),
    exemptions="batteries of different banks, also where an emergency link can join them",
)
def alike_batteries(case: Case) -> Iterator[Outcome]:
    """Have all batteries of one bank the same voltage, capacity and chemistry, in strings of one length?"""
    for bank, place in _banks(case):
        kinds: dict[tuple[float, float, str], str] = {}
        for name in (name for string in bank.strings for name in string):
            part = case.boat.devices[name].part
            assert isinstance(part, Battery)
            kinds.setdefault((part.voltage_v, part.capacity_ah, part.chemistry), name)
        lengths = {len(string) for string in bank.strings}
        if len(kinds) <= 1 and len(lengths) <= 1:
            yield alike_batteries.passed(case, place)
            continue
        told = Told(
            fault="unlike batteries: "
            + "; ".join(f"{n} {plain(v)} V {plain(ah)} Ah {c}" for (v, ah, c), n in sorted(kinds.items()))
            + (f"; strings of {', '.join(str(n) for n in sorted(lengths))} batteries" if len(lengths) > 1 else ""),
            remedy="a matched set",
            inputs=tuple((n, f"{v:g} V {ah:g} Ah {c}") for (v, ah, c), n in sorted(kinds.items())),
        )
        yield alike_batteries.found(case, place, told)


@check(
    title="The strings of a bank share the current evenly",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    formula="shares by Kirchhoff's laws: ΣI = 0 at every post, V = E − I·R; largest share = max|I| / (ΣI / n)",
    why="the battery nearest the leads works itself to death first",
    level=Level.WARNING,
    catalogue=("BNK-04",),
    needs=("bank",),
)
def even_shares(case: Case) -> Iterator[Outcome]:
    """In the condition that asks most of a bank, does no string give much more than its equal share?

    The shares come out of the solved network: links, take-offs and internal resistances. Leads
    from opposite corners, or equal leads to a bus, share evenly; both leads from one end do not.
    """
    most = 1 + bank_figures(case.house.common).most_uneven_fraction
    for bank, place in _banks(case):
        if len(bank.strings) < 2:
            continue
        shares = None if case.studies.conditions.missing else _worst_shares(case, bank)
        if shares is None:
            yield even_shares.not_assessed(
                case, place, "no condition could be solved", "conditions, EMF and resistance"
            )
            continue
        condition, current_a, by_string = shares
        equal_a = current_a / len(bank.strings)
        ratio = max(abs(a) for a in by_string.values()) / equal_a if equal_a else 1.0
        sign, verb = (1, "give") if sum(by_string.values()) >= 0 else (-1, "take")
        words = ", ".join(f"{name} {ampere(round(sign * a, 1))}" for name, a in sorted(by_string.items()))
        told = Told(
            fault=f"of {ampere(round(current_a))} in condition {condition} the strings {verb} {words}",
            remedy="take positive and negative from opposite corners of the row, or lead each string to a bus alike",
            inputs=(("condition", condition), ("shares", words)),
        )
        measure = Measure("largest share", ratio, most, "equal shares", is_stepped=True)
        yield even_shares.judge(case, place, measure, lambda told=told: told, note=words)  # type: ignore[misc]


def _worst_shares(case: Case, bank: Bank) -> tuple[str, float, dict[str, float]] | None:
    """Return the condition in which a bank gives or takes most, its current, and each string's."""
    best: tuple[str, float, dict[str, float]] | None = None
    for solved in case.studies.conditions.solved:
        if not isinstance(solved.full, Flow):
            continue
        currents = solved.full.battery_currents()
        by_string = {string[0]: currents.get(string[0], 0.0) for string in bank.strings}
        total = abs(sum(by_string.values()))
        if best is None or total > best[1]:
            best = (solved.operation.condition.id, total, by_string)
    return best


@check(
    title="Nothing lands on a battery between others of its row",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="the shares become uneven, and a device protects only some of the feeders",
    level=Level.WARNING,
    catalogue=("BNK-05",),
)
def inner_landing(case: Case) -> Iterator[Outcome]:
    """Do loads and chargers land at the ends of a row of batteries or at its bus, not on one between others?"""
    landings = dict(inner_landings(case.boat, case.studies.network))
    for name, battery in sorted(landings.items()):
        conductor = case.boat.conductors.get(name)
        device = case.boat.devices.get(name)
        told = Told(
            fault=f"lands on {battery}, which stands between others of its row",
            remedy="land it on the bank's bus, or at the end of the row",
            inputs=(("battery", battery),),
        )
        if conductor is not None:
            yield inner_landing.found(case, at_conductor(conductor, conductor.at), told)
        elif device is not None:
            yield inner_landing.found(case, Place(name, device.at, device.circuit), told)
    for bank, place in _banks(case):
        if not any(battery in string for battery in landings.values() for string in bank.strings):
            yield inner_landing.passed(case, place)


@check(
    title="A bank's links bear what is asked with one string out",
    basis=Basis.LAW,
    citation="33 CFR § 183.425(b); that each string is taken out in turn is common practice, no source",
    formula="|I| with one string out ≤ the ampacity",
    why="with one string failed the link of the other burns",
    catalogue=("BNK-06",),
    per_set=True,
    needs=SIZING,
)
def bank_links(case: Case) -> Iterator[Outcome]:
    """With each string of a bank out in turn, does every conductor of the bank bear the largest lasting current?"""
    for bank, place in _banks(case):
        links = row_links(case.boat, case.studies.network, bank.id) if len(bank.strings) > 1 else []
        if links and case.studies.conditions.missing:
            fault = no_figures(case.studies.conditions.missing)
            yield bank_links.not_assessed(case, place, fault, BATTERY_FIGURES)
            continue
        memo = case.studies.network.memo
        if links and ("links", bank.id) not in memo:
            memo["links", bank.id] = _link_currents(case, bank)
        worst = memo.get(("links", bank.id), {})
        for name in links:
            conductor = case.boat.conductors[name]
            bearing = case.bearings.of(conductor)
            if bearing is None or name not in worst:
                continue
            current_a, words = worst[name]
            told = Told(
                fault=f"{conductor.size.text} carries {ampere(round(current_a, 1))} {words}, "
                f"but bears {ampere(bearing.ampacity_a)}",
                remedy="links as large as the bank's own leads",
                inputs=(("size", conductor.size.text), ("current", ampere(round(current_a, 1)))),
            )
            measure = Measure("current with a string out", current_a, bearing.ampacity_a, "A")
            yield bank_links.judge(case, at_conductor(conductor), measure, lambda told=told: told)  # type: ignore[misc]


def _link_currents(case: Case, bank: Bank) -> dict[str, tuple[float, str]]:
    """Return the largest current of each part over whole and reduced banks, in the condition that asks most."""
    solved = _hardest(case, bank)
    if solved is None:
        return {}
    worst: dict[str, tuple[float, str]] = {}
    edges = case.studies.network.edges
    operation = solved.operation
    answers = [(solved.full, "")]
    for out in bank.strings if len(bank.strings) > 1 else ():
        grid = Grid(
            case.studies.network, operation.state, case.studies.coppers.working, is_full=True,
            without_batteries=frozenset(out),
        )  # fmt: skip
        answers.append((grid.solve(operation.draws, operation.feeds), f"with string {out[0]} out"))
    for flow, words in answers:
        if isinstance(flow, Flow):
            for index, current_a in flow.currents_a.items():
                part = edges[index].part
                if abs(current_a) > worst.get(part, (-1.0, ""))[0]:
                    worst[part] = (abs(current_a), f"in condition {operation.condition.id} {words}".strip())
    return worst


def _hardest(case: Case, bank: Bank) -> Solved | None:
    """Return the lasting condition in which a bank gives or takes most."""
    shares = [
        (abs(sum(s.full.battery_currents().get(string[0], 0.0) for string in bank.strings)), s)
        for s in case.studies.conditions.solved
        if isinstance(s.full, Flow) and s.lasts_beyond(surge_s(case.house.common))
    ]
    return max(shares, key=lambda row: (row[0], row[1].operation.condition.id))[1] if shares else None


@check(
    title="Each of several strings has a device of its own",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    why="a fault in one string is fed by all others: a battery fire",
    level=Level.WARNING,
    catalogue=("BNK-07",),
    exemptions="two lead-acid strings: short, sleeved, full-size bank conductors do",
    needs=("bank",),
)
def string_device(case: Case) -> Iterator[Outcome]:
    """Has every string of a lithium bank, or of a bank of three strings or more, an overcurrent device?"""
    figures = bank_figures(case.house.common)
    for bank, place in _banks(case):
        first = case.boat.devices[bank.strings[0][0]].part if bank.strings else None
        is_lithium = isinstance(first, Battery) and first.chemistry in LITHIUM
        if len(bank.strings) <= (1 if is_lithium else figures.strings_without_device):
            yield string_device.passed(case, place)
            continue
        bare = bare_strings(case.studies.network, case.studies.usual, bank.strings)
        if not bare:
            yield string_device.passed(case, place)
            continue
        kind = "lithium" if is_lithium else "parallel"
        told = Told(
            fault=f"{len(bank.strings)} {kind} strings, and no device at the top of {', '.join(bare)}",
            remedy="a fuse for each string at its positive post",
            inputs=(("strings", str(len(bank.strings))), ("bare", " ".join(bare))),
        )
        yield string_device.found(case, place, told)
