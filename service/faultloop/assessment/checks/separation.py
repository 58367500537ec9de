"""Is no live part of the separated supply joined to earth?"""

import numpy as np

from faultloop.assessment.judged import AT_MOST, Cases, Check, Condition, Judged, Standing
from faultloop.assessment.points import SEPARATED, Bound, Choice, Flags, Points, Reading, Reference
from faultloop.assessment.quantities import Quantities

REASONS = (
    "pole-earthed",
    "contact-shows-earth",
    "pole-at-earth",
    "loop-reads-earth",
    "floats-by-solution",
    "contact-shows-none",
    "insulation-shows-none",
    "pole-voltages-alone",
    "not-shown",
    "tied-by-solution",
    "perhaps-tied-by-solution",
)


def _applies(points: Points, _: Quantities) -> Flags:
    return np.ones(points.count, dtype=np.bool_)


def _judge(points: Points, q: Quantities) -> Judged:
    found = q.separated
    assert found is not None
    contact, reference, known = found.contact, points.choice(Choice.REFERENCE), q.given.known
    insulation, limit = q.given.reading(Reading.INSULATION), q.rule("separation_contact_referenced")
    cases = Cases(REASONS)
    cases.when(contact.solved & (reference == Reference.EARTHED), Standing.UNMET, "tied-by-solution", defect=True)
    cases.when(contact.solved & (reference == Reference.UNKNOWN), Standing.UNDETERMINED, "perhaps-tied-by-solution")
    cases.when(reference == Reference.EARTHED, Standing.UNMET, "pole-earthed", defect=True)
    cases.when(found.pole_at_earth, Standing.UNMET, "pole-at-earth", defect=True)
    # Between a pole and earth of a floating supply a loop tester finds nothing to read.
    loop_read = points.bound[Reading.LOOP] == Bound.EXACT
    cases.when(loop_read, Standing.UNMET, "loop-reads-earth", defect=True)
    cases.when(contact.current_ma.least > limit, Standing.UNMET, "contact-shows-earth", defect=True)
    cases.when(contact.solved & (reference == Reference.FLOATING), Standing.MET, "floats-by-solution")
    cases.when(contact.every_pole_read & (contact.current_ma.greatest <= limit), Standing.MET, "contact-shows-none")
    cases.when(insulation.least >= q.rule("insulation"), Standing.MET, "insulation-shows-none")
    voltages = known[Reading.L1_EARTH_VOLTAGE] | known[Reading.L2_EARTH_VOLTAGE]
    cases.when(voltages, Standing.UNDETERMINED, "pole-voltages-alone")
    cases.when(np.ones(points.count, np.bool_), Standing.UNDETERMINED, "not-shown")
    bits = np.full(points.count, 1 << Condition.BENCH_AS_IT_STANDS)
    return cases.settle(contact.current_ma, limit, bits)


CHECK = Check(
    id="separation",
    quantity="contact_current_ma",
    unit="mA",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
    supplies=SEPARATED,
)
