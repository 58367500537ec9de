"""The line-neutral loop: measured, on TT added up, or bounded by the parts of the earth fault loop."""

from dataclasses import dataclass

import numpy as np

from faultloop.assessment.codes import Bound, Choice, Earthing, Method, Number, Reading
from faultloop.assessment.given import Given
from faultloop.assessment.loops import Fault, Loops
from faultloop.assessment.points import Flags
from faultloop.electrical.fault_current import heated_loop
from faultloop.electrical.measurement import Array, Interval, combined, either


@dataclass(frozen=True, slots=True)
class LineNeutral:
    """The line-neutral loop: hot, its cold least, and whether it was measured or inferred."""

    hot: Interval
    cold: Interval
    measured: Flags
    inferred: Flags


def line_neutral(g: Given, found: Loops, hot_loop: Interval, factor: Array) -> LineNeutral:
    """The line-neutral loop as measured, else bounded by the earth fault loop's parts."""
    points = g.points
    cold, part, part_u = _cold(g, found)
    measured = ~np.isnan(cold.nominal)
    no_larger = points.number(Number.PROTECTIVE_MM2) <= points.number(Number.NEUTRAL_MM2)
    same = (points.choice(Choice.INFERABLE) == 1) & no_larger
    inferred = ~measured & ~g.tt & same & (found.fault == Fault.NONE)
    if not (measured | inferred).any():
        return LineNeutral(cold, cold, measured, inferred)
    hot = heated_loop(cold, np.full(points.count, np.nan), part, part_u, factor)
    bound_hot, bound_cold = _bound(found, hot_loop, factor)
    return LineNeutral(either(inferred, bound_hot, hot), either(inferred, bound_cold, cold), measured, inferred)


def _bound(found: Loops, hot_loop: Interval, factor: Array) -> tuple[Interval, Interval]:
    """What the line-neutral loop cannot exceed, hot and cold: Ze + (R1 + R2) where tested, else Zs."""
    dead, dead_u = found.expected.value, found.expected.uncertainty
    tested = found.expected.by_dead_test
    sum_ = Interval(np.maximum(dead - dead_u, 0.0), dead + dead_u, dead)
    hot = heated_loop(sum_, found.dead_resistance, found.external, found.external_u, factor)
    return _from_zero(either(tested, hot, hot_loop)), _from_zero(either(tested, sum_, found.loop))


def _from_zero(bound: Interval) -> Interval:
    """A bound says nothing of how small the value may be."""
    return Interval(np.zeros_like(bound.greatest), bound.greatest, bound.nominal)


def _cold(g: Given, found: Loops) -> tuple[Interval, Array, Array]:
    """Z_LN as read, else on TT the origin's with R1 + R2; with the part outside that is not heated."""
    points, at, dead = g.points, Reading.ORIGIN_LINE_NEUTRAL, Reading.LINE_PLUS_PROTECTIVE
    read, origin, origin_u = g.reading(Reading.LINE_NEUTRAL), points.value[at], g.uncertainty[at]
    total, u = origin + found.dead_resistance, combined(origin_u, g.uncertainty[dead])
    use = g.tt & ~g.known[Reading.LINE_NEUTRAL] & (points.bound[at] != Bound.ABOVE) & ~np.isnan(total)
    cold = Interval(
        np.where(use, np.maximum(total - u, 0.0), read.least),
        np.where(use, total + u, read.greatest),
        np.where(use, total, read.nominal),
    )
    own = (points.bound[at] == Bound.EXACT) & (points.method[at] <= Method.HIGH_CURRENT)
    # Only where neutral and earth are one conductor before the origin is Ze the line-neutral loop there too.
    pen = points.choice(Choice.EARTHING) == Earthing.TN_C_S
    part = np.where(own, origin, np.where(pen, found.external, np.nan))
    return cold, part, np.where(own, origin_u, np.where(pen, found.external_u, np.nan))
