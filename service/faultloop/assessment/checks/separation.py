"""Is no live part of the separated supply joined to earth?"""

import numpy as np

from faultloop.assessment.codes import SEPARATED, Choice, Reading, Reference
from faultloop.assessment.judged import AT_MOST, Cases, Check, Condition, Judged, Standing
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities

REASONS = (
    "contact-shows-none",
    "pole-earthed",
    "contact-shows-earth",
    "pole-at-earth",
    "loop-reads-earth",
    "insulation-shows-earth",
    "windings-joined",
    "floats-by-solution",
    "extra-low-voltage",
    "pole-voltages-impossible",
    "contact-unexplained",
    "insulation-shows-none",
    "insulation-not-enough",
    "pole-voltages-alone",
    "not-shown",
    "tied-by-solution",
    "perhaps-tied-by-solution",
    "part-at-pole",
    "part-perhaps-at-pole",
)


def _applies(points: Points, _: Quantities) -> Flags:
    return np.ones(points.count, dtype=np.bool_)


def _judge(points: Points, q: Quantities) -> Judged:
    found = q.separated
    assert found is not None
    contact, reference, joined = found.contact, points.choice(Choice.REFERENCE), found.joined
    limit, most = q.rule("separation_contact_referenced"), q.rule("separation_contact_most")
    cases = Cases(REASONS)
    cases.when(contact.solved & (reference == Reference.EARTHED), Standing.UNMET, "tied-by-solution", defect=True)
    cases.when(contact.solved & (reference == Reference.UNKNOWN), Standing.UNDETERMINED, "perhaps-tied-by-solution")
    cases.when(reference == Reference.PART_AT_POLE, Standing.UNMET, "part-at-pole", defect=True)
    cases.when(reference == Reference.PART_PERHAPS, Standing.UNDETERMINED, "part-perhaps-at-pole")
    cases.when(reference == Reference.EARTHED, Standing.UNMET, "pole-earthed", defect=True)
    cases.when(joined.pole_at_earth, Standing.UNMET, "pole-at-earth", defect=True)
    cases.when(joined.by_loop, Standing.UNMET, "loop-reads-earth", defect=True)
    cases.when(joined.by_insulation, Standing.UNMET, "insulation-shows-earth", defect=True)
    cases.when(joined.by_windings, Standing.UNMET, "windings-joined", defect=True)
    cases.when(joined.shown, Standing.UNMET, "contact-shows-earth", defect=True)
    cases.when(contact.solved & (reference == Reference.FLOATING), Standing.MET, "floats-by-solution")
    cases.when(found.extra_low, Standing.NOT_EXAMINED, "extra-low-voltage")
    cases.when(_impossible(q), Standing.UNDETERMINED, "pole-voltages-impossible")
    cases.when(contact.every_pole_read & (contact.current_ma.greatest <= most), Standing.MET, "contact-shows-none")
    cases.when(contact.every_pole_read, Standing.UNDETERMINED, "contact-unexplained")
    insulation, known = q.given.reading(Reading.INSULATION), q.given.known
    cases.when(insulation.least >= q.rule("insulation"), Standing.MET, "insulation-shows-none")
    cases.when(known[Reading.INSULATION], Standing.UNDETERMINED, "insulation-not-enough")
    voltages = known[Reading.L1_EARTH_VOLTAGE] | known[Reading.L2_EARTH_VOLTAGE]
    cases.when(voltages, Standing.UNDETERMINED, "pole-voltages-alone")
    cases.when(np.ones(points.count, np.bool_), Standing.UNDETERMINED, "not-shown")
    return cases.settle(contact.current_ma, limit, np.full(points.count, 1 << Condition.BENCH_AS_IT_STANDS))


def _impossible(q: Quantities) -> Flags:
    """Where two poles read less to earth than lies between them."""
    assert q.separated is not None
    sides = q.given.reading(Reading.L1_EARTH_VOLTAGE).greatest + q.given.reading(Reading.L2_EARTH_VOLTAGE).greatest
    least = q.separated.voltage * (100.0 - q.rule("voltage_tolerance")) / 100.0
    return np.asarray(sides < least, np.bool_)


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
