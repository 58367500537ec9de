"""Whole requests as a practitioner, or a careless one, might send them."""

from typing import Any

from hypothesis import strategies as st

from faultloop.protection.catalogue import listed_devices
from faultloop.protection.designations import Breaker

Body = dict[str, Any]

RULES = ("bs-7671", "bs-7671:2008", "bs-7671:2011", "iec-60364")
LOOP = "earth_fault_loop_impedance_ohm"
EXTERNAL = "external_earth_fault_loop_impedance_ohm"
LINE_NEUTRAL = "line_neutral_loop_impedance_ohm"
DEAD = "line_plus_protective_resistance_ohm"
PROTECTIVE = "protective_conductor_resistance_ohm"
ELECTRODE = "earth_electrode_resistance_ohm"
TIMES = "residual_operating_time_ms"


def between(least: float, greatest: float) -> st.SearchStrategy[float]:
    """Numbers as instruments show them, four figures at most, and some with all their bits."""
    shown = st.floats(least, greatest, allow_nan=False).map(lambda value: float(f"{value:.4g}"))
    return st.one_of(shown, st.floats(least, greatest, allow_nan=False)).map(lambda v: min(max(v, least), greatest))


ohms = st.one_of(between(0.0, 0.01), between(0.05, 3.0), between(0.3, 30.0), between(10.0, 3000.0))
instruments = st.fixed_dictionaries(
    {
        "percent": between(0, 30),
        "digits": st.sampled_from([0.0, 3.0, 5.0]),
        "resolution": st.sampled_from([0.001, 0.01]),
    },
    optional={
        "calibration_due": st.sampled_from(["2026-01-31", "2030-12-31"]),
        "zero_check": between(-0.1, 0.1),
    },
)


def measured(
    values: st.SearchStrategy[float],
    methods: tuple[str, ...] = ("no-trip", "high-current", "dead", "calculated", "declared"),
    bounds: tuple[str, ...] = ("exact", "exact", "exact", "above", "below"),
) -> st.SearchStrategy[Any]:
    """A plain number, or a reading with what is known about it."""
    told = st.fixed_dictionaries(
        {"value": values},
        optional={
            "bound": st.sampled_from(bounds),
            "method": st.sampled_from(methods),
            "instrument": instruments,
            "conductor_temperature_c": between(-40, 90),
            "taken_at": st.sampled_from(["2026-01-30", "2026-06-01T08:00:00Z"]),
        },
    )
    return st.one_of(values, told)


@st.composite
def curves(draw: st.DrawFn) -> Body:
    """A caller's own curve in order, with or without least times."""
    rated = draw(st.sampled_from([6.0, 16.0, 32.0, 63.0]))
    multiples = sorted(draw(st.sets(st.sampled_from([1.3, 1.6, 2.5, 4.0, 5.0, 8.0, 12.0, 20.0]), min_size=1)))
    times = sorted(draw(st.sets(st.sampled_from([3600.0, 60.0, 5.0, 1.0, 0.4, 0.2, 0.1, 0.01]), min_size=1)))[::-1]
    greatest = [{"current_a": m * rated, "time_s": t} for m, t in zip(multiples, times, strict=False)]
    points: Body = {"greatest": greatest}
    if draw(st.booleans()):
        first = greatest[0]
        points["least"] = [{"current_a": first["current_a"] * 0.9, "time_s": first["time_s"] * 0.5}]
    return {"kind": "curve", "rated_current_a": rated, "source": "a maker's sheet", "points": points}


@st.composite
def moulded_cases(draw: st.DrawFn) -> Body:
    """A moulded-case breaker with settings that fit together."""
    rated = draw(st.sampled_from([25.0, 63.0, 160.0]))
    overload = draw(st.sampled_from([0.5, 0.8, 1.0])) * rated
    settings = {"overload_current_a": overload}
    if draw(st.booleans()):
        settings |= {"short_time_current_a": 4 * overload, "short_time_greatest_s": draw(st.sampled_from([0.1, 0.35]))}
    if draw(st.booleans()):
        settings["instantaneous_current_a"] = draw(st.sampled_from([5.0, 10.0])) * overload
    return {"kind": "moulded-case-circuit-breaker", "rated_current_a": rated, "settings": settings}


@st.composite
def devices(draw: st.DrawFn) -> Body:
    """Any overcurrent device held, or now and then one that the request describes by points or settings."""
    if (way := draw(st.integers(0, 7))) < 2:
        return draw(curves() if way else moulded_cases())
    device = draw(st.sampled_from(listed_devices()))
    body: Body = {"rated_current_a": device.rated_current_a}
    if isinstance(device, Breaker):
        body |= {"kind": "miniature-circuit-breaker", "characteristic": device.characteristic}
        body |= draw(st.fixed_dictionaries({}, optional={"energy_limiting_class": st.sampled_from([1, 3])}))
    else:
        body |= {"kind": "fuse", "fuse_system": device.fuse_system, "utilisation_category": device.utilisation_category}
    return body | draw(
        st.fixed_dictionaries(
            {}, optional={"breaking_capacity_ka": between(0, 80), "let_through_energy_a2s": between(100, 1e6)}
        )
    )


