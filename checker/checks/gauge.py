"""Judge conductors by themselves: ampacity, smallest sizes, insulation, material."""

from __future__ import annotations

from collections.abc import Iterator

from checker.boat.hull import Conductor
from checker.checks.bearing import SIZING
from checker.checks.check import Case, Place, Told, at_conductor, check
from checker.checks.remedy import smallest_gauge_words
from checker.checks.roles import EXEMPTIONS, continuous_a, exempt_as, is_electronic, size_exemption
from checker.checks.words import ampere, kept_length, short_length
from checker.finding import Basis, Measure, Outcome
from checker.units import Size

NO_FIGURE = "the table has no row for {size}"
METRIC_FIELD = "house.metric_sizes in yard.yaml (next-smaller-awg), or an AWG size"
GAUGE_FIELD = "house.gauge_sizes in yard.yaml (next-smaller-mm2), or a size in mm2"


def size_field(case: Case) -> str:
    """Name what to fill in where the set's table has no row for a size."""
    is_metric = not case.limits.lacks(["ampacity"]) and case.limits.ampacity.is_metric
    return GAUGE_FIELD if is_metric else METRIC_FIELD


def _facts(conductor: Conductor) -> tuple[tuple[str, str], ...]:
    return (
        ("size", conductor.size.text),
        ("insulation", f"{conductor.cable.insulation_c:g} C"),
        ("zones", " ".join(conductor.zones)),
        ("together", str(conductor.company)),
    )


@check(
    title="A conductor bears its continuous current",
    basis=Basis.LAW,
    citation="33 CFR § 183.425(b), (c) and Table 5; voluntary set: ABYC E-11 Tables VI (from memory)",
    formula="I ≤ table figure · engine-space factor · bundle factor",
    why="insulation that runs too hot ages, smokes and then burns",
    catalogue=("CON-01", "CON-02", "CON-03", "CON-13"),
    exemptions="communication, navigation electronics, inside a housing, resistance, pigtail, cranking (§ 183.425(g))",
    caution="the table holds for 30 C ambient; surges of seconds are not judged",
    per_set=True,
    needs=(*SIZING, EXEMPTIONS),
)
def ampacity(case: Case) -> Iterator[Outcome]:
    """Does every conductor bear the continuous current that it is meant to carry?

    The table's figure for size and insulation is taken times the engine-space factor if any
    part of the conductor crosses an engine space, and times the factor for conductors lying
    together where the limit set asks for one below 50 V (the federal rule does not). The
    current is the conductor's own, or else its circuit's. A current equal to the limit passes.
    """
    rule = case.limits.exemptions
    for conductor in case.boat.conductors.values():
        if conductor.is_bond:
            continue
        place = at_conductor(conductor)
        exempt = exempt_as(case, conductor, rule.ampacity_exempt_roles, "ampacity_exempt_roles")
        if exempt:
            yield ampacity.passed(case, place, exempt)
            continue
        current_a = continuous_a(case, conductor)
        bearing = case.bearings.of(conductor)
        if bearing is None:
            fault = NO_FIGURE.format(size=conductor.size.text)
            yield ampacity.not_assessed(case, place, fault, size_field(case))
        elif current_a is None:
            yield ampacity.not_assessed(case, place, "its continuous current is not written", "current")
        else:
            yield _judge_ampacity(case, conductor, current_a, bearing.ampacity_a, bearing.words)


def _judge_ampacity(case: Case, conductor: Conductor, current_a: float, ampacity_a: float, words: str) -> Outcome:
    def told() -> Told:
        return Told(
            fault=f"{conductor.size.text} carries {ampere(current_a)}, but bears {ampere(ampacity_a)} ({words})",
            remedy=smallest_gauge_words(case, conductor),
            inputs=(*_facts(conductor), ("current", ampere(current_a))),
        )

    measure = Measure("current", current_a, ampacity_a, "A")
    return ampacity.judge(case, at_conductor(conductor), measure, told, note=words)


