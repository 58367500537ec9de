"""Instrument uncertainty, intervals, conformance probability and decision rules."""

import math
from dataclasses import dataclass
from statistics import NormalDist

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
Mask = NDArray[np.bool_]



@dataclass(frozen=True, slots=True)
class Interval:
    """Least, greatest and nominal value of one quantity, (n,) each; an open end is 0 or inf."""

    least: Array
    greatest: Array
    nominal: Array


def either(first: Mask, one: Interval, other: Interval) -> Interval:
    """One interval where a flag holds, and another elsewhere.

    Parameters
    ----------
    first : (n,) array of bool
        Where the first one holds.
    one, other : Interval
        In one unit.

    Returns
    -------
    Interval
        End by end.

    References
    ----------
    .. [1] JCGM 106:2012, 3.3.4 (coverage interval).
    """
    return Interval(
        np.where(first, one.least, other.least),
        np.where(first, one.greatest, other.greatest),
        np.where(first, one.nominal, other.nominal),
    )


def higher(one: Interval, other: Interval) -> Interval:
    """The higher of two intervals at each end, where both are believed.

    Parameters
    ----------
    one, other : Interval
        In one unit.

    Returns
    -------
    Interval
        End by end; where one is unknown (nan) the other stands.

    References
    ----------
    .. [1] JCGM 106:2012, 3.3.4 (coverage interval).
    """
    pairs = ((one.least, other.least), (one.greatest, other.greatest), (one.nominal, other.nominal))
    # Of two zeros either may be given; adding nothing makes them one.
    return Interval(*(np.fmax(first, second) + 0.0 for first, second in pairs))


def expanded_uncertainty(value: Array, percent: Array, constant: Array) -> Array:
    """Expanded uncertainty (k = 2) of an instrument's reading.

    Parameters
    ----------
    value : (n,) array
        Reading, in its own unit.
    percent : (n,) array
        Proportional part [% of reading].
    constant : (n,) array
        Constant part, in the reading's unit: digits times resolution, or a stated amount.

    Returns
    -------
    (n,) array
        U = |value|·percent/100 + constant.  An unknown reading (nan) stays nan.

    Notes
    -----
    An instrument's "percent plus digits" is read as the expanded uncertainty, u = U/2.

    References
    ----------
    .. [1] JCGM 106:2012, 7.
    """
    return np.abs(value) * percent / 100.0 + constant


def combined(first: Array, second: Array) -> Array:
    """Combine two independent uncertainties by the root of the sum of squares.

    Parameters
    ----------
    first, second : (n,) array
        Uncertainties in one unit and at one coverage.

    Returns
    -------
    (n,) array
        sqrt(first² + second²).

    References
    ----------
    .. [1] JCGM 100:2008, 5.1.2.
    """
    return np.sqrt(first * first + second * second)


def coverage_scale(coverage: float) -> float:
    """Factor that turns U at k = 2 into U at another coverage probability.

    Parameters
    ----------
    coverage : float
        Probability in the interval, 0.5 to 0.9999.

    Returns
    -------
    float
        z(coverage) / z(0.95), so that the customary k = 2 stands for 95 %.

    Raises
    ------
    ValueError
        If the coverage lies outside 0.5 to 0.9999.

    References
    ----------
    .. [1] JCGM 100:2008, G.3.
    """
    if not 0.5 <= coverage <= 0.9999:
        raise ValueError("coverage must lie between 0.5 and 0.9999")
    if coverage == 0.95:
        return 1.0
    normal = NormalDist()
    return normal.inv_cdf((1.0 + coverage) / 2.0) / normal.inv_cdf(0.975)


def conformance_probability(nominal: Array, expanded: Array, limit: Array, sense: Array) -> Array:
    """Probability that the true value keeps its limit, given the reading.

    Parameters
    ----------
    nominal : (n,) array
        Reading or value computed from readings.
    expanded : (n,) array
        Expanded uncertainty U (k = 2) of that value, same unit.
    limit : (n,) array
        Limit, same unit.
    sense : (n,) array
        +1 where the value must not exceed the limit, -1 where it must not fall below it.

    Returns
    -------
    (n,) array
        Φ(sense·(limit - nominal)/u) with u = U/2; with U = 0 it is 0 or 1; nan where an input is nan.

    References
    ----------
    .. [1] JCGM 106:2012, 7.2 and 7.3 (normal distribution, one-sided tolerance).
    """
    with np.errstate(divide="ignore", invalid="ignore"):
        z = sense * (limit - nominal) / (expanded / 2.0)
    exact = np.where(sense * (limit - nominal) >= 0.0, np.inf, -np.inf)
    z = np.where((expanded == 0.0) & ~np.isnan(nominal) & ~np.isnan(limit), exact, z)
    tails = [0.5 * math.erfc(value) for value in (-z / math.sqrt(2.0)).ravel().tolist()]
    return np.array(tails).reshape(z.shape)
