"""What was given at n points: the readings as intervals, and each point's rule values."""

from dataclasses import dataclass

import numpy as np

from faultloop.assessment.codes import Bound, Choice, Earthing, MeansOfEarthing, Reading, among
from faultloop.assessment.points import READINGS, Flags, Points
from faultloop.assessment.rule_table import RuleValues
from faultloop.assessment.tables import Tables
from faultloop.electrical.measurement import Array, Interval, expanded_uncertainty

# Supplies whose external loop is all of metal.
METALLIC = among((Earthing.UNKNOWN, Earthing.TN_S, Earthing.TN_C_S, Earthing.TN_C))
# Dead tests of the protective conductor: over range they show it open.
_DEAD_TESTS = [Reading.LINE_PLUS_PROTECTIVE, Reading.PROTECTIVE]


@dataclass(frozen=True, slots=True)
class Given:
    """Readings (R, n) with their intervals, and the rule set's values.

    `origin_lost`: no means of earthing; `earth_lost`: none that reaches the point.
    """

    points: Points
    tables: Tables
    rule: RuleValues
    uncertainty: Array
    known: Flags
    least: Array
    greatest: Array
    tt: Flags
    origin_lost: Flags
    earth_lost: Flags

    def reading(self, which: int) -> Interval:
        """Interval of one reading; nan where it was not taken, open where it is over or under range."""
        return Interval(self.least[which], self.greatest[which], self.points.value[which])


def given(points: Points, tables: Tables) -> Given:
    """Turn readings into intervals: the stated instrument's uncertainty, else the rule set's default."""
    rule = tables.rules.of(points)
    rows, rules = np.arange(READINGS)[:, None], points.choice(Choice.RULES)[None, :]
    table = rule.table
    percent = np.where(np.isnan(points.percent), table.percent[rules, rows, points.method], points.percent)
    constant = np.where(np.isnan(points.constant), table.constant[rules, rows, points.method], points.constant)
    u = expanded_uncertainty(points.value, percent, constant) * points.coverage
    least = np.where(points.bound == Bound.BELOW, 0.0, np.maximum(points.value - u, 0.0))
    greatest = np.where(points.bound == Bound.ABOVE, np.inf, points.value + u)
    tt = points.choice(Choice.EARTHING) == Earthing.TT
    lost = _origin_lost(points, rule, least[Reading.EXTERNAL])
    return Given(
        points=points,
        tables=tables,
        rule=rule,
        uncertainty=u,
        known=points.bound != Bound.MISSING,
        least=least,
        greatest=greatest,
        tt=tt,
        origin_lost=lost,
        earth_lost=lost | np.logical_or.reduce(points.bound[_DEAD_TESTS] == Bound.ABOVE, axis=0),
    )


def _origin_lost(points: Points, rule: RuleValues, external_least: Array) -> Flags:
    """Where the means of earthing is stated as lost, or Ze shows on a TN supply that it is."""
    read = points.bound[Reading.EXTERNAL] != Bound.MISSING
    metallic = METALLIC[points.choice(Choice.EARTHING)]
    open_loop = metallic & read & (external_least > rule["tn_loop"])
    lost: Flags = (points.choice(Choice.MEANS_OF_EARTHING) == MeansOfEarthing.LOST) | open_loop
    return lost
