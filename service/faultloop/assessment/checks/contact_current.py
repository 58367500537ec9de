"""What would somebody carry who stands on earth and touches one pole of the separated supply?"""

import numpy as np

from faultloop.assessment.checks.common import COMPARISON
from faultloop.assessment.codes import SEPARATED
from faultloop.assessment.judged import AT_MOST, Cases, Check, Condition, Judged, Standing
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities

REASONS = (*COMPARISON, "extra-low-voltage", "voltage-unknown", "not-read", "not-all-known")


def _applies(points: Points, _: Quantities) -> Flags:
    return np.ones(points.count, dtype=np.bool_)


def _judge(_: Points, q: Quantities) -> Judged:
    found = q.separated
    assert found is not None
    current, limit = found.contact.current_ma, q.rule("separation_contact_most")
    cases = Cases(REASONS)
    cases.when(found.extra_low & ~found.joined.shown, Standing.NOT_EXAMINED, "extra-low-voltage")
    cases.when(np.isnan(found.voltage) & np.isnan(current.nominal), Standing.UNDETERMINED, "voltage-unknown")
    open_end = np.isinf(current.greatest) & ~(current.least > limit)
    cases.when(open_end & (found.contact.pole_nf == 0.0), Standing.UNDETERMINED, "not-read")
    cases.when(open_end, Standing.UNDETERMINED, "not-all-known")
    felt = np.where(current.greatest > q.rule("separation_contact_unfelt"), 1 << Condition.CONTACT_FELT, 0)
    return cases.settle(current, limit, felt | 1 << Condition.BENCH_AS_IT_STANDS)


CHECK = Check(
    id="contact-current",
    quantity="contact_current_ma",
    unit="mA",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
    supplies=SEPARATED,
)
