"""Values over several points that look written rather than read; a suspicion is a note and decides nothing."""

from dataclasses import dataclass

import numpy as np

from faultloop.assessment.codes import Bound, Reading
from faultloop.assessment.points import Flags, Ints
from faultloop.electrical.measurement import Array

# So many points must show it before chance is a poor explanation (assumptions; no standard sets them).
FEWEST_SUMS, FEWEST_ALIKE, LEAST_SHARE_ALIKE = 5, 8, 0.5
_LEAST_DIGIT_OHM = 1e-9


@dataclass(frozen=True, slots=True)
class Suspicion:
    """What looks written, and at which points, by their place in the table."""

    reason: str
    places: tuple[int, ...]


def suspicions(value: Array, bound: Ints) -> list[Suspicion]:
    """Look through the readings (R, n) of a table of points.

    `sums-exact`: the loop is exactly Ze + (R1 + R2) at five points or more; real readings scatter, so R1 + R2
    or the loop was computed.  `loops-alike`: one loop value stands at eight points or more and at half of all;
    points along a run read more the farther they lie.
    """
    exact, read = _sums_exact(value, bound), bound[Reading.LOOP] == Bound.EXACT
    found = [Suspicion("sums-exact", _places(exact))] if exact.sum() >= FEWEST_SUMS else []
    values, counts = np.unique(value[Reading.LOOP][read], return_counts=True)
    many = (counts >= FEWEST_ALIKE) & (counts >= LEAST_SHARE_ALIKE * read.sum())
    alike = [read & (value[Reading.LOOP] == same) for same in values[many]]
    return found + [Suspicion("loops-alike", _places(places)) for places in alike]


def _sums_exact(value: Array, bound: Ints) -> Flags:
    parts = [Reading.LOOP, Reading.EXTERNAL, Reading.LINE_PLUS_PROTECTIVE]
    known = np.logical_and.reduce(bound[parts] == Bound.EXACT, axis=0)
    loop, external, dead = value[parts]
    exact: Flags = known & (np.abs(loop - external - dead) < _LEAST_DIGIT_OHM)
    return exact


def _places(flags: Flags) -> tuple[int, ...]:
    return tuple(np.flatnonzero(flags).tolist())
