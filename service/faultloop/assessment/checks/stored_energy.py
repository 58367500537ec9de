"""How long does what is connected stay charged after it was switched off?"""

import numpy as np

from faultloop.assessment.codes import SEPARATED, Number
from faultloop.assessment.judged import AT_MOST, Cases, Check, Condition, Judged, Standing
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities
from faultloop.electrical.measurement import Interval

REASONS = ("quick", "discharge-unknown", "not-stated", "slow", "below")


def _applies(points: Points, _: Quantities) -> Flags:
    return np.ones(points.count, dtype=np.bool_)


def _judge(points: Points, q: Quantities) -> Judged:
    found = q.separated
    assert found is not None
    time, limit = found.discharge_s, q.rule("separation_discharge_time")
    cases = Cases(REASONS)
    cases.when(np.isnan(found.stored_j), Standing.NOT_EXAMINED, "not-stated")
    if cases.settle_everything():
        return cases.settle_unvalued()
    below = points.number(Number.STORED_V) <= q.rule("separation_discharged")
    cases.when(below, Standing.MET, "below")
    cases.when(np.isnan(time) | np.isinf(time), Standing.UNDETERMINED, "discharge-unknown")
    cases.when(time > limit, Standing.MET, "slow")
    cases.when(time <= limit, Standing.MET, "quick")
    bits = np.where(time > limit, 1 << Condition.DISCHARGED_FIRST, 0)
    return cases.settle(Interval(time, time, time), limit, bits)


CHECK = Check(
    id="stored-energy",
    quantity="discharge_time_s",
    unit="s",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
    supplies=SEPARATED,
)
