"""What an IT supply would do: the current and the touch voltage of a first fault, and who touches a line."""

from dataclasses import dataclass

import numpy as np

from faultloop.assessment.codes import Bound, Choice, Distributed, Earthing, ExposedParts, Method, Number, Reading
from faultloop.assessment.given import Given
from faultloop.assessment.points import Flags
from faultloop.assessment.policies import by_policy, limit_factor
from faultloop.electrical.circuit_supplies import InsulatedSupply, current_to_earth
from faultloop.electrical.fault_current import prospective_current
from faultloop.electrical.measurement import Array, Interval, higher

MILLI = 1e3


@dataclass(frozen=True, slots=True)
class Insulated:
    """Quantities of n IT supplies; nan where unknown.

    The touch voltage is that of a first fault at the electrode; a second fault has the loop of one circuit, which is
    held against half of the voltage that drives it.
    """

    here: Flags
    apart: Flags
    first_fault_ma: Interval
    touch_v: Interval
    over_range: Flags
    contact_ma: Interval
    fault_standing: Flags
    loop_reads_earth: Flags
    no_trip: Flags
    second_v: Array
    second_limit: Array
    second_compared: Interval
    second_fault_a: Interval


def insulated(g: Given, operating: Array, live: Interval, factor: Array) -> Insulated:
    """Compute what the checks of n IT supplies share; `live` is the loop as it was read live, cold."""
    points, number = g.points, g.points.number
    here = points.choice(Choice.EARTHING) == Earthing.IT
    driven, read, electrode = _driven(g, here), g.reading(Reading.FIRST_FAULT), g.reading(Reading.ELECTRODE)
    # What was read and what the capacitances drive are both believed, and the higher decides.
    touch = higher(_product(read, electrode), driven.touch_mv)
    cold, hot, unlinked = _second_loop(g, here, live, factor)
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
    return Insulated(
        here=here,
        apart=here & (points.choice(Choice.EXPOSED_PARTS) == ExposedParts.SEPARATELY),
        first_fault_ma=higher(read, driven.fault_ma),
        touch_v=_capped(touch, g.rule["c_max"] * number(Number.VOLTAGE)),
        over_range=np.isinf(read.greatest) | np.isinf(electrode.greatest),
        contact_ma=driven.contact_ma,
        fault_standing=here & _below_set_point(g),
        loop_reads_earth=unlinked,
        no_trip=here & (points.method[Reading.LOOP] == Method.NO_TRIP),
        second_v=voltage,
        second_limit=np.where(np.isinf(operating), np.nan, limit),
        second_compared=by_policy(points, hot, cold),
        second_fault_a=second,
    )


def _capped(touch_mv: Interval, line_v: Array) -> Interval:
    """In volts; a line that an electrode holds to earth brings no more to it than its own voltage."""
    ends = (touch_mv.least, touch_mv.greatest, touch_mv.nominal)
    return Interval(*(np.where(np.isnan(of), np.nan, np.fmin(of / MILLI, line_v)) for of in ends))


def _below_set_point(g: Given) -> Flags:
    """Where the monitor shows less than its set point, or may."""
    shown, known = g.reading(Reading.MONITORED), g.known[Reading.MONITORED]
    return np.asarray(known & ~(shown.least >= g.points.number(Number.SET_POINT_KOHM)), np.bool_)


def _second_loop(g: Given, here: Flags, live: Interval, factor: Array) -> tuple[Interval, Interval, Flags]:
    """Loop of one circuit, cold and hot, of a dead test and of a live reading with the source linked to earth.

    Where nothing links the source to earth a live test between line and earth finds nothing to read: a value then
    shows a first fault, or a link that nobody told of.
    """
    points, at = g.points, Reading.LINE_PLUS_PROTECTIVE
    method, external = points.method[at], g.reading(Reading.EXTERNAL)
    tested = here & (points.bound[at] != Bound.MISSING) & (method != Method.CALCULATED) & (method != Method.DECLARED)
    dead, source = g.reading(at), np.nan_to_num(external.nominal)
    linked = points.choice(Choice.LOOP_LINKED) == 1
    read = here & linked & (points.bound[Reading.LOOP] != Bound.MISSING)

    ends = ((dead.least, live.least), (dead.greatest, live.greatest), (dead.nominal, live.nominal))

    def by(heat: Array) -> Interval:
        cores = Interval(*(np.where(tested, of * heat + source, np.nan) for of, _ in ends))
        return higher(cores, Interval(*(np.where(read, of * heat, np.nan) for _, of in ends)))

    bound = points.bound[Reading.LOOP]
    unlinked = here & ~linked & ((bound == Bound.EXACT) | (bound == Bound.BELOW))
    return by(np.ones_like(factor)), by(factor), unlinked


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
