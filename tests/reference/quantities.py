"""Printed resistances, factors and constants."""

from collections.abc import Iterator

import numpy as np

from faultloop.electrical.body import severity_ratio
from faultloop.electrical.conductors import resistance, temperature_factor
from faultloop.electrical.measurement import conformance_probability
from faultloop.rules.conductors import adiabatic_k, ohm_per_km, service_temperature
from faultloop.rules.loader import shipped
from tests.reference.published import TABLE_41_1, Comparison, compared, oracles, rules_for

# Which factor of the table of conductors a printed condition means: material apart, insulation and area.
CORES = {
    "70 °C PVC core in cable or bunched <=300 mm2": ("pvc", 300.0),
    "70 °C PVC core in cable >300 mm2": ("pvc", 400.0),
    "70 °C PVC core in cable": ("pvc", 300.0),
    "90 °C thermosetting core in cable": ("xlpe", 25.0),
    "70 °C PVC line conductor <=300 mm2": ("pvc", 300.0),
    ">300 mm2": ("pvc", 400.0),
    "60 °C rubber": ("rubber", 25.0),
    "90 °C thermosetting": ("epr", 25.0),
    "mineral, exposed PVC covered": ("mineral", 25.0),
}


def known(value: float | None) -> float:
    """A value of a table, nan where there is none."""
    return float("nan") if value is None else value


def resistances() -> Iterator[Comparison]:
    """Greatest resistances of rigid conductors, and sums of two of them per metre."""
    for row in [*oracles("conductors", "CR-co-2-"), *oracles("conductors", "CR-al-2-")]:
        yield compared(
            row, "ohm/km", "resistance_ohm_per_km", lambda r=row: known(ohm_per_km(r["material"], float(r["area_mm2"])))
        )
    for row in oracles("conductors", "CS-"):
        pair = (float(row["line_conductor_mm2"]), float(row["protective_conductor_mm2"]))
        yield compared(
            row,
            "mohm/m",
            "resistance_mohm_per_m",
            lambda p=pair: 1000.0 * one_metre(known(ohm_per_km("copper", p[0])) + known(ohm_per_km("copper", p[1]))),
        )


def one_metre(per_km: float) -> float:
    """Resistance of a metre."""
    return float(resistance(np.array([per_km]), np.array([1.0]))[0])


def factor(operating_c: float, test_c: float) -> float:
    """Temperature factor with the coefficient of the default rule set."""
    alpha = rules_for("iec-60364").temperature.alpha_20.value
    return float(temperature_factor(np.array([operating_c]), np.array([test_c]), np.array([alpha]))[0])


def temperatures() -> Iterator[Comparison]:
    """Factors to 20 °C, the coefficient behind them, and the multiplier to service temperature."""
    for row in oracles("conductors", "CT-"):
        celsius = float(row["conductor_temperature_c"])
        to_20 = (lambda c=celsius: 1.0 / factor(c, 20.0)) if celsius > 20 else (lambda c=celsius: factor(20.0, c))
        yield compared(row, "to 20 C", "factor", to_20)
    for row in oracles("conductors", "CM-"):
        yield compared(row, "from 20 C", "factor", lambda: factor(known(service_temperature("pvc")), 20.0))
    for row in oracles("conductors", "CA-"):
        for key, found in shipped().items():
            value = found.rules.temperature.alpha_20.value
            yield compared(row, key, "coefficient_per_k", lambda v=value: v)


def adiabatic_factors() -> Iterator[Comparison]:
    """Adiabatic factors of cores in cables."""
    for row in oracles("conductors", "CK-"):
        if row["condition"] in CORES:
            insulation, area = CORES[row["condition"]]
            yield compared(
                row,
                f"{insulation},{area:g}",
                "k",
                lambda m=row["material"], i=insulation, a=area: known(adiabatic_k(m, i, a)),
            )


def constants() -> Iterator[Comparison]:
    """Factors and limits that every rule set with IEC's table repeats."""
    rows = {row["id"]: row for row in oracles("constants")}
    for key in TABLE_41_1:
        rules = rules_for(key)
        told = {
            "CO-cmax-10": rules.voltage_factor.greatest.value,
            "CO-two-thirds": rules.temperature.two_thirds.value,
            "CO-four-fifths": rules.temperature.four_fifths.value,
            "CO-ze-tt": rules.electrode.source_allowance.value,
            "CO-ra-stable": rules.electrode.stability_threshold.value,
            "CO-ul-ac": rules.disconnection.touch_voltage_ac.value,
            "CO-body-ohm": rules.urgency.body_dry.value,
        }
        for name, value in told.items():
            yield compared(rows[name], key, "value", lambda v=value: v)
    uk = rules_for("bs-7671:2018").voltage_factor.least.value
    yield compared(rows["CO-cmin-uk"], "bs-7671:2018", "value", lambda: uk)


def scopes() -> Iterator[Comparison]:
    """Rated currents up to which the table of times and additional protection are asked."""
    rows = {row["id"]: row for row in oracles("disconnection_times")}
    iec, first = rules_for("iec-60364:2017"), rules_for("bs-7671:2008")
    sockets, fixed = iec.disconnection.scope_socket_outlets.value, iec.disconnection.scope_fixed_equipment.value
    yield compared(rows["DT-scope-0021"], "sockets", "scope_rated_current_to_a", lambda: sockets)
    yield compared(rows["DT-scope-0022"], "fixed", "scope_rated_current_to_a", lambda: fixed)
    scope = first.disconnection
    for name, value in (("sockets", scope.scope_socket_outlets.value), ("fixed", scope.scope_fixed_equipment.value)):
        yield compared(rows["DT-scope-0023"], f"2008,{name}", "scope_rated_current_to_a", lambda v=value: v)
    outlets = iec.additional_protection.socket_outlets_to.value
    yield compared(rows["DT-rule-0025"], "2017", "value", lambda: outlets)
    for key, found in shipped().items():
        additional = found.rules.additional_protection
        yield compared(rows["DT-rule-0030"], key, "value", lambda v=additional.residual_current.value: v)
        yield compared(rows["DT-rule-0027"], key, "value", lambda v=additional.mobile_outdoors_to.value: v)


def fibrillation() -> Iterator[Comparison]:
    """The body current at which the severity reaches one, times the root of the time."""
    row = next(row for row in oracles("constants") if row["id"] == "CO-fibrillation-50kg")
    for time in (0.03, 0.1, 0.5, 1.0, 3.0):
        yield compared(row, f"{time:g}s", "value", lambda t=time: current_at_one(t) * t**0.5)


def current_at_one(time_s: float) -> float:
    """Body current whose severity is one, from the ratio that one ampere gives."""
    return 1.0 / float(severity_ratio(np.array([1000.0]), np.array([1000.0]), np.array([time_s]))[0])


def false_accept(guard: float) -> float:
    """Greatest probability that an accepted reading is wrong, with a guard band of that many U."""
    limit, expanded = 1.37, 0.1
    columns = (limit - guard * expanded, expanded, limit, 1.0)
    return 1.0 - float(conformance_probability(*(np.array([value]) for value in columns))[0])


def comparisons() -> list[Comparison]:
    """Everything of this module."""
    parts = (resistances, temperatures, adiabatic_factors, constants, scopes, fibrillation)
    return [comparison for part in parts for comparison in part()]
