"""Is the insulation resistance of the circuit high enough?"""

import numpy as np

from faultloop.assessment.checks.common import COMPARISON
from faultloop.assessment.codes import EARTHED, INSULATED, SEPARATED, Bound, Reading
from faultloop.assessment.judged import AT_LEAST, Cases, Check, Judged, Standing
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities

REASONS = (*COMPARISON, "not-measured", "beyond-instruments", "over-range-below-limit")


def _applies(points: Points, _: Quantities) -> Flags:
    return np.ones(points.count, dtype=np.bool_)


def _judge(points: Points, q: Quantities) -> Judged:
    cases = Cases(REASONS)
    cases.when(points.bound[Reading.INSULATION] == Bound.MISSING, Standing.NOT_EXAMINED, "not-measured")
    if cases.settle_everything():
        return cases.settle_unvalued()
    read, limit = q.given.reading(Reading.INSULATION), q.rule("insulation")
    cases.when(read.nominal > q.rule("greatest_insulation"), Standing.UNDETERMINED, "beyond-instruments")
    open_end = np.isinf(read.greatest) & (read.least < limit)
    cases.when(open_end, Standing.UNDETERMINED, "over-range-below-limit")
    return cases.settle(read, limit)


CHECK = Check(
    id="insulation-resistance",
    quantity="insulation_resistance_megohm",
    unit="Mohm",
    sense=AT_LEAST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
    supplies=EARTHED | INSULATED | SEPARATED,
)
