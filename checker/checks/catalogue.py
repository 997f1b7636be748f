"""List every check, by hand, in report order. A test holds the list against the modules."""

from __future__ import annotations

from checker.checks.bank import alike_batteries, bank_links, even_shares, inner_landing, string_device
from checker.checks.check import Check
from checker.checks.claims import role_claim, unlisted_state
from checker.checks.coordination import device_carries_load, rating_order, selectivity
from checker.checks.devices import (
    breaker_type,
    bus_rating,
    device_bypass,
    device_voltage,
    ignition_protection,
    legend_rating,
    maker_device,
)
from checker.checks.drop import one_way_length, return_size, voltage_drop, voltage_drop_from_bank
from checker.checks.faults import conductor_withstand, far_end_clearing, interrupting_capacity
from checker.checks.flows import (
    minimum_voltage,
    polarised_device,
    solved_ampacity,
    solved_drop,
    solved_rating,
    working_point,
)
from checker.checks.gauge import ampacity, conductor_material, insulation_rating, minimum_size, sheath_exit
from checker.checks.losses import (
    ahead_of_switch,
    alternator_cut_off,
    charger_cut_off,
    diode_way,
    lost_return,
    pump_stays_live,
    standby_days,
)
from checker.checks.nets import (
    bank_tap,
    battery_loop,
    dead_short,
    load_return,
    load_voltage,
    loose_end,
    split_return,
)
from checker.checks.protection import (
    device_rating,
    double_feed,
    protection_distance,
    return_protection,
    size_step,
    unprotected_conductor,
)
from checker.checks.shunt import shunt_bypass, shunt_direction, shunt_rating

CHECKS: tuple[Check, ...] = (
    dead_short,
    battery_loop,
    load_voltage,
    load_return,
    split_return,
    bank_tap,
    unprotected_conductor,
    protection_distance,
    device_rating,
    size_step,
    double_feed,
    return_protection,
    device_bypass,
    device_voltage,
    breaker_type,
    bus_rating,
    maker_device,
    ignition_protection,
    ampacity,
    return_size,
    minimum_size,
    sheath_exit,
    insulation_rating,
    conductor_material,
    voltage_drop,
    voltage_drop_from_bank,
    one_way_length,
    working_point,
    solved_ampacity,
    solved_drop,
    minimum_voltage,
    solved_rating,
    polarised_device,
    interrupting_capacity,
    far_end_clearing,
    conductor_withstand,
    selectivity,
    rating_order,
    device_carries_load,
    alike_batteries,
    even_shares,
    inner_landing,
    bank_links,
    string_device,
    alternator_cut_off,
    charger_cut_off,
    diode_way,
    ahead_of_switch,
    pump_stays_live,
    lost_return,
    standby_days,
    shunt_bypass,
    shunt_direction,
    shunt_rating,
    loose_end,
    legend_rating,
    unlisted_state,
    role_claim,
)
