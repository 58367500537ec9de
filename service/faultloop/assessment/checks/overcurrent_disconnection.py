"""Would the overcurrent device clear an earth fault in the required time?"""

import numpy as np

from faultloop.assessment.checks.common import (
    COMPARISON,
    LOOP,
    PREREQUISITES,
    loop_is_wanting,
    prerequisites_are_wanting,
)
from faultloop.assessment.judged import AT_MOST, Cases, Check, Judged, Standing
from faultloop.assessment.points import Choice, Flags, Points
from faultloop.assessment.quantities import Quantities

REASONS = (
    *COMPARISON,
    *PREREQUISITES,
    *LOOP,
    "device-missing",
    "reading-over-range",
    "no-trip-undecided",
    "over-range-over-limit",
    "no-guaranteed-current",
    "cannot-operate-in-time",
)


def _applies(points: Points, _: Quantities) -> Flags:
    return np.ones(points.count, dtype=np.bool_)


def _judge(points: Points, q: Quantities) -> Judged:
    cases = Cases(REASONS)
    prerequisites_are_wanting(cases, q, Standing.UNDETERMINED)
    cases.when(points.choice(Choice.DEVICE) < 0, Standing.UNDETERMINED, "device-missing")
    loop_is_wanting(cases, q)
    unguaranteed = np.isinf(q.operating_current)
    cases.when(unguaranteed & (q.overcurrent_s.least > q.required_s), Standing.UNMET, "cannot-operate-in-time")
    cases.when(unguaranteed, Standing.UNDETERMINED, "no-guaranteed-current")
    open_end = np.isinf(q.compared.greatest) & (q.compared.least <= q.loop_limit)
    cases.when(open_end, Standing.UNDETERMINED, "reading-over-range")
    cases.when(np.isinf(q.compared.greatest), Standing.UNMET, "over-range-over-limit")
    cases.when(q.no_trip_undecided, Standing.UNDETERMINED, "no-trip-undecided")
    return cases.settle(q.compared, q.loop_limit)


CHECK = Check(
    id="overcurrent-disconnection",
    quantity="earth_fault_loop_impedance_ohm",
    unit="ohm",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
    group="fault-protection",
)
