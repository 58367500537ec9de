"""What the relied-on residual device does at the prospective current, and what its tests said."""

from dataclasses import dataclass

import numpy as np

from faultloop.assessment.codes import Bound, Choice, Number, Reading
from faultloop.assessment.given import Given
from faultloop.assessment.points import Flags
from faultloop.electrical.measurement import Array, Interval
from faultloop.protection.catalogue import catalogue

# The readings of a device's test, and the multiples of IΔn at which they were taken.
TESTS = [Reading.TIME_1, Reading.TIME_2, Reading.TIME_5]
TEST_MULTIPLES = np.array([[1.0], [2.0], [5.0]])


@dataclass(frozen=True, slots=True)
class ResidualTimes:
    """What the relied-on residual device does, (n,) each; nan where there is none.

    `limits_ms` are the standard's greatest times of the tests, (3, n).
    """

    multiple: Array
    multiple_nominal: Array
    time_s: Interval
    over_limit: Flags
    over_current: Flags
    tested: Flags
    limits_ms: Array


def residual_times(g: Given, current: Interval) -> ResidualTimes:
    """Times of the band at the least and the nominal current, and what the tests said.

    A time measured at the band's own multiple stands in place of the band where it is longer; a result
    at another multiple says nothing about this one.
    """
    points, row = g.points, g.points.choice(Choice.RESIDUAL)
    rated, band = points.number(Number.RESIDUAL_MA) / 1000.0, catalogue().residual
    multiples = np.array([current.least, current.nominal]) / rated
    one, two, five = points.value[TESTS] / 1000.0
    measured = np.where(
        multiples >= 5.0, five, np.where(multiples >= 2.0, two, np.where(multiples >= 1.0, one, np.nan))
    )
    slow = np.fmax(band.greatest_time(row, multiples), measured)
    over_current = _over_current(g)
    limits_ms = 1000.0 * band.greatest_time(row, np.broadcast_to(TEST_MULTIPLES, (3, points.count)))
    over, tested = _tests(g, limits_ms)
    times = Interval(band.least_time(row, current.greatest / rated), slow[0], slow[1])
    return ResidualTimes(multiples[0], multiples[1], times, over | over_current, over_current, tested, limits_ms)


def _tests(g: Given, limit_ms: Array) -> tuple[Flags, Flags]:
    """Where a test result is over the standard's time, and where a usable time at IΔn is there."""
    value, bound = g.points.value[TESTS], g.points.bound[TESTS]
    exact = bound == Bound.EXACT
    late = (exact & (value > limit_ms)) | ((bound == Bound.ABOVE) & (value >= limit_ms))
    over: Flags = np.logical_or.reduce(late, axis=0)
    within = exact[0] | ((bound[0] == Bound.BELOW) & (value[0] <= limit_ms[0]))
    return over, within & (value[0] >= 1000.0 * g.rule["least_time"])


def _over_current(g: Given) -> Flags:
    """Where the device needed more than its rated current to operate."""
    value, bound = g.points.value[Reading.OPERATING_CURRENT], g.points.bound[Reading.OPERATING_CURRENT]
    rated = g.points.number(Number.RESIDUAL_MA)
    over: Flags = ((bound == Bound.EXACT) & (value > rated)) | ((bound == Bound.ABOVE) & (value >= rated))
    return over
