"""Does something tell of a first fault on an IT supply, and does it tell of one now?"""

import numpy as np

from faultloop.assessment.codes import INSULATED, Choice, Monitor, Number, Reading
from faultloop.assessment.judged import AT_LEAST, Cases, Check, Condition, Judged, Standing
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities

REASONS = (
    "absent",
    "monitor-unknown",
    "set-point-unknown",
    "first-fault-standing",
    "untested",
    "above-set-point",
    "tested",
)


def _applies(points: Points, _: Quantities) -> Flags:
    return np.ones(points.count, dtype=np.bool_)


def _judge(points: Points, q: Quantities) -> Judged:
    monitor, limit = points.choice(Choice.MONITOR), points.number(Number.SET_POINT_KOHM)
    shown, known = q.given.reading(Reading.MONITORED), q.given.known[Reading.MONITORED]
    assert q.insulated is not None
    standing = q.insulated.fault_standing
    untested = monitor == Monitor.UNTESTED
    cases = Cases(REASONS)
    cases.when(monitor == Monitor.ABSENT, Standing.UNMET, "absent")
    cases.when(monitor == Monitor.UNKNOWN, Standing.UNDETERMINED, "monitor-unknown")
    cases.when(known & np.isnan(limit), Standing.UNDETERMINED, "set-point-unknown")
    cases.when(standing, Standing.MET, "first-fault-standing")
    cases.when(untested, Standing.MET, "untested")
    cases.when(known, Standing.MET, "above-set-point")
    cases.when(~known, Standing.MET, "tested")
    bits = np.where(standing, 1 << Condition.FIRST_FAULT_CLEARED, 0)
    bits |= np.where(untested, 1 << Condition.MONITOR_TESTED, 0)
    return cases.settle(shown, limit, bits)


CHECK = Check(
    id="insulation-monitor",
    quantity="monitored_insulation_kohm",
    unit="kohm",
    sense=AT_LEAST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
    supplies=INSULATED,
)
