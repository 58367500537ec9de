"""Would the overcurrent device clear a line-neutral fault, which no residual device sees?"""

import numpy as np

from faultloop.assessment.checks.common import COMPARISON, PREREQUISITES, prerequisites_are_wanting
from faultloop.assessment.judged import AT_MOST, Cases, Check, Condition, Judged, Standing
from faultloop.assessment.loops import Fault
from faultloop.assessment.points import Bound, Choice, Flags, Method, Number, Points, Reading
from faultloop.assessment.quantities import Quantities
from faultloop.electrical.conductors import withstand_time
from faultloop.electrical.fault_current import heated_loop, prospective_current
from faultloop.electrical.measurement import Array, Interval, combined
from faultloop.protection.catalogue import catalogue

REASONS = (
    *COMPARISON,
    *PREREQUISITES,
    "device-missing",
    "reading-implausible",
    "not-measured",
    "inferred-within-limit",
    "inferred-not-decided",
    "conductor-withstands",
    "conductor-rating",
    "not-cleared-at-once",
    "reading-over-range",
)


def _applies(points: Points, _: Quantities) -> Flags:
    return np.ones(points.count, dtype=np.bool_)


def _ends(interval: Interval) -> tuple[Array, Array, Array]:
    return interval.least, interval.greatest, interval.nominal


def _loop(points: Points, q: Quantities) -> tuple[Interval, Flags, Flags]:
    """The hot line-neutral loop; where it was measured, and where it is a bound from the earth fault loop."""
    cold, part, part_u = _cold(points, q)
    hot = heated_loop(cold, np.full(points.count, np.nan), part, part_u, q.factor)
    measured = ~np.isnan(cold.nominal)
    no_larger = points.number(Number.PROTECTIVE_MM2) <= points.number(Number.NEUTRAL_MM2)
    inferred = (
        ~measured & ~q.tt & (points.choice(Choice.INFERABLE) == 1) & no_larger & (q.loops.fault == Fault.NONE)
    )
    bound = Interval(np.zeros(points.count), q.hot.greatest, q.hot.nominal)
    loop = Interval(*(np.where(inferred, b, m) for b, m in zip(_ends(bound), _ends(hot), strict=True)))
    return loop, measured, inferred


def _cold(points: Points, q: Quantities) -> tuple[Interval, Array, Array]:
    """Z_LN as read, else on TT the origin's with R1 + R2; with the part outside that is not heated."""
    read, at, dead = (
        q.given.reading(Reading.LINE_NEUTRAL),
        Reading.ORIGIN_LINE_NEUTRAL,
        Reading.LINE_PLUS_PROTECTIVE,
    )
    origin, origin_u = points.value[at], q.given.uncertainty[at]
    total, u = origin + q.loops.dead_resistance, combined(origin_u, q.given.uncertainty[dead])
    use = q.tt & ~q.given.known[Reading.LINE_NEUTRAL] & q.given.known[dead] & ~np.isnan(total)
    cold = Interval(
        np.where(use, np.maximum(total - u, 0.0), read.least),
        np.where(use, total + u, read.greatest),
        np.where(use, total, read.nominal),
    )
    own = (points.bound[at] == Bound.EXACT) & (points.method[at] <= Method.HIGH_CURRENT)
    part = np.where(own, origin, np.where(q.tt, np.nan, q.loops.external))
    return cold, part, np.where(own, origin_u, q.loops.external_u)


def _judge(points: Points, q: Quantities) -> Judged:
    loop, measured, inferred = _loop(points, q)
    c_min, voltage = q.rule("c_min"), points.number(Number.VOLTAGE)
    limit = prospective_current(c_min, voltage, q.operating_current)
    met = loop.greatest <= limit
    current = prospective_current(c_min, voltage, loop.greatest)
    withstands = _withstands(points, q, loop, current)
    rated = points.number(Number.DEVICE_RATED_CURRENT) <= points.number(Number.CARRYING_CAPACITY_A)
    rated &= points.number(Number.BREAKING_CAPACITY_KA) >= points.number(Number.BOARD_CURRENT_KA)
    cases = Cases(REASONS)
    prerequisites_are_wanting(cases, q, Standing.NOT_EXAMINED)
    cases.when(points.choice(Choice.DEVICE) < 0, Standing.UNDETERMINED, "device-missing")
    cases.when(~measured & ~inferred, Standing.NOT_EXAMINED, "not-measured")
    implausible = measured & (loop.nominal < q.rule("least_plausible"))
    cases.when(implausible, Standing.UNDETERMINED, "reading-implausible")
    cases.when(inferred & met, Standing.MET, "inferred-within-limit")
    cases.when(np.isinf(loop.greatest) & measured, Standing.UNDETERMINED, "reading-over-range")
    settled = ~met & (measured | inferred)
    cases.when(settled & withstands, Standing.MET, "conductor-withstands")
    carried = settled & rated
    cases.when(carried, Standing.MET, "conductor-rating")
    cases.when(settled & inferred, Standing.UNDETERMINED, "inferred-not-decided")
    cases.when(settled & measured, Standing.UNDETERMINED, "not-cleared-at-once")
    bits = np.where(carried & ~withstands, 1 << Condition.CONDUCTOR_RATING, 0).astype(np.int64)
    return cases.settle(loop, limit, bits)


def _withstands(points: Points, q: Quantities, loop: Interval, current: Array) -> Flags:
    """Whether the conductor bears the current for as long as the device may take, over the interval.

    Within one step of the band the time is constant and the withstand falls with the current, so the
    greatest current of each step is tried: the ends, and just below every tested current between them.
    """
    row, band = points.choice(Choice.DEVICE), catalogue().overcurrent
    k, area = points.number(Number.ADIABATIC_K), points.number(Number.LINE_MM2)
    greatest = prospective_current(q.rule("c_max"), points.number(Number.VOLTAGE), loop.least)
    bears = band.greatest_time(row, current) <= withstand_time(k, area, current)
    for step in range(band.slow_current.shape[1]):
        edge = band.slow_current[row, step]
        inside = (edge > current) & (edge < greatest)
        below = np.nextafter(edge, 0.0)
        bears &= ~inside | (band.greatest_time(row, below) <= withstand_time(k, area, below))
    return bears & ~np.isnan(k) & ~np.isnan(area)


CHECK = Check(
    id="line-neutral-disconnection",
    quantity="line_neutral_loop_impedance_ohm",
    unit="ohm",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
)
