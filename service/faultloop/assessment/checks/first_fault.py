"""What does a first fault leave on the exposed parts of an IT supply?"""

import numpy as np

from faultloop.assessment.checks.common import COMPARISON
from faultloop.assessment.codes import INSULATED, Choice, Current, Reading
from faultloop.assessment.judged import AT_MOST, Cases, Check, Judged, Standing
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities

REASONS = (
    *COMPARISON,
    "direct-current-not-covered",
    "earth-lost",
    "electrode-missing",
    "reading-implausible",
    "current-missing",
    "first-fault-over-range",
)


def _applies(points: Points, _: Quantities) -> Flags:
    return np.ones(points.count, dtype=np.bool_)


def _judge(points: Points, q: Quantities) -> Judged:
    found = q.insulated
    assert found is not None
    touch, limit = found.touch_v, q.rule("touch_voltage")
    cases = Cases(REASONS)
    cases.when(points.choice(Choice.CURRENT) == Current.DC, Standing.UNDETERMINED, "direct-current-not-covered")
    cases.when(q.given.earth_lost, Standing.UNMET, "earth-lost", defect=True)
    cases.when(~q.given.known[Reading.ELECTRODE], Standing.UNDETERMINED, "electrode-missing")
    implausible = q.given.reading(Reading.ELECTRODE).nominal < q.rule("least_plausible")
    cases.when(implausible, Standing.UNDETERMINED, "reading-implausible")
    cases.when(np.isnan(found.first_fault_ma.nominal), Standing.UNDETERMINED, "current-missing")
    open_end = found.over_range & ~(touch.least > limit) & ~(touch.greatest <= limit)
    cases.when(open_end, Standing.UNDETERMINED, "first-fault-over-range")
    return cases.settle(touch, limit)


CHECK = Check(
    id="first-fault",
    quantity="touch_voltage_v",
    unit="V",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
    supplies=INSULATED,
)
