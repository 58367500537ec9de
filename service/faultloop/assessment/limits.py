"""The greatest loop impedance for a device, a rule set and a time, without any reading."""

from dataclasses import dataclass

import numpy as np

from faultloop.assessment.texts import Texts, texts
from faultloop.electrical.fault_current import prospective_current
from faultloop.protection.band import compile_bands
from faultloop.protection.catalogue import device_band, residual_multiple
from faultloop.protection.designations import OvercurrentDevice, ResidualDevice
from faultloop.rules.sheets import RuleSet


@dataclass(frozen=True, slots=True)
class Limit:
    """A limit [Ω] and the current behind it [A]; both None where no current guarantees the time."""

    greatest_loop_impedance_ohm: float | None
    least_operating_current_a: float | None
    explanation: str
    clause: str


def loop_limit(
    device: OvercurrentDevice | ResidualDevice,
    rules: RuleSet,
    time_s: float,
    policy: str,
    voltage_v: float,
    language: str = "en",
) -> Limit:
    """Limit by the band's inverse at a time; a residual device is also held to its touch-voltage limit."""
    if isinstance(device, ResidualDevice):
        return _residual_limit(device, rules, time_s, voltage_v, texts(language))
    band = compile_bands([device_band(device, rules)])
    current = float(band.operating_current(np.array([0]), np.array([time_s]))[0])
    values = {
        "device": device.designation,
        "required": time_s,
        "rules": rules.title,
        "ia": current,
        "u0": voltage_v,
    }
    clause = rules.clauses["overcurrent-disconnection"]
    if np.isinf(current):
        told = texts(language).shared["no-guaranteed-current"].explanation
        return Limit(None, None, told.format_map(values), clause)
    c_min, four_fifths = rules.voltage_factor.least.value, rules.temperature.four_fifths.value
    factors = {"two-thirds": rules.temperature.two_thirds.value, "four-fifths": four_fifths * c_min}
    limit = _loop(factors.get(policy, c_min), voltage_v, current)
    values |= {"c_min": c_min, "four_fifths": four_fifths, "limit": limit}
    return Limit(limit, current, texts(language).sentences[f"limit.{policy}"].format_map(values), clause)


def _loop(factor: float, voltage_v: float, current_a: float) -> float:
    return float(prospective_current(np.array([factor]), np.array([voltage_v]), np.array([current_a]))[0])


def _residual_limit(device: ResidualDevice, rules: RuleSet, time_s: float, voltage_v: float, told_in: Texts) -> Limit:
    rated, clause = device.rated_ma / 1000.0, rules.clauses["earth-electrode"]
    multiple = residual_multiple(device.delay, time_s)
    values = {"residual": device.designation, "required": time_s, "rules": rules.title, "idn_a": rated}
    if np.isinf(multiple):
        said = told_in.said("residual-disconnection", "no-standard-times").explanation
        return Limit(None, None, said.format_map(values), clause)
    by_time = _loop(rules.voltage_factor.least.value, voltage_v, multiple * rated)
    by_touch = rules.disconnection.touch_voltage_ac.value / rated
    values |= {"c_min": rules.voltage_factor.least.value, "u0": voltage_v, "needed": multiple}
    values |= {
        "by_time": by_time,
        "by_touch": by_touch,
        "touch_limit": rules.disconnection.touch_voltage_ac.value,
    }
    values["limit"] = min(by_time, by_touch)
    told = told_in.sentences["limit.residual"].format_map(values)
    return Limit(min(by_time, by_touch), multiple * rated, told, clause)
