"""Rule sets compiled to arrays, so that a rule set is picked by its row."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from faultloop.assessment.codes import Choice, Current, Earthing, ExposedParts, Feeds, Method, Number, Reading, Role
from faultloop.assessment.points import READINGS, Flags, Ints, Points
from faultloop.electrical.measurement import Array
from faultloop.rules.sheets import RuleSet
from faultloop.rules.strict import Parameter

# Voltages, and small currents that are read as the voltage over a known resistance.
_VOLTMETER = (
    Reading.VOLTAGE,
    Reading.NEUTRAL_EARTH_VOLTAGE,
    Reading.L1_EARTH_VOLTAGE,
    Reading.L2_EARTH_VOLTAGE,
    Reading.L1_CONTACT,
    Reading.L2_CONTACT,
    Reading.FIRST_FAULT,
)
TIME_READINGS = (Reading.TIME_HALF, Reading.TIME_1, Reading.TIME_2, Reading.TIME_5)


@dataclass(frozen=True, slots=True)
class RuleTable:
    """One array a value, indexed by rule set."""

    names: dict[str, int]
    values: Array
    band_above: Array
    band_to: Array
    band_time: Array
    percent: Array
    constant: Array
    nominal: Array
    exempt: Ints

    def of(self, points: Points) -> "RuleValues":
        """Every value of each point's rule set."""
        return RuleValues(self, self.values[:, points.choice(Choice.RULES)])


@dataclass(frozen=True, slots=True)
class RuleValues:
    """Values (V, n) of each point's rule set, by name."""

    table: RuleTable
    values: Array

    def __getitem__(self, name: str) -> Array:
        """One value, (n,)."""
        value: Array = self.values[self.table.names[name]]
        return value


def _values(rules: RuleSet) -> dict[str, float]:
    d, a, e, t, u = (
        rules.disconnection,
        rules.additional_protection,
        rules.electrode,
        rules.temperature,
        rules.urgency,
    )
    return {
        "c_min": rules.voltage_factor.least.value,
        "c_max": rules.voltage_factor.greatest.value,
        "distribution_tn": d.distribution_tn.value,
        "distribution_tt": d.distribution_tt.value,
        "scope_socket_outlets": d.scope_socket_outlets.value,
        "scope_fixed_equipment": d.scope_fixed_equipment.value,
        "touch_voltage": d.touch_voltage_ac.value,
        "additional_ma": a.residual_current.value,
        "additional_sockets": a.socket_outlets_to.value,
        "additional_mobile": a.mobile_outdoors_to.value,
        "stability": e.stability_threshold.value,
        "season": e.season_factor.value,
        "source_allowance": e.source_allowance.value,
        "touch_limit_on_tn": e.touch_limit_on_tn.value,
        "uplift": rules.instruments.no_trip_uplift.value,
        "alpha": t.alpha_20.value,
        "two_thirds": t.two_thirds.value,
        "four_fifths": t.four_fifths.value,
        "tn_loop": rules.expected.tn_loop.value,
        "length_uncertainty": rules.expected.length_uncertainty.value,
        "length_constant": rules.expected.length_constant.value,
        "least_plausible": rules.expected.least_plausible.value,
        "greatest_insulation": rules.expected.greatest_insulation.value,
        "least_time": rules.expected.least_time.value,
        "greatest_time": rules.expected.greatest_time.value,
        "voltage_asked": rules.expected.voltage_to_earth_asked_above.value,
        "voltage_tolerance": rules.expected.voltage_tolerance.value,
        "neutral_earth_voltage": rules.expected.neutral_earth_voltage.value,
        "body_dry": u.body_dry.value,
        "body_wet": u.body_wet.value,
        "sustained_ma": u.sustained_current.value,
        "insulation": rules.insulation.value,
        **{f"separation_{name}": held.value for name, held in rules.separation if isinstance(held, Parameter)},
    }


def _bands(rules: RuleSet) -> tuple[Array, Array, Array]:
    above, to, time = np.full((2, 2, 5), np.inf), np.full((2, 2, 6), np.nan), np.full((2, 2, 6), np.nan)
    for system, earthing in enumerate(("TN", "TT")):
        for word, current in Current.codes().items():
            rows = [r for r in rules.disconnection.table if (r.earthing, r.current) == (earthing, word)]
            for at, row in enumerate(sorted(rows, key=lambda r: r.above_v)):
                above[system, current, at] = row.above_v
                to[system, current, at + 1] = np.inf if row.to_v is None else row.to_v
                time[system, current, at + 1] = row.value
    return above, to, time


