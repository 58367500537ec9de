"""Is the overcurrent device rated within what the live conductors can carry?"""

import numpy as np

from faultloop.assessment.checks.common import COMPARISON
from faultloop.assessment.codes import EARTHED, INSULATED, SEPARATED, Choice, Number
from faultloop.assessment.judged import AT_MOST, Cases, Check, Judged, Standing
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities
from faultloop.electrical.measurement import Interval

REASONS = (*COMPARISON, "capacity-missing", "rated-current-missing", "ring-not-compared")


def _applies(points: Points, _: Quantities) -> Flags:
    return np.ones(points.count, dtype=np.bool_)


def _judge(points: Points, _: Quantities) -> Judged:
    rated, capacity = points.number(Number.OVERLOAD_CURRENT_A), points.number(Number.CARRYING_CAPACITY_A)
    cases = Cases(REASONS)
    cases.when(np.isnan(capacity), Standing.NOT_EXAMINED, "capacity-missing")
    cases.when(np.isnan(rated), Standing.NOT_EXAMINED, "rated-current-missing")
    # The two ways of a ring share the load, so its device may be rated above what one of them carries.
    ring = (points.choice(Choice.RING) == 1) & (rated > capacity)
    cases.when(ring, Standing.NOT_EXAMINED, "ring-not-compared")
    return cases.settle(Interval(rated, rated, rated), capacity)


CHECK = Check(
    id="overload",
    quantity="rated_current_a",
    unit="A",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
    supplies=EARTHED | INSULATED | SEPARATED,
)