residual_devices = st.fixed_dictionaries(
    {"rated_residual_operating_current_ma": st.sampled_from([6.0, 10.0, 30.0, 100.0, 300.0, 500.0, 1000.0])},
    optional={
        "residual_type": st.sampled_from(["AC", "A", "F", "B"]),
        "delay": st.sampled_from(["general", "selective", "time-delayed"]),
    },
)
conductors = st.fixed_dictionaries(
    {
        "material": st.sampled_from(["copper", "copper", "aluminium", "steel"]),
        "insulation": st.sampled_from(["pvc", "xlpe", "epr", "rubber", "mineral", "bare"]),
        "area_mm2": st.sampled_from([0.75, 1.0, 1.5, 2.5, 4.0, 6.0, 10.0, 16.0, 3.3]),
    }
)
circuits = st.fixed_dictionaries(
    {},
    optional={
        "role": st.sampled_from(["final", "final", "distribution"]),
        "feeds": st.sampled_from(["socket-outlets", "fixed-equipment", "mobile-equipment-outdoors"]),
        "rated_current_a": between(1, 100),
        "arrangement": st.sampled_from(["radial", "ring"]),
        "users": st.sampled_from(["ordinary", "instructed", "skilled"]),
        "designated_equipment": st.booleans(),
        "line_conductor": conductors,
        "neutral_conductor": conductors,
        "protective_conductor": conductors,
        "length_m": between(0, 300),
        "current_carrying_capacity_a": between(0, 100),
    },
)
supplies = st.fixed_dictionaries(
    {},
    optional={
        "earthing": st.sampled_from(["TN-S", "TN-C-S", "TT", "TT", "TN-S", "TN-C", "IT", "separated"]),
        "nominal_voltage_to_earth_v": st.sampled_from([230.0, 230.0, 230.0, 120.0, 277.0, 400.0, 240.0, 50.0, 1e-9]),
        "current": st.sampled_from(["ac", "ac", "ac", "dc"]),
        "phases": st.sampled_from([1, 3]),
        "frequency_hz": st.sampled_from([50.0, 60.0, 400.0]),
        "nominal_voltage_between_lines_v": st.sampled_from([400.0, 400.0, 240.0, 690.0, 230.0]),
        "declared_prospective_current_ka": between(0.1, 25),
        "means_of_earthing": st.fixed_dictionaries(
            {"evidence": st.just("seen")}, optional={"state": st.sampled_from(["proven", "doubtful", "lost"])}
        ),
    },
)
milliseconds = st.one_of(between(5, 60), between(1, 600), between(0, 1))
times = st.fixed_dictionaries({}, optional={multiple: measured(milliseconds) for multiple in ("0.5", "1", "2", "5")})
policies = st.fixed_dictionaries(
    {},
    optional={
        "temperature": st.sampled_from(["split", "two-thirds", "four-fifths", "none"]),
        "decision": st.sampled_from(["guarded", "simple"]),
        "coverage": between(0.5, 0.9999),
    },
)
all_readings = st.fixed_dictionaries(
    {},
    optional={
        **{name: measured(ohms) for name in (LOOP, EXTERNAL, LINE_NEUTRAL, DEAD, PROTECTIVE, ELECTRODE)},
        TIMES: times,
        "insulation_resistance_megohm": measured(between(0, 300_000)),
        "residual_operating_current_ma": measured(between(1, 400)),
        "voltage_v": measured(between(0, 300)),
        "voltage_neutral_to_earth_v": measured(between(0, 240)),
        "standing_leakage_ma": between(0, 30),
        "line_line_loop_impedance_ohm": measured(ohms),
        "voltage_l1_to_earth_v": measured(between(0, 240)),
        "voltage_l2_to_earth_v": measured(between(0, 240)),
        "contact_current_l1_ma": measured(between(0, 30)),
        "contact_current_l2_ma": measured(between(0, 30)),
        "winding_insulation_resistance_megohm": measured(between(0, 1000)),
        "bonding_resistance_ohm": measured(between(0, 5)),
        "first_fault_current_ma": measured(between(0, 2000)),
        "monitored_insulation_kohm": measured(between(0, 1000)),
        "polarity": st.sampled_from(["correct", "reversed", "not-tested"]),
    },
)
boards = st.fixed_dictionaries(
    {},
    optional={
        "line_neutral_loop_impedance_ohm": measured(ohms),
        "earth_fault_loop_impedance_ohm": measured(ohms),
        "prospective_current_ka": measured(between(0, 30)),
        "assembly_conditional_rating_ka": between(1, 25),
    },
)
cores = st.fixed_dictionaries(
    {"length_m": between(0, 50), "area_mm2": st.sampled_from([0.75, 1.5, 4.0, 3.3])},
    optional={"material": st.sampled_from(["copper", "aluminium"])},
)
transformers = st.fixed_dictionaries(
    {},
    optional={
        "rated_power_va": between(25, 25_000),
        "primary_voltage_v": st.sampled_from([230.0, 400.0]),
        "secondary_voltage_v": st.sampled_from([115.0, 230.0, 600.0]),
        "short_circuit_voltage_percent": between(1, 20),
        "short_circuit_tolerance_percent": between(0, 30),
        "load_loss_w": between(0, 500),
        "winding_insulation": st.sampled_from(["basic", "double-or-reinforced"]),
        "dielectric_test_v": between(500, 6000),
        "interwinding_capacitance_nf": between(0, 5),
        "screen": st.booleans(),
    },
)
items = st.fixed_dictionaries(
    {},
    optional={
        "protection_class": st.sampled_from(["I", "I", "II", "III"]),
        "filter_capacitance_nf": between(0, 50),
        "lead": cores,
        "stored": st.fixed_dictionaries(
            {"capacitance_uf": between(0.1, 1000), "voltage_v": between(0, 400)},
            optional={"discharge_resistance_ohm": between(10, 1e6)},
        ),
    },
)
separated_supplies = st.fixed_dictionaries(
    {},
    optional={
        "transformer": transformers,
        "outlets": st.integers(1, 6),
        "items": st.lists(items, max_size=4),
        "earth_contacts": st.sampled_from(["unconnected", "bonded", "earthed"]),
        "bonding_conductor": cores,
        "pole_earthed": st.booleans(),
        "wiring_length_m": between(0, 600),
    },
)
it_supplies = st.fixed_dictionaries(
    {},
    optional={
        "line_capacitance_to_earth_nf": between(0, 5000),
        "neutral_distributed": st.booleans(),
        "exposed_parts": st.sampled_from(["together", "separately"]),
        "insulation_monitor": st.fixed_dictionaries(
            {"fitted": st.booleans()}, optional={"set_point_kohm": between(1, 500), "alarm_tested": st.booleans()}
        ),
    },
)
requests = st.fixed_dictionaries(
    {"point": st.fixed_dictionaries({"label": st.text("abc äΩ", min_size=1, max_size=8)})},
    optional={
        "supply": supplies,
        "circuit": circuits,
        "board": boards,
        "separated_supply": separated_supplies,
        "it_supply": it_supplies,
        "overcurrent_device": devices(),
        "upstream_overcurrent_devices": st.lists(devices(), max_size=2),
        "residual_current_device": residual_devices,
        "upstream_residual_current_devices": st.lists(residual_devices, max_size=2),
        "readings": all_readings,
        "rules": st.sampled_from(RULES),
        "policy": policies,
    },
)


