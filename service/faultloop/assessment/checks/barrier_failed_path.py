"""What is left of the fault path when the residual device has failed; a report that never counts."""

import numpy as np

from faultloop.assessment.checks.common import (
    COMPARISON,
    LOOP,
    PREREQUISITES,
    loop_is_wanting,
    prerequisites_are_wanting,
)
from faultloop.assessment.codes import Choice, Number
from faultloop.assessment.judged import AT_MOST, Cases, Check, Judged, Standing
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities

REASONS = (
    *COMPARISON,
    *PREREQUISITES,
    *LOOP,
    "device-missing",
    "cleared-upstream",
    "no-guaranteed-current",
    "reading-over-range",
    "no-trip-undecided",
)


def _applies(points: Points, _: Quantities) -> Flags:
    return ~np.isnan(points.number(Number.RESIDUAL_MA))


def _judge(points: Points, q: Quantities) -> Judged:
    cases = Cases(REASONS)
    prerequisites_are_wanting(cases, q, Standing.NOT_EXAMINED)
    cases.when(points.choice(Choice.DEVICE) < 0, Standing.UNDETERMINED, "device-missing")
    loop_is_wanting(cases, q)
    cases.when(q.cleared_upstream, Standing.MET, "cleared-upstream")
    cases.when(np.isinf(q.operating_current), Standing.UNDETERMINED, "no-guaranteed-current")
    open_end = np.isinf(q.compared.greatest) & (q.compared.least <= q.loop_limit)
    cases.when(open_end, Standing.UNDETERMINED, "reading-over-range")
    cases.when(q.no_trip_undecided, Standing.UNDETERMINED, "no-trip-undecided")
    return cases.settle(q.compared, np.where(q.cleared_upstream, q.upstream.limit, q.loop_limit))


CHECK = Check(
    id="barrier-failed-path",
    quantity="earth_fault_loop_impedance_ohm",
    unit="ohm",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
    report=True,
)
