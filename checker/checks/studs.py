"""Judge the studs: how many terminals lie on each, in which order, under what cover and torque."""

from __future__ import annotations

import itertools
from collections.abc import Iterator

from checker.boat.hull import Device
from checker.boat.landing import Stack
from checker.boat.parts import Bus, Metal
from checker.checks.check import Case, Place, Told, check
from checker.checks.heaviest import NEVER, heaviest
from checker.checks.landed import BOLTED, Landed, at_part, at_workmanship, by_post, count_of, landed
from checker.checks.roles import continuous_a
from checker.checks.words import ampere
from checker.finding import Basis, Level, Measure, Outcome
from checker.limits.terminal_rule import joint_rule
from checker.network.live import unprotected_live_posts


@check(
    title="A stud holds no more terminals than it may",
    basis=Basis.FROM_MEMORY,
    citation="ABYC E-11, terminals on a stud (from memory)",
    formula="terminals on the stud ≤ most for one stud; on a bar: terminals ≤ studs × most for one stud",
    why="a tall stack works loose and heats",
    catalogue=("TRM-01",),
    exemptions="what plugs on without a conductor; returns of branch circuits under a screw of their own",
    caution="disconnect the battery before a stack is taken apart",
    needs=("terminals",),
    per_set=True,
)
def stud_terminals(case: Case) -> Iterator[Outcome]:
    """Are there no more terminals on a stud than the limit set, or the maker of the part, allows?

    Where `landings` lists a post, each of its studs is counted; else the post, or all studs of
    a bar together, since many cables on a long bar are sound. A lone terminal is no stack.
    Judged only under a limit set that gives a figure; the federal rule gives none.
    """
    rule = case.limits.terminals
    if rule is None or rule.most_per_stud is None:
        return
    unknown: dict[str, Device] = {}
    for post, ends in by_post(case).items():
        device = ends[0].device
        most = _most_per_stud(device, rule.most_per_stud)
        stacks = case.boat.landings.get(post)
        if stacks is not None:
            yield from _listed(case, post, ends, stacks, most)
            continue
        if len(ends) == 1 or ends[0].kind not in (*BOLTED, ""):
            continue
        studs = _studs(device)
        if len(ends) > most and (studs is None or not ends[0].kind):
            unknown.setdefault(device.part.id, device)
            continue
        yield _judge_post(case, post, ends, studs or 1, most)
    for device in unknown.values():
        field = "studs" if _studs(device) is None else "terminal"
        fault = f"{device.id} has more than {count_of(rule.most_per_stud, 'terminal')}, its {field} are not recorded"
        yield stud_terminals.not_assessed(case, at_part(device.part), fault.replace("terminal are", "terminal is"),
                                          field)  # fmt: skip


def _most_per_stud(device: Device, most: int) -> int:
    """Return how many terminals a stud takes: what its maker says counts where it is less."""
    part = device.part
    return min(most, part.terminals_per_stud or most) if isinstance(part, Bus) else most


def _studs(device: Device) -> int | None:
    """Return the number of studs of a post, None for a bus where nobody counted them."""
    return device.part.studs if isinstance(device.part, Bus) else 1


def _listed(case: Case, post: str, ends: list[Landed], stacks: tuple[Stack, ...], most: int) -> Iterator[Outcome]:
    """Judge each stud that `landings` lists, and tell what the list and the conductors disagree on."""
    named = [name for stack in stacks for name in stack.conductors]
    for stack in stacks:
        place = Place(f"{post} stud {stack.stud}", stack.at)
        if strays := _strays(ends, stacks, stack):
            yield stud_terminals.not_assessed(case, place, strays, "landings")
            continue
        told = _too_many(f"{count_of(len(stack.conductors), 'terminal')} on one stud", stack.conductors, most,
                         "move {more} to another stud, or to a bus bar, and list it there")  # fmt: skip
        measure = Measure("terminals", len(stack.conductors), most, "terminals", is_stepped=True)
        yield stud_terminals.judge(case, place, measure, lambda told=told: told)  # type: ignore[misc]
    left_out = sorted({one.conductor.id for one in ends} - set(named))
    if left_out:
        fault = f"no stud of {post} lists {', '.join(left_out)}"
        yield stud_terminals.not_assessed(case, Place(post, stacks[0].at if stacks else ends[0].device.at), fault,
                                          "landings")  # fmt: skip


