"""On TT: does the electrode keep the touch voltage down for every residual device in series?"""

import numpy as np

from faultloop.assessment.checks.common import COMPARISON, PREREQUISITES, prerequisites_are_wanting
from faultloop.assessment.codes import Choice, Earthing, Number
from faultloop.assessment.judged import AT_MOST, Cases, Check, Condition, Judged, Standing
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities

REASONS = (
    *COMPARISON,
    *PREREQUISITES,
    "electrode-missing",
    "reading-implausible",
    "reading-over-range",
)


def _applies(points: Points, _: Quantities) -> Flags:
    tt: Flags = points.choice(Choice.EARTHING) == Earthing.TT
    fitted: Flags = ~np.isnan(points.number(Number.RESIDUAL_GREATEST_MA))
    return np.logical_and(tt, fitted)


def _judge(points: Points, q: Quantities) -> Judged:
    electrode = q.electrode
    rated = points.number(Number.RESIDUAL_GREATEST_MA) / 1000.0
    limit = q.rule("touch_voltage") / rated
    cases = Cases(REASONS)
    prerequisites_are_wanting(cases, q, Standing.NOT_EXAMINED)
    cases.when(np.isnan(electrode.nominal), Standing.UNDETERMINED, "electrode-missing")
    implausible = electrode.nominal < q.rule("least_plausible")
    cases.when(implausible, Standing.UNDETERMINED, "reading-implausible")
    open_end = np.isinf(electrode.greatest) & (electrode.least <= limit)
    cases.when(open_end, Standing.UNDETERMINED, "reading-over-range")
    unstable = electrode.nominal > q.rule("stability")
    dry = electrode.nominal * q.rule("season") > limit
    conditions = np.where(unstable | dry, 1 << Condition.SEASON, 0).astype(np.int64)
    return cases.settle(electrode, limit, conditions)


CHECK = Check(
    id="earth-electrode",
    quantity="earth_electrode_resistance_ohm",
    unit="ohm",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
)
