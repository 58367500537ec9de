"""Is the wiring of the separated supply short enough that its capacitance leaves the supply floating?"""

import numpy as np

from faultloop.assessment.codes import SEPARATED, Number
from faultloop.assessment.judged import AT_MOST, Cases, Check, Judged, Standing
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities
from faultloop.electrical.measurement import Interval

REASONS = ("within-limit", "over-guidance", "voltage-unknown", "not-stated", "over-guidance-read")


def _applies(points: Points, _: Quantities) -> Flags:
    return np.ones(points.count, dtype=np.bool_)


def _judge(points: Points, q: Quantities) -> Judged:
    found, length = q.separated, points.number(Number.WIRING_M)
    assert found is not None
    cases = Cases(REASONS)
    limit = np.fmin(q.rule("separation_wiring_length"), q.rule("separation_voltage_length") / found.voltage)
    cases.when(np.isnan(length), Standing.NOT_EXAMINED, "not-stated")
    over, contact = length > limit, found.contact
    # The figure is recommended for the sake of the current that a contact carries: where that was read, it decides.
    read = contact.every_pole_read & (contact.current_ma.greatest <= q.rule("separation_contact_most"))
    cases.when(over & read, Standing.MET, "over-guidance-read")
    cases.when(over, Standing.UNDETERMINED, "over-guidance")
    cases.when(np.isnan(found.voltage), Standing.NOT_EXAMINED, "voltage-unknown")
    cases.when(length <= limit, Standing.MET, "within-limit")
    return cases.settle(Interval(length, length, length), limit)


CHECK = Check(
    id="wiring-length",
    quantity="wiring_length_m",
    unit="m",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
    supplies=SEPARATED,
)
