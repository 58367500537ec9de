"""Is the voltage of the separated supply one for which separation protects?"""

import numpy as np

from faultloop.assessment.codes import SEPARATED, Choice, Current, Number
from faultloop.assessment.judged import AT_MOST, Cases, Check, Judged, Standing
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities
from faultloop.electrical.measurement import Interval

REASONS = (
    "within-limit",
    "over-limit",
    "voltage-unknown",
    "direct-current-not-covered",
    "three-phases-not-covered",
    "voltage-contradicts-plate",
    "extra-low-voltage",
)


def _applies(points: Points, _: Quantities) -> Flags:
    return np.ones(points.count, dtype=np.bool_)


def _judge(points: Points, q: Quantities) -> Judged:
    found = q.separated
    assert found is not None
    cases = Cases(REASONS)
    limit = q.rule("separation_voltage")
    cases.when(points.choice(Choice.CURRENT) == Current.DC, Standing.UNDETERMINED, "direct-current-not-covered")
    cases.when(points.choice(Choice.PHASES) > 1, Standing.UNDETERMINED, "three-phases-not-covered")
    cases.when(np.isnan(found.voltage), Standing.UNDETERMINED, "voltage-unknown")
    plate = points.number(Number.SECONDARY_V)
    apart = np.abs(found.voltage - plate) > plate * q.rule("voltage_tolerance") / 100.0
    cases.when(apart, Standing.UNDETERMINED, "voltage-contradicts-plate")
    cases.when(found.extra_low, Standing.UNDETERMINED, "extra-low-voltage")
    cases.when(found.voltage <= limit, Standing.MET, "within-limit")
    cases.when(found.voltage > limit, Standing.UNMET, "over-limit")
    return cases.settle(Interval(found.voltage, found.voltage, found.voltage), limit)


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
