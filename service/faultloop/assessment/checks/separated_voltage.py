"""Is the voltage of the separated supply one for which separation protects?"""

import numpy as np

from faultloop.assessment.checks.common import COMPARISON
from faultloop.assessment.judged import AT_MOST, Cases, Check, Judged, Standing
from faultloop.assessment.points import SEPARATED, Flags, Points
from faultloop.assessment.quantities import Quantities
from faultloop.electrical.measurement import Interval

REASONS = (*COMPARISON, "voltage-unknown")


def _applies(points: Points, _: Quantities) -> Flags:
    return np.ones(points.count, dtype=np.bool_)


def _judge(_: Points, q: Quantities) -> Judged:
    found = q.separated
    assert found is not None
    cases = Cases(REASONS)
    cases.when(np.isnan(found.voltage), Standing.UNDETERMINED, "voltage-unknown")
    return cases.settle(Interval(found.voltage, found.voltage, found.voltage), q.rule("separation_voltage"))


CHECK = Check(
    id="separated-voltage",
    quantity="nominal_voltage_between_lines_v",
    unit="V",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
    supplies=SEPARATED,
)