def _strays(ends: list[Landed], stacks: tuple[Stack, ...], stack: Stack) -> str:
    """Tell what a list names that does not land on its post, or lands on it once but is named twice."""
    here = {one.conductor.id for one in ends}
    named = [name for other in stacks for name in other.conductors]
    strays = [name for name in stack.conductors if name not in here or named.count(name) > 1]
    return (
        f"the list of its terminals names {', '.join(strays)}, which ends elsewhere or is named twice" if strays else ""
    )


def _judge_post(case: Case, post: str, ends: list[Landed], studs: int, most: int) -> Outcome:
    names = tuple(one.conductor.id for one in ends)
    where = "one stud" if studs == 1 else count_of(studs, "stud")
    told = _too_many(f"{count_of(len(names), 'terminal')} on {where}", names, most * studs,
                     "move {more} to another stud or to a bus bar")  # fmt: skip
    measure = Measure("terminals", len(names), most * studs, "terminals", is_stepped=True)
    place = Place(post, ends[0].device.at)
    return stud_terminals.judge(case, place, measure, lambda: told)


def _too_many(count: str, names: tuple[str, ...], most: int, remedy: str) -> Told:
    return Told(
        fault=f"{count}: {', '.join(names)}",
        remedy=remedy.format(more=count_of(max(1, len(names) - most), "terminal")),
        inputs=(("terminals", " ".join(sorted(names))), ("most", str(most))),
    )


@check(
    title="The largest terminal lies next to the post",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source",
    formula="sizes do not rise away from the post",
    why="the current of the large cable crosses the small rings",
    level=Level.NOTE,
    catalogue=("TRM-03",),
)
def stack_order(case: Case) -> Iterator[Outcome]:
    """Do the sizes in a stack not rise away from the post?

    Studs that `landings` lists are looked at one by one. Where more terminals of unlike size
    share a post than it has studs and none is listed, the class's workmanship answers.
    """
    unsaid: list[str] = []
    for post, ends in by_post(case).items():
        stacks = case.boat.landings.get(post)
        if stacks is not None:
            for stack in stacks:
                if strays := _strays(ends, stacks, stack):
                    place = Place(f"{post} stud {stack.stud}", stack.at)
                    yield stack_order.not_assessed(case, place, strays, "landings")
                elif len(stack.conductors) > 1:
                    yield _judge_stack(case, post, stack)
            continue
        if ends[0].kind not in (*BOLTED, ""):
            continue
        areas = [one.conductor.size.area_mm2 for one in ends]
        if len(ends) <= (_studs(ends[0].device) or 1) or max(areas) <= min(areas) * (1 + 1e-9):
            continue
        if case.boat.workmanship.largest_first:
            yield stack_order.passed(case, Place(post, ends[0].device.at), "as the class's workmanship says")
        else:
            unsaid.append(post)
    if unsaid:
        fault = f"{count_of(len(unsaid), 'post')} with terminals of unlike size: their order is not recorded, " \
                f"first {unsaid[0]}"  # fmt: skip
        yield stack_order.not_assessed(case, at_workmanship(case), fault, "workmanship: stacking, or landings")


def _judge_stack(case: Case, post: str, stack: Stack) -> Outcome:
    conductors = [case.boat.conductors[name] for name in stack.conductors]
    place = Place(f"{post} stud {stack.stud}", stack.at)
    for below, above in itertools.pairwise(conductors):
        if above.size.area_mm2 > below.size.area_mm2 * (1 + 1e-9):
            best = sorted(conductors, key=lambda c: -c.size.area_mm2)
            order = ", ".join(f"{c.id} {c.size.text}" for c in best)
            told = Told(
                fault=f"{above.id} ({above.size.text}) lies on {below.id} ({below.size.text})",
                remedy=f"restack from the post outwards: {order}",
                inputs=(("stack", " ".join(f"{c.id} {c.size.text}" for c in conductors)),),
            )
            return stack_order.found(case, place, told)
    return stack_order.passed(case, place)


