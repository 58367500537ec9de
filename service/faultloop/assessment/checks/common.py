"""Cases that several checks settle in the same words, and their reasons in order of the codes."""

from faultloop.assessment.judged import Cases, Standing
from faultloop.assessment.loops import Fault
from faultloop.assessment.quantities import Quantities, Wanting

COMPARISON = ("within-limit", "limit-inside-uncertainty", "over-limit")
PREREQUISITES = (
    "earthing-missing",
    "earthing-not-covered",
    "direct-current-not-covered",
    "nominal-voltage-unclear",
    "role-missing",
)
LOOP = ("loop-missing", "reading-implausible", "loop-below-external")


def prerequisites_are_wanting(cases: Cases, q: Quantities, standing: int) -> None:
    """Settle the points at which nothing can be decided yet."""
    cases.when(q.wanting != Wanting.NOTHING, standing, PREREQUISITES[0], offset=q.wanting - 1)


def loop_is_wanting(cases: Cases, q: Quantities) -> None:
    """Settle the points whose loop is missing, implausible or contradicted."""
    cases.when(q.loops.fault != Fault.NONE, Standing.UNDETERMINED, LOOP[0], offset=q.loops.fault - 1)
