"""Is the voltage between neutral and earth at the point what a sound neutral gives?"""

import numpy as np

from faultloop.assessment.checks.common import COMPARISON
from faultloop.assessment.codes import Bound, Reading
from faultloop.assessment.judged import AT_MOST, Cases, Check, Judged, Standing
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities

REASONS = (*COMPARISON, "not-measured", "over-range", "raised", "far-raised", "dangerous")


def _applies(points: Points, _: Quantities) -> Flags:
    return np.ones(points.count, dtype=np.bool_)


def _judge(points: Points, q: Quantities) -> Judged:
    cases = Cases(REASONS)
    cases.when(points.bound[Reading.NEUTRAL_EARTH_VOLTAGE] == Bound.MISSING, Standing.NOT_EXAMINED, "not-measured")
    if cases.settle_everything():
        return cases.settle_unvalued()
    read, limit = q.given.reading(Reading.NEUTRAL_EARTH_VOLTAGE), q.rule("touch_voltage")
    cases.when(read.least > limit, Standing.UNMET, "dangerous", defect=True)
    cases.when(np.isinf(read.greatest), Standing.UNDETERMINED, "over-range")
    below = read.greatest <= limit
    cases.when(below & (read.greatest > limit / 2.0), Standing.UNDETERMINED, "far-raised")
    raised = below & (read.nominal > q.rule("neutral_earth_voltage"))
    cases.when(raised, Standing.MET, "raised")
    return cases.settle(read, limit)


CHECK = Check(
    id="neutral-earth-voltage",
    quantity="voltage_neutral_to_earth_v",
    unit="V",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
)