@check(
    title="What is always live and unprotected is covered",
    basis=Basis.LAW,
    citation="33 CFR § 183.445(b); § 183.420(b) for batteries",
    why="a dropped tool draws an arc that nothing opens",
    catalogue=("TRM-06",),
    exemptions="posts behind an overcurrent device, which § 183.445(b) accepts instead",
    caution="disconnect the battery before a boot or cover is fitted",
)
def live_cover(case: Case) -> Iterator[Outcome]:
    """Has every post a cover that a battery keeps live with all switches open and no device between?

    The ungrounded posts of batteries belong to these, and what conductors join to them: up to
    the first overcurrent device, and its line side.
    """
    network = case.studies.network
    live = unprotected_live_posts(network, case.studies.all_off)
    unknown: dict[str, Device] = {}
    for device in case.boat.devices.values():
        names = [f"{device.id}.{post}" if post else device.id for post in device.part.posts]
        bare = [name for name in names if network.index[name] in live]
        if not bare:
            continue
        if device.is_covered is None:
            unknown.setdefault(device.part.id, device)
        elif device.is_covered:
            yield live_cover.passed(case, Place(device.id, device.at, device.circuit))
        else:
            told = Told(
                fault=f"{' and '.join(bare)} stays live with every switch open, ahead of any overcurrent device, and "
                "is not covered",
                remedy="fit a boot or cover over it, and write `cover: true`",
                inputs=(("posts", " ".join(bare)), ("cover", "none")),
            )
            yield live_cover.found(case, Place(device.id, device.at, device.circuit), told)
    for device in unknown.values():
        fault = f"{device.id} is always live ahead of any overcurrent device; whether it is covered is not recorded"
        yield live_cover.not_assessed(case, at_part(device.part), fault, "cover")


@check(
    title="A joint that carries heavy current has a torque",
    basis=Basis.COMMON_PRACTICE,
    citation="common practice, no source; the maker's figure governs",
    formula="largest solved or written current of what lands on the part > 50 A: `torque` is written",
    why="a loose joint burns",
    level=Level.WARNING,
    catalogue=("TRM-09",),
    caution="general torque charts differ by 1.5 to 3 times for one thread and are too high for lead, brass and "
    "battery inserts: take the maker's figure",
    needs=("joints",),
)
def torque_value(case: Case) -> Iterator[Outcome]:
    """Does every part with bolted posts that carry more than 50 A tell the torque of its nuts?

    Told once for each part of the catalogue, since the figure belongs there. The current is
    the largest that a condition sends through a conductor there, or that the yard wrote.
    """
    above_a = joint_rule(case.house.common).torque_above_a
    heaviest: dict[str, tuple[float, Landed]] = {}
    solved = _solved_currents(case)
    for one in landed(case):
        is_bolted = one.kind in (*BOLTED, "clamp", "set-screw", "") and not one.on_screw
        if not is_bolted or isinstance(one.device.part, Metal):
            continue
        current_a = max(continuous_a(case, one.conductor) or 0.0, solved.get(one.conductor.id, 0.0))
        part_id = one.device.part.id
        if current_a > above_a and current_a > heaviest.get(part_id, (0.0,))[0] * (1 + 1e-9):
            heaviest[part_id] = (current_a, one)
    for part_id, (current_a, one) in sorted(heaviest.items()):
        place = at_part(one.device.part)
        if one.fittings.torque_nm is not None:
            yield torque_value.passed(case, place)
            continue
        if not one.kind:
            fault = (
                f"{one.post} of {one.device.id} carries {ampere(round(current_a, 1))}; whether its posts are bolted is "
                "not recorded"
            )
            yield torque_value.not_assessed(case, place, fault, "terminal, torque")
            continue
        told = Told(
            fault=f"{one.post} of {one.device.id} carries {ampere(round(current_a, 1))} over {one.conductor.id}, and "
            f"{part_id} tells no torque",
            remedy="write the maker's figure as `torque` of the part, e.g. `torque: 12 Nm`",
            inputs=(("part", part_id), ("post", one.post)),
        )
        yield torque_value.found(case, place, told)


def _solved_currents(case: Case) -> dict[str, float]:
    """Return the largest current of each conductor over all solved conditions, A."""
    edges = case.studies.network.edges_of
    return {
        name: max(
            (kind.edges.get(edge.index, NEVER)[0] for kind in heaviest(case) for edge in edges[name]), default=0.0
        )
        for name in case.boat.conductors
    }
