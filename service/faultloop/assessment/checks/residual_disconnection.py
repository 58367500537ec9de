"""Would the residual device clear an earth fault in the required time, and may it be relied on?"""

import numpy as np

from faultloop.assessment.checks.common import (
    COMPARISON,
    LOOP,
    PREREQUISITES,
    loop_is_wanting,
    prerequisites_are_wanting,
)
from faultloop.assessment.codes import Choice, Number
from faultloop.assessment.judged import AT_MOST, Cases, Check, Condition, Judged, Standing, Verdict
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities
from faultloop.electrical.fault_current import prospective_current
from faultloop.protection.catalogue import catalogue

REASONS = (
    *COMPARISON,
    *PREREQUISITES,
    *LOOP,
    "no-standard-times",
    "device-over-time",
    "path-broken",
    "path-beyond-its-length",
    "path-beyond-expectation",
    "operating-time-missing",
    "path-unexplained",
    "reading-over-range",
)


def _applies(points: Points, _: Quantities) -> Flags:
    return ~np.isnan(points.number(Number.RESIDUAL_MA))


def _judge(points: Points, q: Quantities) -> Judged:
    row = points.choice(Choice.RESIDUAL)
    multiple = catalogue().residual.operating_current(row, q.required_s)
    current = multiple * points.number(Number.RESIDUAL_MA) / 1000.0
    limit = prospective_current(q.rule("c_min"), points.number(Number.VOLTAGE), current)
    limit = np.where(np.isinf(multiple), np.nan, limit)
    touch = q.rule("touch_voltage") / (points.number(Number.RESIDUAL_MA) / 1000.0)
    limit = np.where(~q.tt & (q.rule("touch_limit_on_tn") > 0), np.minimum(limit, touch), limit)
    relied_on = ~q.tt & (q.overcurrent != Verdict.PASS) & ~q.cleared_upstream
    cases = Cases(REASONS)
    prerequisites_are_wanting(cases, q, Standing.NOT_EXAMINED)
    loop_is_wanting(cases, q)
    cases.when(np.isinf(multiple), Standing.UNDETERMINED, "no-standard-times")
    cases.when(q.residual.over_limit, Standing.UNMET, "device-over-time", defect=True)
    cases.when(~q.tt & (q.loops.loop.least > q.rule("tn_loop")), Standing.UNMET, "path-broken", defect=True)
    cases.when(relied_on & q.loops.dead_beyond, Standing.UNMET, "path-beyond-its-length", defect=True)
    cases.when(relied_on & q.loops.beyond, Standing.UNMET, "path-beyond-expectation", defect=True)
    cases.when(~q.residual.tested, Standing.UNDETERMINED, "operating-time-missing")
    unexplained = relied_on & (q.overcurrent == Verdict.FAIL) & ~q.loops.explained
    unexplained |= relied_on & (q.overcurrent == Verdict.UNDETERMINED) & ~q.loops.explained
    cases.when(unexplained, Standing.UNDETERMINED, "path-unexplained")
    open_end = np.isinf(q.hot.greatest) & (q.hot.least <= limit)
    cases.when(open_end, Standing.UNDETERMINED, "reading-over-range")
    conditions = np.where(relied_on, 1 << Condition.RESIDUAL_CARRIES_PATH, 0).astype(np.int64)
    return cases.settle(q.hot, limit, conditions)


CHECK = Check(
    id="residual-disconnection",
    quantity="earth_fault_loop_impedance_ohm",
    unit="ohm",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
    group="fault-protection",
)
