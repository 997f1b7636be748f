"""Tell on a hull's page what each hand switch makes dead, what stays live, and for how long a bank lasts."""

from __future__ import annotations

from collections.abc import Iterator

from checker.checks.words import ampere, measured
from checker.finding import Outcome
from checker.network.isolation import hand_switches, stays_live
from checker.output.pages.dossier import Dossier
from checker.output.pages.html import Content, Section, bullets, paragraph, table, tag
from checker.result.gather import natural
from checker.result.sheet import ALL_OFF

_MAY_STAY_LIVE = "ahead-of-switch"
_STANDBY = "standby-days"


def isolation(dossier: Dossier) -> Section:
    """Tell what to turn off, and what is live even then."""
    live = stays_live(dossier.boat, dossier.studies.network, dossier.studies.all_off)
    loads = [_live_row(dossier, name, banks) for name, banks in live.loads]
    sources = [
        (f"{source.device}.{source.post}",
         dossier.aboard.zone_words(dossier.boat.devices[source.device].zone), ampere(source.max_a),
         f"still reaches {', '.join(banks)}" if banks else "reaches no bank")
        for source, banks in live.sources
    ]  # fmt: skip
    told: tuple[Content, ...] = (
        paragraph(
            f"Told from the data, starting in the state {dossier.studies.usual.state.words}. Measure before you touch: "
            "a switch that is off proves nothing."
        ),
        table("switches", "Hand switches: what each one alone makes dead",
              ("switch", "place", "in use", "isolates when", "makes dead"), _switches(dossier)),
        table("live", "With every switch off, these loads stay live",
              ("load", "bank", "take out or open", "why it may"), loads)
        if loads else paragraph("With every switch off no load stays live."),
        tag("h3", "Live metal with every switch off"),
        bullets(_by_zone(dossier, live.devices)),
        paragraph(f"Conductors: {', '.join(sorted(live.conductors, key=natural)) or 'none'}."),
        table("sources", "Sources, with every switch off", ("output", "place", "up to", "with all off"),
              sources)
        if sources else paragraph("No source is aboard."),
        paragraph("A source is dead only when what drives it is off: shore power, daylight, the engine. A solar array "
                  "holds its voltage in daylight whatever is switched."),
    )  # fmt: skip
    return Section("isolation", "Isolation: what to switch off, and what stays live", told)


def _switches(dossier: Dossier) -> Iterator[tuple[str, ...]]:
    studies = dossier.studies
    for row in hand_switches(dossier.boat, studies.network, studies.usual):
        zone = dossier.aboard.zone_words(dossier.boat.devices[row.switch].zone)
        dead = "; ".join(dossier.named(name) for name in sorted(row.dead, key=natural))
        told = dead or ("nothing that another way does not feed" if row.is_closed else "nothing: it is open in use")
        yield dossier.named(row.switch), zone, "closed" if row.is_closed else "open", row.off, told


def _live_row(dossier: Dossier, load: str, banks: tuple[str, ...]) -> tuple[str, ...]:
    rung = next((rung for rung in dossier.subject.ladder if load in rung.serves), None)
    circuit = dossier.boat.circuits.get(dossier.boat.devices[load].circuit)
    own = rung.device if rung else circuit.device if circuit and circuit.device else "no device found"
    looked = [o for o in dossier.by_part.get(load, ()) if o.check == _MAY_STAY_LIVE]
    why = "; ".join(_why(outcome) for outcome in looked) or "not asked: input of a converter"
    return dossier.named(load), ", ".join(banks) or "over a converter", own, why


def _why(outcome: Outcome) -> str:
    return outcome.note or f"{outcome.verdict.value}: {outcome.fault}"


def _by_zone(dossier: Dossier, devices: tuple[str, ...]) -> Iterator[str]:
    zones: dict[str, list[str]] = {}
    for name in sorted(devices, key=natural):
        zones.setdefault(dossier.boat.devices[name].zone, []).append(name)
    for zone in sorted(zones, key=natural):
        yield f"{dossier.aboard.zone_words(zone)}: {', '.join(zones[zone])}"


def standby(dossier: Dossier) -> Section:
    """Tell for how many days each bank feeds what stays live."""
    currents_a = {step.part: step.current_a for step in dossier.handover.steps if step.kind == ALL_OFF}
    rows: list[tuple[str, ...]] = []
    for bank in dossier.studies.banks:
        outcome = next((o for o in dossier.by_part.get(bank.id, ()) if o.check == _STANDBY), None)
        current_a = currents_a.get(bank.id)
        draws = "not known" if current_a is None else ampere(round(current_a, 3))
        days, asked = ("not assessed", "") if outcome is None or outcome.measure is None else measured(outcome.measure)
        rows.append((bank.id, f"{bank.capacity_ah:g} Ah", draws, days, asked))
    headings = ("bank", "capacity", "current with every switch off", "lasts, down to the share that may be used",
                "asked for, at least")  # fmt: skip
    return Section("standby", "Standby days", (
        table("standby-days", "How long what stays live may be left alone", headings, rows, narrow=True)
        if rows else paragraph("No bank is aboard."),
    ))  # fmt: skip
