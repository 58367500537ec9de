"""Did the residual device operate within its own standard's times when it was tested?"""

import numpy as np

from faultloop.assessment.checks.common import COMPARISON
from faultloop.assessment.codes import EARTHED, INSULATED, Bound, Choice, Number, Reading
from faultloop.assessment.judged import AT_MOST, Cases, Check, Judged, Standing
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities
from faultloop.assessment.residual_times import TEST_MULTIPLES, TESTS
from faultloop.electrical.measurement import Interval
from faultloop.protection.catalogue import catalogue

REASONS = (
    *COMPARISON,
    "over-current",
    "over-time",
    "time-implausible",
    "half-unclear",
    "sooner-than-selective",
    "trips-at-half",
    "trips-at-half-with-loads",
    "no-standard-times",
    "not-tested",
)


def _applies(points: Points, _: Quantities) -> Flags:
    return ~np.isnan(points.number(Number.RESIDUAL_MA))


def _judge(points: Points, q: Quantities) -> Judged:
    row, limit = points.choice(Choice.RESIDUAL), q.residual.limits_ms
    hold = 1000.0 * catalogue().residual.least_time(row, np.broadcast_to(TEST_MULTIPLES, limit.shape))
    bound, value = points.bound[TESTS], points.value[TESTS]
    tested = bound != Bound.MISSING
    # The result nearest to its limit, or farthest beyond, speaks for the device.
    share = np.where(tested, value / limit, -np.inf)
    worst, at = share.argmax(axis=0), np.arange(points.count)
    picked = Interval(q.given.least[TESTS][worst, at], q.given.greatest[TESTS][worst, at], value[worst, at])
    exact = bound == Bound.EXACT
    half, half_ms = points.bound[Reading.TIME_HALF], points.value[Reading.TIME_HALF]
    told = (half == Bound.EXACT) | (half == Bound.BELOW)
    # A tester that shows the end of its range says that the device held; written as a time it may mean either.
    tripped = told & (half_ms < 1000.0 * q.rule("greatest_time"))
    unclear = told & ~tripped
    wrong_unit = np.logical_or.reduce(exact & (value < 1000.0 * q.rule("least_time")), axis=0)
    loads = points.choice(Choice.LOADS_CONNECTED) == 1
    any_tested = np.logical_or.reduce(tested, axis=0)
    cases = Cases(REASONS)
    cases.when(any_tested & np.isinf(limit[0]), Standing.NOT_EXAMINED, "no-standard-times")
    cases.when(q.residual.over_current, Standing.UNMET, "over-current", defect=True)
    cases.when(q.residual.over_limit, Standing.UNMET, "over-time", defect=True)
    cases.when(wrong_unit, Standing.UNDETERMINED, "time-implausible")
    cases.when(unclear, Standing.UNDETERMINED, "half-unclear")
    cases.when(tripped & loads, Standing.UNDETERMINED, "trips-at-half-with-loads")
    cases.when(tripped, Standing.UNMET, "trips-at-half")
    cases.when(~any_tested, Standing.NOT_EXAMINED, "not-tested")
    # Acting sooner endangers nobody at the point; it costs the selectivity, and is told.
    sooner = np.logical_or.reduce(exact & (value < hold), axis=0)
    cases.when(sooner, Standing.MET, "sooner-than-selective")
    # A result in its limits is the device's own word: the instrument's uncertainty is printed, not held against it.
    cases.when(any_tested, Standing.MET, "within-limit")
    return cases.settle(picked, np.where(np.isinf(limit), np.nan, limit)[worst, at])


CHECK = Check(
    id="residual-device-test",
    quantity="residual_operating_time_ms",
    unit="ms",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
    supplies=EARTHED | INSULATED,
)
