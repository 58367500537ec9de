"""Do the readings agree with each other, and were they taken as readings should be?"""

import numpy as np

from faultloop.assessment.checks.common import COMPARISON
from faultloop.assessment.codes import Bound, Choice, Number, Reading
from faultloop.assessment.judged import AT_MOST, Cases, Check, Condition, Judged, Standing
from faultloop.assessment.loops import Basis, Fault
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities
from faultloop.electrical.measurement import Array, Interval, combined

REASONS = (
    *COMPARISON,
    "loop-below-external",
    "loop-below-its-part",
    "part-above-whole",
    "neutral-return-suspected",
    "voltage-off-nominal",
    "leads-not-nulled",
    "calibration-lapsed",
    "no-trip-inflation",
    "parallel-path",
    "neutral-above-earth-loop",
    "nothing-to-compare",
)


def _applies(points: Points, _: Quantities) -> Flags:
    return np.ones(points.count, dtype=np.bool_)


def _above(points: Points, q: Quantities, one: int, other: int) -> Flags:
    """Where one reading exceeds another by more than both uncertainties; an open end only strengthens it."""
    value, u, bound = points.value, q.given.uncertainty, points.bound
    both: Flags = q.given.known[one] & q.given.known[other]
    if not both.any():
        return both
    usable = (bound[one] != Bound.BELOW) & (bound[other] != Bound.ABOVE)
    above: Flags = usable & (value[one] - value[other] > combined(u[one], u[other]))
    return above


def _comparable(points: Points) -> Flags:
    """Where there is at least one pair of readings that must agree, or something said of how they were taken."""
    known = points.bound != Bound.MISSING
    parts = [
        Reading.EXTERNAL,
        Reading.LINE_NEUTRAL,
        Reading.LINE_PLUS_PROTECTIVE,
        Reading.PROTECTIVE,
        Reading.ELECTRODE,
    ]
    with_loop = known[Reading.LOOP] & np.logical_or.reduce(known[parts], axis=0)
    dead = known[Reading.LINE_PLUS_PROTECTIVE] & known[Reading.PROTECTIVE]
    taken = (points.choice(Choice.CALIBRATION_LAPSED) == 1) | ~np.isnan(points.number(Number.ZERO_EXCESS))
    comparable: Flags = with_loop | dead | known[Reading.VOLTAGE] | taken
    return comparable


def _judge(points: Points, q: Quantities) -> Judged:
    cases, found = Cases(REASONS), q.loops
    cases.when(~_comparable(points), Standing.NOT_EXAMINED, "nothing-to-compare")
    if cases.settle_everything():
        return cases.settle_unvalued()
    known = points.bound != Bound.MISSING
    cases.when(found.fault == Fault.BELOW_EXTERNAL, Standing.UNDETERMINED, "loop-below-external")
    dead, protective, loop = Reading.LINE_PLUS_PROTECTIVE, Reading.PROTECTIVE, Reading.LOOP
    # With Ze the dead sum decides where it is the higher one; without, nobody knows how much is missing.
    uncovered = _above(points, q, dead, loop) & ~known[Reading.EXTERNAL]
    cases.when(uncovered | _above(points, q, protective, loop), Standing.UNDETERMINED, "loop-below-its-part")
    cases.when(_above(points, q, protective, dead), Standing.UNDETERMINED, "part-above-whole")
    u = combined(q.given.uncertainty[loop], found.expected.uncertainty)
    lower = (-found.excess > u) & known[loop] & (points.bound[loop] == Bound.EXACT)
    same = ~_above(points, q, loop, Reading.LINE_NEUTRAL) & ~_above(points, q, Reading.LINE_NEUTRAL, loop)
    same &= points.bound[Reading.LINE_NEUTRAL] == Bound.EXACT
    cases.when(lower & same & ~q.tt, Standing.UNDETERMINED, "neutral-return-suspected")
    off = _off_nominal(points, q)
    cases.when(off, Standing.UNDETERMINED, "voltage-off-nominal")
    cases.when(points.number(Number.ZERO_EXCESS) > 0.0, Standing.UNDETERMINED, "leads-not-nulled")
    lapsed = points.choice(Choice.CALIBRATION_LAPSED) == 1
    cases.when(lapsed, Standing.MET, "calibration-lapsed")
    inflated = (found.basis == Basis.DEAD) & (found.excess > u)
    cases.when(inflated, Standing.MET, "no-trip-inflation")
    cases.when(lower | (q.tt & _above(points, q, Reading.ELECTRODE, loop)), Standing.MET, "parallel-path")
    cases.when(_above(points, q, Reading.LINE_NEUTRAL, loop), Standing.MET, "neutral-above-earth-loop")
    cases.when(np.ones_like(lapsed), Standing.MET, "within-limit")
    difference: Array = np.abs(found.excess)
    bits = np.where(lapsed, 1 << Condition.INSTRUMENT_CHECKED, 0)
    return cases.settle(Interval(difference, difference, difference), u + found.uplift, bits)


def _off_nominal(points: Points, q: Quantities) -> Flags:
    """Where the voltage as read lies wholly outside what a supply of that nominal voltage keeps."""
    read, nominal = q.given.reading(Reading.VOLTAGE), points.number(Number.VOLTAGE)
    allowed = nominal * q.rule("voltage_tolerance") / 100.0
    return (read.least > nominal + allowed) | (read.greatest < nominal - allowed)


CHECK = Check(
    id="readings-agree",
    quantity="difference_of_loops_ohm",
    unit="ohm",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
)
