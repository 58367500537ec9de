"""Is the loop as low as the circuit's parts add up to, or does something sit in the protective path?"""

import numpy as np

from faultloop.assessment.checks.common import COMPARISON, PREREQUISITES, prerequisites_are_wanting
from faultloop.assessment.judged import AT_MOST, Cases, Check, Judged, Standing
from faultloop.assessment.loops import Fault
from faultloop.assessment.points import Bound, Flags, Number, Points, Reading
from faultloop.assessment.quantities import Quantities
from faultloop.electrical.measurement import Array, Interval, combined

REASONS = (
    *COMPARISON,
    *PREREQUISITES,
    "excess-unexplained",
    "no-expectation",
    "loop-unusable",
)


def _applies(_: Points, q: Quantities) -> Flags:
    return ~q.tt


def _expected(points: Points, q: Quantities) -> tuple[Array, Array]:
    """Loop to be expected and its uncertainty: by dead test or length, else from the line-neutral loop and the areas.

    Half of the line-neutral loop behind the origin is the line conductor; the protective conductor's share follows
    from the areas, metals being alike.
    """
    line, protective = points.number(Number.LINE_MM2), points.number(Number.PROTECTIVE_MM2)
    read, external = points.value[Reading.LINE_NEUTRAL], q.loops.external
    exact = points.bound[Reading.LINE_NEUTRAL] == Bound.EXACT
    behind = np.maximum(read - external, 0.0) / 2.0
    share = 1.0 + line / protective
    by_neutral = np.where(exact, external + behind * share, np.nan)
    u = combined(q.loops.external_u, q.given.uncertainty[Reading.LINE_NEUTRAL] * share / 2.0)
    known = ~np.isnan(q.loops.expected.value)
    return (
        np.where(known, q.loops.expected.value, by_neutral),
        np.where(known, q.loops.expected.uncertainty, u),
    )


def _judge(points: Points, q: Quantities) -> Judged:
    expected, expected_u = _expected(points, q)
    loop, u = q.loops.live, q.given.uncertainty[Reading.LOOP]
    slack = combined(u, expected_u) + q.loops.uplift
    excess = loop.nominal - expected
    open_end = np.isinf(loop.greatest)
    cases = Cases(REASONS)
    prerequisites_are_wanting(cases, q, Standing.NOT_EXAMINED)
    unusable = (q.loops.fault != Fault.NONE) | np.isnan(loop.nominal) | (open_end & ~(excess > slack))
    cases.when(unusable, Standing.NOT_EXAMINED, "loop-unusable")
    cases.when(np.isnan(excess), Standing.NOT_EXAMINED, "no-expectation")
    if cases.settle_everything():
        return cases.settle_unvalued()
    cases.when(excess > slack, Standing.UNMET, "excess-unexplained", defect=True)
    cases.when(np.ones_like(open_end), Standing.MET, "within-limit")
    return cases.settle(Interval(excess, excess, excess), slack)


CHECK = Check(
    id="protective-conductor-condition",
    quantity="excess_earth_fault_loop_impedance_ohm",
    unit="ohm",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
)
