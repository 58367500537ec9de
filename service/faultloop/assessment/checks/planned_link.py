"""Would a link that is about to be made tie the bench to earth, or carry more than a floating bench can drive?"""

from faultloop.assessment.checks.common import COMPARISON
from faultloop.assessment.codes import SEPARATED, Choice, Number, PlannedLink
from faultloop.assessment.judged import AT_MOST, Cases, Check, Condition, Judged, Standing
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities
from faultloop.electrical.measurement import Interval

REASONS = (*COMPARISON, "ties-and-nothing-clears", "ties-through-resistance", "tied-before", "may-tie", "shorts")


def _applies(points: Points, _: Quantities) -> Flags:
    planned: Flags = points.choice(Choice.PLANNED_LINK) != PlannedLink.NONE
    return planned


def _judge(points: Points, q: Quantities) -> Judged:
    planned, limit = points.choice(Choice.PLANNED_LINK), q.rule("separation_contact_referenced")
    ends = (Number.LINK_LEAST_MA, Number.LINK_GREATEST_MA, Number.LINK_MA)
    cases = Cases(REASONS)
    cases.when(planned == PlannedLink.SHORTS, Standing.UNMET, "shorts", defect=True)
    light = (planned == PlannedLink.TIES) & (points.number(Number.CONTACT_GREATEST_MA) <= limit)
    cases.when(light, Standing.UNMET, "ties-through-resistance")
    cases.when(planned == PlannedLink.TIES, Standing.UNMET, "ties-and-nothing-clears", defect=True)
    cases.when(planned == PlannedLink.TIED_BEFORE, Standing.UNMET, "tied-before", defect=True)
    cases.when(planned == PlannedLink.MAY_TIE, Standing.UNDETERMINED, "may-tie")
    current = Interval(*(points.number(which) for which in ends))
    return cases.settle(current, limit, (planned > 0) * (1 << Condition.BENCH_AS_IT_STANDS))


CHECK = Check(
    id="planned-link",
    quantity="planned_link_current_ma",
    unit="mA",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
    supplies=SEPARATED,
)
