"""Would the overcurrent device clear a fault from pole to pole of a separated supply?"""

import numpy as np

from faultloop.assessment.judged import AT_MOST, Cases, Check, Judged, Standing, Verdict, compare
from faultloop.assessment.points import SEPARATED, Choice, Flags, Points
from faultloop.assessment.quantities import Quantities
from faultloop.assessment.withstand import withstands

REASONS = (
    "within-limit",
    "voltage-unknown",
    "no-required-time",
    "loop-unknown",
    "device-missing",
    "conductor-withstands",
    "reading-over-range",
    "no-guaranteed-current",
    "not-cleared-at-once",
)


def _applies(points: Points, _: Quantities) -> Flags:
    return np.ones(points.count, dtype=np.bool_)


def _judge(points: Points, q: Quantities) -> Judged:
    found = q.separated
    assert found is not None
    loop, limit, current = found.pole_to_pole.compared, found.limit, found.pole_to_pole.current
    cases = Cases(REASONS)
    cases.when(np.isnan(found.voltage), Standing.NOT_EXAMINED, "voltage-unknown")
    cases.when(np.isnan(found.required_s), Standing.NOT_EXAMINED, "no-required-time")
    cases.when(np.isnan(loop.nominal), Standing.NOT_EXAMINED, "loop-unknown")
    cases.when(points.choice(Choice.DEVICE) < 0, Standing.UNDETERMINED, "device-missing")
    met = compare(loop, limit, np.array(AT_MOST), points.choice(Choice.DECISION)) == Verdict.PASS
    cases.when(met, Standing.MET, "within-limit")
    cases.when(withstands(points, current.least, current.greatest), Standing.MET, "conductor-withstands")
    cases.when(np.isinf(loop.greatest), Standing.UNDETERMINED, "reading-over-range")
    cases.when(np.isinf(found.operating_current), Standing.UNDETERMINED, "no-guaranteed-current")
    cases.when(np.ones(points.count, np.bool_), Standing.UNDETERMINED, "not-cleared-at-once")
    return cases.settle(loop, limit)


CHECK = Check(
    id="line-line-disconnection",
    quantity="line_line_loop_impedance_ohm",
    unit="ohm",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
    supplies=SEPARATED,
)
