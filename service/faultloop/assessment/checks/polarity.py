"""Is the polarity at the point correct?"""

import numpy as np

from faultloop.assessment.checks.common import COMPARISON
from faultloop.assessment.codes import EARTHED, INSULATED, Choice, Polarity
from faultloop.assessment.judged import AT_MOST, Cases, Check, Judged, Standing
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities
from faultloop.electrical.measurement import Interval

REASONS = (*COMPARISON, "correct", "reversed", "not-tested")


def _applies(points: Points, _: Quantities) -> Flags:
    return np.ones(points.count, dtype=np.bool_)


def _judge(points: Points, _: Quantities) -> Judged:
    tested = points.choice(Choice.POLARITY)
    nothing = np.full(points.count, np.nan)
    cases = Cases(REASONS)
    cases.when(tested == Polarity.REVERSED, Standing.UNMET, "reversed", defect=True)
    cases.when(tested == Polarity.CORRECT, Standing.MET, "correct")
    cases.when(tested == Polarity.UNKNOWN, Standing.NOT_EXAMINED, "not-tested")
    return cases.settle(Interval(nothing, nothing, nothing), nothing)


CHECK = Check(
    id="polarity",
    quantity="polarity",
    unit="1",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
    supplies=EARTHED | INSULATED,
)