@check(
    title="A conductor is not thinner than the smallest size allowed",
    basis=Basis.LAW,
    citation="33 CFR § 183.425(d), (e)",
    why="a thin conductor breaks under vibration and overheats before its device opens",
    catalogue=("CON-04", "CON-05"),
    exemptions="communication, navigation electronics, electronic circuits below 1 A, inside a housing, "
    "resistance, pigtails with less than 7 in exposed, cranking (§ 183.425(g)); none of these is free of protection",
    per_set=True,
    needs=("minimum_size",),
)
def minimum_size(case: Case) -> Iterator[Outcome]:
    """Is every conductor as thick as the limit set asks: 16 AWG, or 18 AWG inside a sheath of several cores?

    The metric set asks 1 mm2 of a single conductor longer than 200 mm, and 0.75 mm2 inside a
    sheath. A metric size is held against the area of a gauge if the yard lets the next smaller
    gauge speak for metric sizes; else it is not assessed. A gauge is held against a metric area
    as it is.
    """
    rule = case.limits.minimum_size
    for conductor in case.boat.conductors.values():
        place = at_conductor(conductor)
        exempt = size_exemption(case, conductor)
        in_sheath = conductor.cable.is_sheathed and conductor.cable.cores > 1
        least = rule.least(is_in_sheath=in_sheath, length_m=conductor.length_m)
        if least is None:
            note = f"single conductor no longer than {kept_length(rule.single_longer_than_m)}: no smallest size"
            yield minimum_size.passed(case, place, note)
            continue
        measure = Measure("area", conductor.size.area_mm2, least.area_mm2, "mm2", at_least=True, is_stepped=True)
        if exempt and not measure.holds:
            yield minimum_size.passed(case, place, exempt)
        elif not measure.holds and _may_be_exempt(case, conductor):
            fault = f"{conductor.size.text} is thinner than {least.text}; whether its role is exempt is not known"
            file = f"{EXEMPTIONS}.yaml in limits/{case.limits.id}/, from your licensed copy"
            yield minimum_size.not_assessed(case, place, fault, file)
        elif conductor.size.awg is None and not rule.is_metric and not case.house.next_smaller_awg:
            fault = f"the rule is printed in AWG, the size is {conductor.size.text}"
            yield minimum_size.not_assessed(case, place, fault, METRIC_FIELD)
        else:
            yield _judge_minimum(case, conductor, place, measure, least, in_sheath)


def _may_be_exempt(case: Case, conductor: Conductor) -> bool:
    """Tell whether a table of exemptions that was not entered could free a conductor of the smallest size."""
    return bool(case.limits.lacks([EXEMPTIONS])) and (bool(conductor.role) or is_electronic(case, conductor))


def _judge_minimum(
    case: Case, conductor: Conductor, place: Place, measure: Measure, least: Size, in_sheath: bool
) -> Outcome:
    def told() -> Told:
        where = "inside a sheath" if in_sheath else "as a single conductor"
        return Told(
            fault=f"{conductor.size.text} is thinner than {least.text}, the smallest allowed {where}",
            remedy=smallest_gauge_words(case, conductor),
            inputs=_facts(conductor),
        )

    return minimum_size.judge(case, place, measure, told)


@check(
    title="A thin core leaves its sheath only for a short way",
    basis=Basis.LAW,
    citation="33 CFR § 183.425(f)",
    formula="length outside the sheath ≤ the limit",
    why="a thin core without its sheath chafes through",
    catalogue=("CON-06",),
    exemptions="as for the smallest size",
    per_set=True,
    needs=("minimum_size",),
)
def sheath_exit(case: Case) -> Iterator[Outcome]:
    """Does a core that is thinner than 16 AWG leave its sheath by no more than 30 in?

    Under the metric set: one thinner than 1 mm2, by no more than 800 mm. Only cores that rely on
    their sheath for their size are looked at. The longer of both ends counts; it is written as
    `bare_tail`.
    """
    rule = case.limits.minimum_size
    for conductor in case.boat.conductors.values():
        relies = conductor.size.area_mm2 < rule.single.area_mm2 * (1 - 1e-9)
        if not relies or not conductor.cable.is_sheathed or size_exemption(case, conductor):
            continue
        place = at_conductor(conductor)
        if conductor.out_of_sheath_m is None:
            fault = f"{conductor.size.text} core: how far it leaves its sheath is not written"
            yield sheath_exit.not_assessed(case, place, fault, "bare_tail")
            continue
        yield _judge_exit(case, conductor, place, conductor.out_of_sheath_m)


