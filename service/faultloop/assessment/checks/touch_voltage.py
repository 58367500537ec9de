"""How long may the touch voltage of an earth fault last, and how long does it?  A report that never counts."""

import numpy as np

from faultloop.assessment.checks.common import COMPARISON, PREREQUISITES, prerequisites_are_wanting
from faultloop.assessment.judged import AT_MOST, Cases, Check, Judged, Standing
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities
from faultloop.electrical.body import severity_ratio
from faultloop.electrical.measurement import Interval

REASONS = (*COMPARISON, *PREREQUISITES, "unknown")


def _applies(points: Points, _: Quantities) -> Flags:
    return np.ones(points.count, dtype=np.bool_)


def _judge(points: Points, q: Quantities) -> Judged:
    found = q.severity
    # The voltage at which the body current meets the current-time curve for the time that the fault lasts.
    limit = 1.0 / severity_ratio(np.ones(points.count), found.body_ohm, found.time_s)
    cases = Cases(REASONS)
    prerequisites_are_wanting(cases, q, Standing.NOT_EXAMINED)
    cases.when(np.isnan(found.touch_v) | np.isnan(found.time_s), Standing.NOT_EXAMINED, "unknown")
    return cases.settle(Interval(found.touch_v, found.touch_v, found.touch_v), limit)


CHECK = Check(
    id="touch-voltage",
    quantity="touch_voltage_v",
    unit="V",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
    report=True,
)
