"""List every check, by hand, in report order. A test holds the list against the modules."""

from __future__ import annotations

from checker.checks.bank import alike_batteries, bank_links, even_shares, inner_landing, string_device
from checker.checks.check import Check
from checker.checks.claims import role_claim, unlisted_state
from checker.checks.colours import colour_change, conductor_colour, negative_colour
from checker.checks.coordination import device_carries_load, rating_order, selectivity
from checker.checks.copper import conductor_area
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
from checker.checks.grounding import (
    bond_current,
    bond_joints,
    case_ground,
    common_ground,
    floating_part,
    grounding_size,
    metal_return,
    shield_loop,
)
from checker.checks.identification import label_ends, label_text, legend_name, place_mark
from checker.checks.loads import (
    heavy_motor,
    means_off,
    paralleled_devices,
    sneak_path,
    stalled_motor,
    switched_return,
    two_feeds,
)
from checker.checks.losses import (
    ahead_of_switch,
    alternator_cut_off,
    charger_cut_off,
    diode_way,
    lost_return,
    pump_stays_live,
    standby_days,
)
from checker.checks.monitor import monitor_map, monitor_settings, monitor_supply, shunt_banks
from checker.checks.neighbours import battery_fuel, start_bank_load, unlike_banks
from checker.checks.nets import (
    bank_tap,
    battery_loop,
    dead_short,
    load_return,
    load_voltage,
    loose_end,
    split_return,
)
from checker.checks.panels import light_circuits, panel_return, position_use, radio_device, return_screws
from checker.checks.passages import ac_apart, passage_guard
from checker.checks.protection import (
    device_rating,
    double_feed,
    protection_distance,
    return_protection,
    size_step,
    unprotected_conductor,
)
from checker.checks.sensing import charge_stop, converter_enable, diode_sense, sense_place
from checker.checks.shunt import shunt_bypass, shunt_direction, shunt_rating
from checker.checks.sources import array_voltage, source_device, source_maximum, source_voltage
from checker.checks.studs import live_cover, stack_order, stud_terminals, torque_value
from checker.checks.supports import support_spacing
from checker.checks.terminals import barrel_size, ring_hole, splice_place, terminal_kind, terminal_range
from checker.checks.zones import battery_vent, gas_locker, hot_device, isolation_claim, switch_reach, wet_place

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
    support_spacing,
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
    stud_terminals,
    ring_hole,
    stack_order,
    barrel_size,
    terminal_range,
    live_cover,
    terminal_kind,
    splice_place,
    torque_value,
    position_use,
    panel_return,
    light_circuits,
    return_screws,
    radio_device,
    source_voltage,
    source_device,
    source_maximum,
    array_voltage,
    sense_place,
    diode_sense,
    converter_enable,
    charge_stop,
    unlike_banks,
    start_bank_load,
    battery_fuel,
    shunt_banks,
    monitor_map,
    monitor_supply,
    monitor_settings,
    bond_current,
    bond_joints,
    metal_return,
    shield_loop,
    common_ground,
    grounding_size,
    floating_part,
    case_ground,
    switched_return,
    paralleled_devices,
    two_feeds,
    sneak_path,
    stalled_motor,
    heavy_motor,
    means_off,
    isolation_claim,
    gas_locker,
    wet_place,
    hot_device,
    switch_reach,
    battery_vent,
    passage_guard,
    ac_apart,
    conductor_colour,
    negative_colour,
    colour_change,
    label_text,
    label_ends,
    legend_name,
    place_mark,
    conductor_area,
    loose_end,
    legend_rating,
    unlisted_state,
    role_claim,
)
