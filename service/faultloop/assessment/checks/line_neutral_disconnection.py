"""Would the overcurrent device clear a line-neutral fault, which no residual device sees?"""

import numpy as np

from faultloop.assessment.checks.common import COMPARISON, PREREQUISITES, prerequisites_are_wanting
from faultloop.assessment.codes import EARTHED, INSULATED, Choice, Number, Reading
from faultloop.assessment.judged import AT_MOST, Cases, Check, Condition, Judged, Standing, Verdict, compare
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.policies import by_policy
from faultloop.assessment.quantities import Quantities
from faultloop.assessment.withstand import withstands
from faultloop.electrical.fault_current import prospective_current

REASONS = (
    *COMPARISON,
    *PREREQUISITES,
    "device-missing",
    "reading-implausible",
    "not-measured",
    "inferred-within-limit",
    "inferred-not-decided",
    "conductor-withstands",
    "conductor-rating",
    "not-cleared-at-once",
    "reading-over-range",
    "no-guaranteed-current",
)


def _applies(points: Points, _: Quantities) -> Flags:
    return np.ones(points.count, dtype=np.bool_)


def _judge(points: Points, q: Quantities) -> Judged:
    found = q.line_neutral
    measured, inferred = found.measured, found.inferred
    limit = q.loop_limit
    cases = Cases(REASONS)
    prerequisites_are_wanting(cases, q, Standing.NOT_EXAMINED)
    cases.when(points.choice(Choice.DEVICE) < 0, Standing.UNDETERMINED, "device-missing")
    cases.when(~measured & ~inferred, Standing.NOT_EXAMINED, "not-measured")
    if cases.settle_everything():
        return cases.settle_unvalued()
    loop = by_policy(points, found.hot, found.cold)
    met = compare(loop, limit, np.array(AT_MOST), points.choice(Choice.DECISION)) == Verdict.PASS
    borne = _withstands(points, q)
    rated = points.number(Number.OVERLOAD_CURRENT_A) <= points.number(Number.CARRYING_CAPACITY_A)
    rated &= points.number(Number.BREAKING_CAPACITY_KA) >= q.given.reading(Reading.BOARD_CURRENT).greatest
    implausible = measured & (loop.nominal < q.rule("least_plausible"))
    cases.when(implausible, Standing.UNDETERMINED, "reading-implausible")
    cases.when(inferred & met, Standing.MET, "inferred-within-limit")
    cases.when(measured & met, Standing.MET, "within-limit")
    cases.when(np.isinf(loop.greatest) & measured, Standing.UNDETERMINED, "reading-over-range")
    cases.when(borne, Standing.MET, "conductor-withstands")
    cases.when(rated, Standing.MET, "conductor-rating")
    cases.when(np.isinf(q.operating_current), Standing.UNDETERMINED, "no-guaranteed-current")
    cases.when(inferred, Standing.UNDETERMINED, "inferred-not-decided")
    cases.when(measured, Standing.UNDETERMINED, "not-cleared-at-once")
    carried = rated & ~borne & ~met & (measured | inferred) & ~np.isinf(loop.greatest) & ~implausible
    bits = np.where(carried, 1 << Condition.CONDUCTOR_RATING, 0)
    return cases.settle(loop, limit, bits)


def _withstands(points: Points, q: Quantities) -> Flags:
    """Whether the conductor bears the current of the line-neutral loop, hot and cold."""
    voltage, found = points.number(Number.VOLTAGE), q.line_neutral
    least = prospective_current(q.rule("c_min"), voltage, found.hot.greatest)
    greatest = prospective_current(q.rule("c_max"), voltage, found.cold.least)
    return withstands(points, least, greatest)


CHECK = Check(
    id="line-neutral-disconnection",
    quantity="line_neutral_loop_impedance_ohm",
    unit="ohm",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
    supplies=EARTHED | INSULATED,
)