def _instruments(rules: RuleSet) -> tuple[Array, Array]:
    """Default percent and constant by reading and method, (R, M)."""
    i = rules.instruments
    percent, constant = np.zeros((READINGS, len(Method.codes()))), np.zeros((READINGS, len(Method.codes())))
    loop = (
        Reading.LOOP,
        Reading.EXTERNAL,
        Reading.LINE_NEUTRAL,
        Reading.ORIGIN_LINE_NEUTRAL,
        Reading.BOARD_LOOP,
        Reading.LINE_LINE,
    )
    for reading in Reading.codes().values():
        default = i.high_current if reading in loop else i.electrode if reading == Reading.ELECTRODE else i.continuity
        percent[reading, :], constant[reading, :] = default.percent.value, default.constant.value
    for reading in loop:
        percent[reading, Method.NO_TRIP] = i.no_trip.percent.value
        constant[reading, Method.NO_TRIP] = i.no_trip.constant.value
    for reading in (Reading.INSULATION, Reading.WINDING_INSULATION, Reading.MONITORED):
        percent[reading, :], constant[reading, :] = i.insulation.value, 0.0
    for reading in _VOLTMETER:
        percent[reading, :], constant[reading, :] = i.voltage.value, 0.0
    # A stated current is no reading unless its instrument is stated too.
    percent[Reading.BOARD_CURRENT, :], constant[Reading.BOARD_CURRENT, :] = 0.0, 0.0
    percent[Reading.OPERATING_CURRENT, :], constant[Reading.OPERATING_CURRENT, :] = i.residual_time.value, 0.0
    for reading in TIME_READINGS:
        percent[reading, :], constant[reading, :] = i.residual_time.value, 0.0
    return percent, constant


def _padded(lists: list[list[float]]) -> Array:
    width = max(len(values) for values in lists)
    return np.array([[*values, *[np.nan] * (width - len(values))] for values in lists])


def compile_rules(sets: Sequence[RuleSet]) -> RuleTable:
    """Lay rule sets out as arrays, row by row."""
    values = [_values(rules) for rules in sets]
    bands = [_bands(rules) for rules in sets]
    instruments = [_instruments(rules) for rules in sets]
    marks = ("designated-equipment", "instructed", "skilled")
    exempt = [sum(1 << at for at, m in enumerate(marks) if m in r.additional_protection.exempt) for r in sets]
    return RuleTable(
        names={name: at for at, name in enumerate(values[0])},
        values=np.array([list(v.values()) for v in values]).T,
        band_above=np.array([b[0] for b in bands]),
        band_to=np.array([b[1] for b in bands]),
        band_time=np.array([b[2] for b in bands]),
        percent=np.array([p for p, _ in instruments]),
        constant=np.array([c for _, c in instruments]),
        nominal=_padded([r.nominal_voltage_to_earth.values for r in sets]),
        exempt=np.array(exempt, dtype=np.int64),
    )


def required_time(points: Points, rule: RuleValues) -> Array:
    """Required disconnection time of each circuit [s]; nan where role, voltage or earthing leaves it open."""
    role, earthing = points.choice(Choice.ROLE), points.choice(Choice.EARTHING)
    # Exposed parts that an IT supply earths separately meet each other through their electrodes, as on TT.
    apart = (earthing == Earthing.IT) & (points.choice(Choice.EXPOSED_PARTS) == ExposedParts.SEPARATELY)
    tt = (earthing == Earthing.TT) | apart
    final = final_time(points, rule, points.number(Number.VOLTAGE), tt)
    fixed = points.choice(Choice.FEEDS) == Feeds.FIXED_EQUIPMENT
    scope = np.where(fixed, rule["scope_fixed_equipment"], rule["scope_socket_outlets"])
    beyond = points.number(Number.RATED_CURRENT) > scope
    longer = np.where(tt, rule["distribution_tt"], rule["distribution_tn"])
    time = np.where((role == Role.FINAL) & ~beyond, final, longer)
    return np.where((role == Role.UNKNOWN) | np.isnan(final), np.nan, time)


def final_time(points: Points, rule: RuleValues, voltage: Array, tt: Flags) -> Array:
    """Time of the table of final circuits for a voltage [s]; nan where it has no row."""
    table, rules, system = rule.table, points.choice(Choice.RULES), tt.astype(np.int64)
    current = points.choice(Choice.CURRENT)
    band = (voltage[:, None] > table.band_above[rules, system, current]).sum(axis=1)
    inside = voltage <= table.band_to[rules, system, current, band]
    return np.where(inside, table.band_time[rules, system, current, band], np.nan)
