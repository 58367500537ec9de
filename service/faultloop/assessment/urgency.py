"""Urgency: what to see to first, by body current, time and what is left when the barrier fails."""

import numpy as np

from faultloop.assessment.codes import Choice, Codes, PlannedLink, Reading, Reference
from faultloop.assessment.points import Flags, Ints, Points
from faultloop.assessment.quantities import Quantities
from faultloop.assessment.standing import Verdict


class Urgency(Codes):
    """Urgencies, most urgent first; none of them permits anything."""

    STOP_USE = 0
    URGENT = 1
    PLANNED = 2
    NOTE = 3
    NONE = 4


# Where the current-time curve that orders the work ends.
LONGEST_ORDERED_S = 3.0


def urgency(points: Points, q: Quantities, verdict: Ints, defect: Flags, cleared: Flags) -> Ints:
    """Order the work: nothing for a pass, else by severity; a sustained current escalates one step.

    Where the rules themselves let a fault last longer than the curve runs (a distribution circuit's 5 s) and it is
    cleared as they ask, the time is theirs and orders nothing.
    """
    found = q.severity
    lasting = ~(cleared & (q.required_s > LONGEST_ORDERED_S)) | q.given.earth_lost
    level = np.full(points.count, Urgency.PLANNED, dtype=np.int64)
    level[defect & (found.barrier_failed >= 1.0)] = Urgency.URGENT
    standing = q.given.reading(Reading.NEUTRAL_EARTH_VOLTAGE).least > q.rule("touch_voltage")
    level[points.choice(Choice.PLANNED_LINK) == PlannedLink.SHORTS] = Urgency.URGENT
    level[(lasting & (found.as_is >= 1.0)) | standing | _part_at_pole(points)] = Urgency.STOP_USE
    sustained = lasting & (found.body_ma > q.rule("sustained_ma")) & (found.time_s > LONGEST_ORDERED_S)
    level = np.where(sustained, np.maximum(level - 1, Urgency.STOP_USE), level)
    met = np.full(points.count, Urgency.NOTE)
    if q.insulated is not None:
        # One barrier is gone where a first fault stands.
        met = np.where(q.insulated.fault_standing, Urgency.PLANNED, met)
    level = np.where(verdict == Verdict.PASS_WITH_CONDITIONS, met, level)
    return np.where(verdict == Verdict.PASS, Urgency.NONE, level)


def _part_at_pole(points: Points) -> Flags:
    """Where a part that is there to be touched stands at a pole, or may: two hands close the circuit, without end."""
    reference = points.choice(Choice.REFERENCE)
    return np.asarray((reference == Reference.PART_AT_POLE) | (reference == Reference.PART_PERHAPS), np.bool_)
