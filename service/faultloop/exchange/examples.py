"""Invented measured points and an invented policy, used in the document of the interface and held by tests."""

from typing import Any

EXAMPLE_REQUEST: dict[str, Any] = {
    "point": {"label": "Bench 3, socket 2", "location": "repair room"},
    "supply": {"earthing": "TN-C-S", "nominal_voltage_to_earth_v": 230, "phases": 1},
    "circuit": {"role": "final", "feeds": "socket-outlets", "rated_current_a": 32},
    "overcurrent_device": {"kind": "miniature-circuit-breaker", "characteristic": "B", "rated_current_a": 32},
    "residual_current_device": {"residual_type": "A", "rated_residual_operating_current_ma": 30},
    "readings": {
        "earth_fault_loop_impedance_ohm": {"value": 0.72, "method": "no-trip"},
        "external_earth_fault_loop_impedance_ohm": 0.18,
        "residual_operating_time_ms": {"1": 24},
    },
    "rules": "bs-7671",
}

EXAMPLE_SEPARATED: dict[str, Any] = {
    "label": "Bench 4, transformer outlet",
    "nominal_voltage_between_lines_v": 230,
    "frequency_hz": 50,
    "transformer": {
        "rated_power_va": 630,
        "primary_voltage_v": 230,
        "secondary_voltage_v": 230,
        "short_circuit_voltage_percent": 5.5,
        "load_loss_w": 24,
        "winding_insulation": "double-or-reinforced",
    },
    "outlets": 1,
    "items": [
        {
            "label": "amplifier under repair",
            "protection_class": "I",
            "filter_capacitance_nf": 4.7,
            "lead": {"length_m": 2, "area_mm2": 1},
        }
    ],
    "earth_contacts": "unconnected",
    "wiring_length_m": 6,
    "circuit": {"line_conductor": {"material": "copper", "insulation": "pvc", "area_mm2": 1.5}},
    "overcurrent_device": {
        "kind": "miniature-circuit-breaker",
        "characteristic": "B",
        "rated_current_a": 2,
        "poles": 2,
    },
    "readings": {
        "contact_current_l1_ma": 0.12,
        "contact_current_l2_ma": 0.09,
        "insulation_resistance_megohm": 80,
        "winding_insulation_resistance_megohm": {"value": 200, "bound": "above"},
    },
    "rules": "bs-7671",
}
EXAMPLE_FILE = (
    "point_id,label,earthing,nominal_voltage_to_earth_v,role,feeds,rated_current_a,overcurrent_device,"
    "residual_current_device,external_earth_fault_loop_impedance_ohm,earth_fault_loop_impedance_ohm,"
    "residual_operating_time_ms,rules\r\n"
    "B1,Bench 1,TN-C-S,230,final,socket-outlets,32,B32,30 mA A,0.18,0.62,24,bs-7671\r\n"
    "B2,Bench 2,TN-C-S,230,final,socket-outlets,32,B32,30 mA A,0.18,OL,24,bs-7671\r\n"
    "B3,Bench 3,TN-C-S,230,final,socket-outlets,32,B1000,30 mA A,0.18,0.66,24,bs-7671\r\n"
)
EXAMPLE_BATCH: dict[str, Any] = {
    "defaults": {name: EXAMPLE_REQUEST[name] for name in EXAMPLE_REQUEST if name not in ("point", "readings")},
    "rows": [
        {"point": {"id": "B1", "label": "Bench 1"}, "readings": EXAMPLE_REQUEST["readings"]},
        {"point": {"id": "B2", "label": "Bench 2"}, "readings": {"earth_fault_loop_impedance_ohm": "OL"}},
    ],
}
EXAMPLE_RULES: dict[str, Any] = {
    "id": "site-rules",
    "edition": "2026",
    "title": "Site rules",
    "extends": "bs-7671:2018",
    "insulation": {
        "value": 2,
        "unit": "Mohm",
        "clause": "4.2",
        "source": "site policy of the safety officer",
        "sourcing": "assumption",
        "checked": "2026-11-30",
    },
}
EXAMPLE_BENCH: dict[str, Any] = {
    "label": "Bench 2",
    "location": "repair room",
    "supplies": [
        {
            "id": "wall",
            "kind": "earthed",
            "nominal_voltage_to_earth_v": 230,
            "overcurrent_device": {"kind": "miniature-circuit-breaker", "characteristic": "B", "rated_current_a": 16},
            "residual_current_device": {"residual_type": "A", "rated_residual_operating_current_ma": 30},
            "earth_fault_loop_impedance_ohm": 0.6,
        },
        {
            "id": "separated",
            "kind": "separated",
            "nominal_voltage_between_lines_v": 230,
            "transformer": {"rated_power_va": 630, "short_circuit_voltage_percent": 5, "screen": False},
            "bonding": "none",
            "fed_from": "wall",
        },
    ],
    "items": [
        {
            "id": "amplifier",
            "label": "valve amplifier under repair",
            "fed_by": "separated",
            "protection_class": "I",
            "role": "under-test",
            "filter_capacitance_nf": 4.7,
            "stored": {"capacitance_uf": 100, "voltage_v": 400, "discharge_resistance_ohm": 220000},
        },
        {
            "id": "scope",
            "fed_by": "wall",
            "protection_class": "I",
            "role": "instrument",
            "signal_ground": {"kind": "earthed"},
        },
    ],
    "planned_link": {"id": "clip", "kind": "probe-clip", "from": "scope.signal_ground", "to": "amplifier.L2"},
}