def _judge_exit(case: Case, conductor: Conductor, place: Place, bare_m: float) -> Outcome:
    most_m = case.limits.minimum_size.max_out_of_sheath_m

    def told() -> Told:
        return Told(
            fault=f"{conductor.size.text} core is out of its sheath for {short_length(bare_m)}",
            remedy=f"keep the sheath to within {kept_length(most_m)} of the end, "
            f"or use {case.limits.minimum_size.single.text}",
            inputs=(*_facts(conductor), ("bare tail", short_length(bare_m))),
        )

    return sheath_exit.judge(
        case, place, Measure("bare length", bare_m, most_m, "m", shown_in=conductor.length_unit), told
    )


@check(
    title="The insulation stands the heat of every zone it crosses",
    basis=Basis.FROM_MEMORY,
    citation="ABYC E-11, older edition, 11.16.1.3.4 (75 C in engine spaces, 60 C elsewhere)",
    why="insulation melts at the normal heat of an engine",
    catalogue=("CON-14",),
    per_set=True,
    needs=("insulation",),
)
def insulation_rating(case: Case) -> Iterator[Outcome]:
    """Is the insulation rated for the hottest zone that the conductor crosses?

    Judged only under a limit set that gives a figure; the federal rule gives none.
    """
    rule = case.limits.insulation
    if rule is None:
        return
    for conductor in case.boat.conductors.values():
        engine = next((z for z in conductor.zones if case.boat.zones[z].is_engine_space), None)
        least_c = rule.elsewhere_min_c if engine is None else rule.engine_space_min_c
        hottest_c = max((case.boat.zones[z].ambient_c for z in conductor.zones), default=0.0)
        measure = Measure(
            "insulation", conductor.cable.insulation_c, max(least_c, hottest_c), "C", at_least=True, is_stepped=True
        )
        yield _judge_insulation(case, conductor, measure, engine)


def _judge_insulation(case: Case, conductor: Conductor, measure: Measure, engine: str | None) -> Outcome:
    def told() -> Told:
        where = f"crosses engine space {engine}" if engine else f"crosses {', '.join(conductor.zones)}"
        return Told(
            fault=f"insulation of {measure.value:g} C {where}, where {measure.limit:g} C is needed",
            remedy=f"use a cable with insulation rated {measure.limit:g} C or more, e.g. 105 C",
            inputs=_facts(conductor),
        )

    return insulation_rating.judge(case, at_conductor(conductor), measure, told)


@check(
    title="A conductor is insulated, stranded copper",
    basis=Basis.LAW,
    citation="33 CFR § 183.425(a)",
    why="solid conductors break, aluminium corrodes, and welding cable swells in oil",
    catalogue=("CON-15",),
    exemptions="the roles of § 183.425(g)",
    per_set=True,
    needs=("material", EXEMPTIONS),
)
def conductor_material(case: Case) -> Iterator[Outcome]:
    """Is every conductor insulated stranded copper, and no welding cable?"""
    rule = case.limits.material
    exempt_roles = case.limits.exemptions.material_exempt_roles
    for conductor in case.boat.conductors.values():
        cable, place = conductor.cable, at_conductor(conductor)
        faults = [
            words
            for words, is_wrong in (
                (cable.material, cable.material not in rule.materials),
                ("solid", not cable.is_stranded and "solid" not in rule.strands),
                ("bare", rule.must_be_insulated and not cable.is_insulated),
                ("welding cable", rule.refuses_welding and cable.is_welding),
            )
            if is_wrong
        ]
        exempt = exempt_as(case, conductor, exempt_roles, "material_exempt_roles") if faults else ""
        if faults and not exempt:
            told = Told(
                fault=f"cable type {cable.id} is {' and '.join(faults)}",
                remedy="use insulated, stranded copper cable made for boats",
                inputs=(("cable", cable.id), ("is", " ".join(faults))),
            )
            yield conductor_material.found(case, place, told)
        else:
            yield conductor_material.passed(case, place, exempt)
