"""Would the overcurrent device clear an earth fault in the required time, or one upstream of it?"""

import numpy as np

from faultloop.assessment.checks.common import (
    COMPARISON,
    LOOP,
    PREREQUISITES,
    loop_is_wanting,
    prerequisites_are_wanting,
)
from faultloop.assessment.codes import Choice
from faultloop.assessment.judged import AT_MOST, Cases, Check, Judged, Standing, Verdict
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities
from faultloop.electrical.measurement import Array

REASONS = (
    *COMPARISON,
    *PREREQUISITES,
    *LOOP,
    "device-missing",
    "cleared-upstream",
    "upstream-inside-uncertainty",
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
    limit = _with_upstream(cases, q) if len(points.upstream) else q.loop_limit
    unguaranteed = np.isinf(q.operating_current)
    cases.when(unguaranteed & (q.overcurrent_s.least > q.required_s), Standing.UNMET, "cannot-operate-in-time")
    cases.when(unguaranteed, Standing.UNDETERMINED, "no-guaranteed-current")
    open_end = np.isinf(q.compared.greatest) & (q.compared.least <= q.loop_limit)
    cases.when(open_end, Standing.UNDETERMINED, "reading-over-range")
    cases.when(np.isinf(q.compared.greatest), Standing.UNMET, "over-range-over-limit")
    cases.when(q.no_trip_undecided, Standing.UNDETERMINED, "no-trip-undecided")
    return cases.settle(q.compared, limit)


def _with_upstream(cases: Cases, q: Quantities) -> Array:
    """Settle the points that a device upstream clears or might clear, and give the limit that each is held against.

    The verdict rests on the circuit's own device; where it does not clear, either device interrupts the fault.
    """
    upstream, hopeless = q.upstream.verdict, q.overcurrent < Verdict.MARGINAL
    cleared = q.cleared_upstream
    doubtful = hopeless & (upstream == Verdict.MARGINAL)
    cases.when(cleared, Standing.MET, "cleared-upstream")
    cases.when(doubtful, Standing.UNDETERMINED, "upstream-inside-uncertainty")
    return np.where(cleared | doubtful, q.upstream.limit, q.loop_limit)


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
