"""Is the means of earthing at the origin there?  What is lost at the origin withdraws every pass below it."""

import numpy as np

from faultloop.assessment.checks.common import COMPARISON
from faultloop.assessment.codes import EARTHED, INSULATED, Choice, MeansOfEarthing, Reading
from faultloop.assessment.judged import AT_MOST, Cases, Check, Judged, Standing
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities

REASONS = (*COMPARISON, "lost", "external-loop-open", "doubtful", "not-stated", "proven")


def _applies(points: Points, _: Quantities) -> Flags:
    return np.ones(points.count, dtype=np.bool_)


def _judge(points: Points, q: Quantities) -> Judged:
    stated, external = points.choice(Choice.MEANS_OF_EARTHING), q.given.reading(Reading.EXTERNAL)
    limit = q.rule("tn_loop")
    cases = Cases(REASONS)
    cases.when(stated == MeansOfEarthing.LOST, Standing.UNMET, "lost", defect=True)
    cases.when(q.given.origin_lost, Standing.UNMET, "external-loop-open", defect=True)
    cases.when(stated == MeansOfEarthing.DOUBTFUL, Standing.UNDETERMINED, "doubtful")
    cases.when(stated == MeansOfEarthing.PROVEN, Standing.MET, "proven")
    cases.when(np.ones_like(q.tt), Standing.NOT_EXAMINED, "not-stated")
    return cases.settle(external, np.where(q.tt, np.nan, limit))


CHECK = Check(
    id="means-of-earthing",
    quantity="external_earth_fault_loop_impedance_ohm",
    unit="ohm",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
    supplies=EARTHED | INSULATED,
)
