"""Would the overcurrent device clear a fault from pole to pole of a separated supply?"""

import numpy as np

from faultloop.assessment.codes import SEPARATED, Choice, Number, Reading
from faultloop.assessment.judged import AT_MOST, Cases, Check, Condition, Judged, Standing, Verdict, compare
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities
from faultloop.assessment.withstand import withstands

REASONS = (
    "within-limit",
    "voltage-unknown",
    "no-required-time",
    "loop-unknown",
    "device-missing",
    "reading-implausible",
    "reading-contradicts-plate",
    "conductor-withstands",
    "conductor-rating",
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
    read = q.given.reading(Reading.LINE_LINE)
    cases.when(read.nominal < q.rule("least_plausible"), Standing.UNDETERMINED, "reading-implausible")
    cases.when(found.outlet_contradicts, Standing.UNDETERMINED, "reading-contradicts-plate")
    cases.when(np.isinf(loop.greatest) & ~q.given.known[Reading.LINE_LINE], Standing.UNDETERMINED, "loop-unknown")
    met = compare(loop, limit, np.array(AT_MOST), points.choice(Choice.DECISION)) == Verdict.PASS
    cases.when(met, Standing.MET, "within-limit")
    # A device ahead of the transformer sees another current, and is credited with nothing here.
    borne = withstands(points, current.least, current.greatest, alone=True)
    cases.when(borne, Standing.MET, "conductor-withstands")
    rated = points.number(Number.OVERLOAD_CURRENT_A) <= points.number(Number.CARRYING_CAPACITY_A)
    rated &= 1000.0 * points.number(Number.BREAKING_CAPACITY_KA) >= current.greatest
    cases.when(rated & ~np.isinf(loop.greatest), Standing.MET, "conductor-rating")
    cases.when(np.isinf(found.operating_current), Standing.UNDETERMINED, "no-guaranteed-current")
    cases.when(np.isinf(loop.greatest), Standing.UNDETERMINED, "reading-over-range")
    cases.when(np.ones(points.count, np.bool_), Standing.UNDETERMINED, "not-cleared-at-once")
    carried = rated & ~borne & ~met
    return cases.settle(loop, limit, np.where(carried, 1 << Condition.CONDUCTOR_RATING, 0))


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
