"""What an IT supply would do: the current and the touch voltage of a first fault, and who touches a line."""

from dataclasses import dataclass

import numpy as np

from faultloop.assessment.given import Given
from faultloop.assessment.points import Choice, Distributed, Earthing, ExposedParts, Flags, Number, Reading
from faultloop.assessment.policies import limit_factor
from faultloop.electrical.circuit_supplies import InsulatedSupply, current_to_earth
from faultloop.electrical.fault_current import prospective_current
from faultloop.electrical.measurement import Array, Interval

MILLI = 1e3


@dataclass(frozen=True, slots=True)
class Insulated:
    """Quantities of n IT supplies; nan where unknown.

    `first_fault_ma` and the touch voltage that it makes at the electrode, current of a contact with one line, and the
    limit of the loop of a second fault.
    """

    here: Flags
    apart: Flags
    first_fault_ma: Interval
    touch_v: Interval
    contact_ma: Interval
    second_v: Array
    second_limit: Array
    second_fault_a: Interval


def insulated(g: Given, operating: Array, hot: Interval, cold: Interval) -> Insulated:
    """Compute what the checks of n IT supplies share."""
    points, number = g.points, g.points.number
    here = points.choice(Choice.EARTHING) == Earthing.IT
    apart = here & (points.choice(Choice.EXPOSED_PARTS) == ExposedParts.SEPARATELY)
    driven, read, electrode = _driven(g, here), g.reading(Reading.FIRST_FAULT), g.reading(Reading.ELECTRODE)
    # What was read and what the capacitances drive are both believed, and the higher decides.
    current = _higher(read, driven.fault_ma)
    touch = _higher(_product(read, electrode), driven.touch_mv)
    # A line that is held to earth by an electrode brings no more to it than its own voltage.
    line = g.rule["c_max"] * number(Number.VOLTAGE)
    ends = (np.fmin(of / MILLI, line) for of in (touch.least, touch.greatest, touch.nominal))
    # Two faults share the loop: without a neutral between two lines, with one between line and neutral.
    with_neutral = points.choice(Choice.NEUTRAL_DISTRIBUTED) != Distributed.NO
    between = np.where(points.choice(Choice.PHASES) == 1, number(Number.VOLTAGE), number(Number.BETWEEN_LINES_V))
    voltage, c_min = np.where(with_neutral, number(Number.VOLTAGE), between), g.rule["c_min"]
    limit = prospective_current(limit_factor(g), voltage, 2.0 * operating)
    second = Interval(
        prospective_current(c_min, voltage, 2.0 * hot.greatest),
        prospective_current(g.rule["c_max"], voltage, 2.0 * cold.least),
        prospective_current(c_min, voltage, 2.0 * hot.nominal),
    )
    limit = np.where(np.isinf(operating), np.nan, limit)
    return Insulated(here, apart, current, Interval(*ends), driven.contact_ma, voltage, limit, second)


def _higher(one: Interval, other: Interval) -> Interval:
    return Interval(
        np.fmax(one.least, other.least), np.fmax(one.greatest, other.greatest), np.fmax(one.nominal, other.nominal)
    )


def _product(one: Interval, other: Interval) -> Interval:
    return Interval(one.least * other.least, one.greatest * other.greatest, one.nominal * other.nominal)


@dataclass(frozen=True, slots=True)
class _Driven:
    """What the capacitances drive: a first fault [mA] and its voltage over the electrode [mV], a contact [mA]."""

    fault_ma: Interval
    touch_mv: Interval
    contact_ma: Interval


def _driven(g: Given, here: Flags) -> _Driven:
    """First fault into the electrode, and a contact of a line, by the tolerance of capacitances."""
    points, number, count = g.points, g.points.number, g.points.count
    line = np.where(here, number(Number.LINE_EARTH_NF), np.nan)
    if np.isnan(line).all():
        nothing = np.full(count, np.nan)
        unknown = Interval(nothing, nothing, nothing)
        return _Driven(unknown, unknown, unknown)
    phases, electrode = points.choice(Choice.PHASES).astype(np.float64), g.reading(Reading.ELECTRODE)
    spread, one = g.rule["separation_capacitance_tolerance"] / 100.0, np.ones(count)
    low, high, body = 1.0 - spread, 1.0 + spread, g.rule["body_dry"]
    # The least current flows through the greatest electrode, the least voltage stands over the least one.
    scales = (low, high, low, high, one, low, high, one)
    paths = (electrode.greatest, electrode.least, electrode.least, electrode.greatest, electrode.nominal, *[body] * 3)
    # On one phase the neutral is the other live conductor; one that nobody spoke of is counted.
    neutral = (points.choice(Choice.NEUTRAL_DISTRIBUTED) != Distributed.NO) | (phases == 1.0)
    scale, rows = np.concatenate(scales), len(scales)
    supply = InsulatedSupply(
        voltage_v=np.tile(number(Number.VOLTAGE), rows),
        lines=np.tile(np.where(phases == 0.0, np.nan, phases), rows),
        frequency_hz=np.tile(number(Number.FREQUENCY_HZ), rows),
        line_earth_nf=np.tile(line, rows) * scale,
        neutral_earth_nf=np.tile(np.where(neutral, line, 0.0), rows) * scale,
    )
    by = (MILLI * current_to_earth(supply, np.concatenate(paths))).reshape(rows, count)
    least, greatest, least_touch, greatest_touch, nominal = by[:5]
    touch = Interval(least_touch * electrode.least, greatest_touch * electrode.greatest, nominal * electrode.nominal)
    return _Driven(Interval(least, greatest, nominal), touch, Interval(*by[5:]))
