"""Is the loop as low as the circuit's parts add up to, or does something sit in the protective path?"""

import numpy as np

from faultloop.assessment.checks.common import COMPARISON, PREREQUISITES, prerequisites_are_wanting
from faultloop.assessment.codes import Bound, Choice, Earthing, Number, Reading
from faultloop.assessment.judged import AT_MOST, Cases, Check, Judged, Standing
from faultloop.assessment.loops import Fault
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities
from faultloop.electrical.measurement import Array, Interval, combined

REASONS = (
    *COMPARISON,
    *PREREQUISITES,
    "open-when-dead",
    "dead-test-unexplained",
    "excess-unexplained",
    "no-expectation",
    "loop-unusable",
)


def _open_when_dead(points: Points) -> Flags:
    """Where a dead test of the protective conductor read over range."""
    tested = [Reading.LINE_PLUS_PROTECTIVE, Reading.PROTECTIVE]
    open_end: Flags = np.logical_or.reduce(points.bound[tested] == Bound.ABOVE, axis=0)
    return open_end


def _applies(points: Points, q: Quantities) -> Flags:
    return ~q.tt | _open_when_dead(points) | q.loops.dead_beyond


def _expected(points: Points, q: Quantities) -> tuple[Array, Array]:
    """Loop to be expected and its uncertainty: by dead test or length, else from the line-neutral loop and the areas.

    Half of the line-neutral loop behind the origin is the line conductor; the protective conductor's share follows
    from the areas, metals being alike.  What lies before the origin is its own line-neutral loop; only on TN-C-S is
    that the external loop too.
    """
    line, protective = points.number(Number.LINE_MM2), points.number(Number.PROTECTIVE_MM2)
    at, origin = Reading.LINE_NEUTRAL, points.value[Reading.ORIGIN_LINE_NEUTRAL]
    pen = points.choice(Choice.EARTHING) == Earthing.TN_C_S
    before = np.where(np.isnan(origin) & pen, q.loops.external, origin)
    exact = points.bound[at] == Bound.EXACT
    behind = np.maximum(points.value[at] - before, 0.0) / 2.0
    share = 1.0 + line / protective
    by_neutral = np.where(exact, q.loops.external + behind * share, np.nan)
    u = combined(q.loops.external_u, q.given.uncertainty[at] * share / 2.0)
    known = ~np.isnan(q.loops.expected.value)
    return (
        np.where(known, q.loops.expected.value, by_neutral),
        np.where(known, q.loops.expected.uncertainty, u),
    )


def _judge(points: Points, q: Quantities) -> Judged:
    dead_beyond, parts = q.loops.dead_beyond, q.loops.expected
    cases = Cases(REASONS)
    cases.when(_open_when_dead(points), Standing.UNMET, "open-when-dead", defect=True)
    cases.when(dead_beyond, Standing.UNMET, "dead-test-unexplained", defect=True)
    prerequisites_are_wanting(cases, q, Standing.NOT_EXAMINED)
    expected, expected_u = _expected(points, q)
    loop, u = q.loops.live, q.given.uncertainty[Reading.LOOP]
    slack = combined(u, expected_u) + q.loops.uplift
    excess = loop.nominal - expected
    open_end = np.isinf(loop.greatest)
    unusable = (q.loops.fault != Fault.NONE) | np.isnan(loop.nominal) | (open_end & ~(excess > slack))
    cases.when(unusable, Standing.NOT_EXAMINED, "loop-unusable")
    cases.when(np.isnan(excess), Standing.NOT_EXAMINED, "no-expectation")
    cases.when(excess > slack, Standing.UNMET, "excess-unexplained", defect=True)
    cases.when(np.ones_like(open_end), Standing.MET, "within-limit")
    return cases.settle(*_compared(dead_beyond, parts.dead_excess, parts.dead_slack, excess, slack))


def _compared(
    dead_beyond: Flags, dead_excess: Array, dead_slack: Array, excess: Array, slack: Array
) -> tuple[Interval, Array]:
    """The excess and what the uncertainties allow: of the dead test over its route, else of the loop."""
    value = np.where(dead_beyond, dead_excess, excess)
    return Interval(value, value, value), np.where(dead_beyond, dead_slack, slack)


CHECK = Check(
    id="protective-conductor-condition",
    quantity="excess_earth_fault_loop_impedance_ohm",
    unit="ohm",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
)