@st.composite
def judgeable(draw: st.DrawFn, earthing: tuple[str, ...] = ("TN-S", "TN-C-S", "TT")) -> Body:
    """Requests with everything that a verdict needs and readings that do not contradict each other.

    One loop reading, or Ze with R1 + R2, or on TT an electrode; exact, plausible, by measuring methods.
    """
    supply = {"earthing": draw(st.sampled_from(earthing)), "nominal_voltage_to_earth_v": 230.0}
    methods = ("no-trip", "high-current")
    exact = ("exact",)
    read: Body = draw(loop_readings(supply["earthing"] == "TT"))
    if draw(st.booleans()):
        read[LINE_NEUTRAL] = draw(measured(between(0.05, 4.0), ("high-current",), exact))
    request: Body = {
        "point": {"label": "any"},
        "supply": supply,
        "circuit": {
            "role": draw(st.sampled_from(["final", "final", "distribution"])),
            "feeds": draw(st.sampled_from(["socket-outlets", "fixed-equipment", "mobile-equipment-outdoors"])),
            "users": draw(st.sampled_from(["ordinary", "skilled"])),
        },
        "overcurrent_device": draw(devices()),
        "readings": read,
        "rules": draw(st.sampled_from(RULES)),
        "policy": draw(policies),
    }
    if draw(st.integers(0, 3)) == 0:
        request["upstream_overcurrent_devices"] = draw(st.lists(devices(), min_size=1, max_size=2))
    if draw(st.integers(0, 3)):
        request["residual_current_device"] = draw(residual_devices)
        read[TIMES] = {"1": draw(measured(between(5, 400), methods, exact))}
        if draw(st.booleans()):
            request["upstream_residual_current_devices"] = [draw(residual_devices)]
    return request


@st.composite
def loop_readings(draw: st.DrawFn, tt: bool) -> Body:
    """Readings of one loop in one of the ways in which it is found."""
    way = draw(st.sampled_from(["loop", "sum", "electrode"] if tt else ["loop", "sum"]))
    exact = ("exact",)
    if way == "electrode":
        return {ELECTRODE: draw(measured(between(5, 2000), ("dead",), exact))}
    if way == "sum" and not tt:
        return {
            EXTERNAL: draw(measured(between(0.05, 0.8), ("high-current",), exact)),
            DEAD: draw(measured(between(0.05, 3.0), ("dead",), exact)),
        }
    values = between(5, 2000) if tt else between(0.1, 5.0)
    return {LOOP: draw(measured(values, ("no-trip", "high-current"), exact))}
