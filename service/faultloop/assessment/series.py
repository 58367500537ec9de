"""Overcurrent devices in series: what the devices upstream of the circuit's own add to it."""

from dataclasses import dataclass

import numpy as np

from faultloop.assessment.codes import Choice
from faultloop.assessment.points import Ints, Points
from faultloop.electrical.measurement import Array
from faultloop.protection.band import faster


@dataclass(frozen=True, slots=True)
class Upstream:
    """The quickest device upstream, (n,) each: its operating current, its place in the series, its loop limit.

    `verdict` sets the loop against that limit; undetermined where no device upstream guarantees the time.
    """

    operating_current: Array
    place: Ints
    limit: Array
    verdict: Ints


def quickest_upstream(points: Points, required_s: Array) -> tuple[Array, Ints]:
    """Least current at which a device upstream is sure to operate in time [A], inf for none; and which it is."""
    current, place = np.full(points.count, np.inf), np.zeros(points.count, dtype=np.int64)
    for at, row in enumerate(points.upstream):
        own = points.overcurrent.operating_current(row, required_s)
        lower = own < current
        current, place = np.where(lower, own, current), np.where(lower, at, place)
    return current, place


def upstream_time(points: Points, current_a: Array) -> Array:
    """Greatest guaranteed time of the devices upstream at currents (..., n) [s]; inf where there is none."""
    time = np.where(np.isnan(current_a), np.nan, np.inf)
    for row in points.upstream:
        time = faster(time, points.overcurrent.greatest_time(row, current_a))
    return time


def greatest_time(points: Points, current_a: Array) -> Array:
    """Greatest guaranteed time of the series at currents (..., n) [s]: either device interrupts."""
    time = points.overcurrent.greatest_time(points.choice(Choice.DEVICE), current_a)
    return faster(time, upstream_time(points, current_a)) if len(points.upstream) else time


def least_time(points: Points, current_a: Array) -> Array:
    """Least operating time of the series at a current [s]."""
    time = points.overcurrent.least_time(points.choice(Choice.DEVICE), current_a)
    for row in points.upstream:
        time = faster(time, points.overcurrent.least_time(row, current_a))
    return time
