"""Describe the findings that are made of what was found and measured aboard."""

from __future__ import annotations

from checker.finding import Basis, Card, Level

_PRACTICE = "common practice, no source"


def _card(name: str, title: str, level: Level, why: str, text: str, formula: str, *catalogue: str) -> Card:
    return Card(id=name, title=title, level=level, basis=Basis.COMMON_PRACTICE, citation=_PRACTICE, why=why,
                text=text, formula=formula, catalogue=catalogue, can_be_waived=True)  # fmt: skip


DROP_ABOVE = _card(
    "measured-drop-above", "A measured drop is explained by the cable and sound joints", Level.ERROR,
    "a bad crimp or joint heats under load until it fails",
    "The drop that the copper makes at the measured current, with an allowance for joints. Up to 50 A a quarter more "
    "and 0.05 V; above, a fifth more, 0.3 milliohm for each joint and 0.01 V.",
    "U ≤ 1.25·I·R + 0.05 V; above 50 A U ≤ 1.2·I·R + I·0.3 mΩ·joints + 0.01 V", "COM-01",
)  # fmt: skip
DROP_BELOW = _card(
    "measured-drop-below", "A measured drop is no smaller than the cable allows", Level.WARNING,
    "current returns by a path that no drawing shows, or another cable was fitted",
    "Copper of the written size and length cannot drop much less than predicted. Where it seems to, part of the "
    "current flows elsewhere, or the schedule is wrong. Not asked below 0.05 V, where a meter's last digit decides.",
    "U ≥ 0.6·I·R", "COM-02",
)  # fmt: skip
DROP_LIMIT = _card(
    "measured-drop-limit", "A measured drop keeps the limit of the limit set", Level.ERROR,
    "the load gets too little voltage, whatever the drawing promises",
    "The measured drop, scaled to the current of the circuit, against what the limit set allows the circuit alone.",
    "U·(I of the circuit)/(I measured) ≤ the limit", "COM-01",
)  # fmt: skip
SHUNT_CLAMP = _card(
    "shunt-against-clamp", "The monitor shows what a clamp shows", Level.ERROR,
    "a source or load bypasses the shunt, and the monitor shows a charge that is not there",
    "With one source alone, the current that the monitor shows against a clamp around all cables at the bank's post.",
    "|shunt − clamp| ≤ 2 % of the clamp + 1 A", "COM-03",
)  # fmt: skip
ALL_OFF_CURRENT = _card(
    "all-off-current", "With everything off no more flows than was declared", Level.ERROR,
    "something drains the bank that nobody knows of",
    "The current at the bank's post with all switches open, against the sum of what is declared to stay live.",
    "I ≤ the declared sum + 0.2 A", "COM-04",
)  # fmt: skip
MISSING = _card(
    "measurement-missing", "Every step of the test was done", Level.ERROR,
    "a boat that was not tested is handed over as one that was",
    "The steps that the wiring data ask for and the sheet does not answer. Told of hulls that are signed or "
    "delivered and have a sheet; the command `ready` tells it of every hull.",
    "", "COM-05",
)  # fmt: skip
TOO_LITTLE = _card(
    "measured-at-too-little", "A drop is measured with enough current to mean anything", Level.WARNING,
    "at a small current a bad joint looks sound",
    "At least half of the circuit's current must flow. What is measured with less counts as not measured.",
    "I ≥ half of the circuit's current", "COM-06",
)  # fmt: skip
LOAD_CURRENT = _card(
    "measured-load-current", "A load draws what the data say", Level.WARNING,
    "gauge, drop and device were chosen for another current",
    "The current that flowed while the drop was measured, against the circuit's: a quarter and 0.5 A more is another "
    "load than the data describe. Correct them for the whole class.",
    "I ≤ 1.25·(I of the circuit) + 0.5 A", "COM-07",
)  # fmt: skip
FITTED_DEVICE = _card(
    "fitted-device", "The devices aboard are those of the schedule", Level.ERROR,
    "the cable behind it is not protected, or the load does not start",
    "The rating read on each fuse and breaker against the data. The boat is judged again with what is fitted; what "
    "that brings up is told beside it.",
    "", "COM-08", "FLT-01",
)  # fmt: skip
STAYS_LIVE = _card(
    "live-when-off", "A load goes dead with its own device", Level.ERROR,
    "somebody works on a circuit that another one feeds",
    "With its own breaker open or its fuse out, every load is without voltage.",
    "", "COM-09",
)  # fmt: skip
POLARITY_CARD = _card(
    "measured-polarity", "Each load is connected the right way round", Level.ERROR,
    "electronics die, a motor turns the wrong way",
    "The positive of the supply stands at the positive post of each load.", "", "COM-10",
)  # fmt: skip
LEAKAGE_CARD = _card(
    "measured-leakage", "No current leaks into the bonding system", Level.ERROR,
    "stray current eats underwater metal",
    "The current from DC positive into the bonding system with the loads off, and whether that meets the DC negative "
    "at one place only.",
    "I ≤ 1 mA", "COM-11",
)  # fmt: skip
INSTRUMENT = _card(
    "measuring-instrument", "The instruments are named and calibrated", Level.WARNING,
    "figures of an unknown meter prove nothing",
    "A sheet names its instruments, the day and the role; each instrument's calibration covers that day.",
    "", "COM-12",
)  # fmt: skip
FAR_FROM_SISTERS = _card(
    "drop-far-from-sisters", "A measured drop is like that of the sister hulls", Level.NOTE,
    "a joint that is about to go bad is still inside its tolerance",
    "The measured drop over the predicted one, against the middle of the same figure on at least three other hulls "
    "of the class: half of it and 0.05 V apart.",
    "|U − the sisters' share·I·R| ≤ half of that, or 0.05 V", "COM-01",
)  # fmt: skip
OLD_SHEET = _card(
    "sheet-content", "The sheet was printed for the wiring as it is", Level.WARNING,
    "what was tested is not what is written now",
    "A sheet bears the mark of the wiring that it was printed for. The wiring data have changed since: print the "
    "sheet anew, and repeat what the change touches. Told by the command `ready` alone.",
    "", "COM-05",
)  # fmt: skip

MEASURED_CARDS = (
    FITTED_DEVICE, POLARITY_CARD, LEAKAGE_CARD, ALL_OFF_CURRENT, STAYS_LIVE, DROP_ABOVE, DROP_BELOW, DROP_LIMIT,
    TOO_LITTLE, LOAD_CURRENT, SHUNT_CLAMP, MISSING, INSTRUMENT, FAR_FROM_SISTERS, OLD_SHEET,
)  # fmt: skip
