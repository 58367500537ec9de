"""What the temperature policy sets against a limit, and what it leaves of the limit."""

import numpy as np

from faultloop.assessment.codes import Choice, TemperaturePolicy
from faultloop.assessment.given import Given
from faultloop.assessment.points import Points
from faultloop.electrical.measurement import Array, Interval, either


def by_policy(points: Points, hot: Interval, cold: Interval) -> Interval:
    """The loop that the temperature policy sets against its limit: hot under `split`, else as read."""
    return either(points.choice(Choice.TEMPERATURE_POLICY) == TemperaturePolicy.SPLIT, hot, cold)


def limit_factor(g: Given) -> Array:
    """Factor on the voltage of a limit: the voltage factor, or the share that a flat policy leaves in place of it."""
    policy, c_min = g.points.choice(Choice.TEMPERATURE_POLICY), g.rule["c_min"]
    factor = np.where(policy == TemperaturePolicy.FOUR_FIFTHS, g.rule["four_fifths"] * c_min, c_min)
    return np.where(policy == TemperaturePolicy.TWO_THIRDS, g.rule["two_thirds"], factor)
