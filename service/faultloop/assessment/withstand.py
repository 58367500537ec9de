"""Whether a line conductor bears a fault current for as long as the devices in series may take."""

import numpy as np

from faultloop.assessment.codes import Choice, Number
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.series import greatest_time
from faultloop.electrical.conductors import ADIABATIC_FROM_S, withstand_time
from faultloop.electrical.measurement import Array


def withstands(points: Points, least_a: Array, greatest_a: Array, *, alone: bool = False) -> Flags:
    """Whether the conductor bears every current of an interval, by its own device alone or with those upstream.

    Within one step of the band the time is constant and the withstand falls with the current, so the
    greatest current of each step is tried: both ends, and just below every tested current between them.
    From 0.1 s down let-through energy decides, not the step of the band, which then refutes nothing; that
    holds for the circuit's own device, while one upstream is credited only with what its step shows.
    """
    series = (points.choice(Choice.DEVICE), *(() if alone else points.upstream))
    k, area = points.number(Number.ADIABATIC_K), points.number(Number.LINE_MM2)
    edges = np.nextafter(np.concatenate([points.overcurrent.slow_current[row].T for row in series]), 0.0)
    inside = (edges > least_a) & (edges < greatest_a)
    tried = np.concatenate([least_a[None], greatest_a[None], np.where(inside, edges, least_a)])
    own = points.overcurrent.greatest_time(points.choice(Choice.DEVICE), tried)
    slowest = own if alone else greatest_time(points, tried)
    borne = (own <= ADIABATIC_FROM_S) | (slowest <= withstand_time(k, area, tried))
    everywhere: Flags = np.logical_and.reduce(borne, axis=0)
    return everywhere & ~np.isnan(k * area)
