"""Does the insulation between the windings stand for what separation needs?"""

import numpy as np

from faultloop.assessment.checks.common import COMPARISON
from faultloop.assessment.codes import SEPARATED, Choice, Number, Reading, Windings
from faultloop.assessment.judged import AT_LEAST, Cases, Check, Judged, Standing
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities

REASONS = (
    *COMPARISON,
    "windings-joined",
    "dielectric-low",
    "not-measured",
    "beyond-instruments",
    "over-range-below-limit",
)


def _applies(points: Points, _: Quantities) -> Flags:
    return np.ones(points.count, dtype=np.bool_)


def _judge(points: Points, q: Quantities) -> Judged:
    # What is not known to be basic insulation is held to the higher figures.
    basic = points.choice(Choice.WINDINGS) == Windings.BASIC
    limit = np.where(basic, q.rule("separation_winding_basic"), q.rule("separation_winding_reinforced"))
    read = q.given.reading(Reading.WINDING_INSULATION)
    cases = Cases(REASONS)
    low = points.number(Number.DIELECTRIC_V) < points.number(Number.DIELECTRIC_ASKED_V)
    assert q.separated is not None
    cases.when(q.separated.joined.by_windings, Standing.UNMET, "windings-joined", defect=True)
    cases.when(low, Standing.UNDETERMINED, "dielectric-low")
    cases.when(~q.given.known[Reading.WINDING_INSULATION], Standing.NOT_EXAMINED, "not-measured")
    cases.when(read.nominal > q.rule("greatest_insulation"), Standing.UNDETERMINED, "beyond-instruments")
    open_end = np.isinf(read.greatest) & (read.least < limit)
    cases.when(open_end, Standing.UNDETERMINED, "over-range-below-limit")
    return cases.settle(read, limit)


CHECK = Check(
    id="winding-insulation",
    quantity="winding_insulation_resistance_megohm",
    unit="Mohm",
    sense=AT_LEAST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
    supplies=SEPARATED,
)
