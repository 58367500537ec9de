"""Values over several points that look written rather than read; a suspicion is a note and decides nothing."""

from dataclasses import dataclass

import numpy as np

from faultloop.assessment.points import Bound, Flags, Points, Reading

# So many points must show it before chance is a poor explanation (assumptions; no standard sets them).
FEWEST_SUMS, FEWEST_ALIKE, LEAST_SHARE_ALIKE = 5, 8, 0.5
_LEAST_DIGIT_OHM = 1e-9


@dataclass(frozen=True, slots=True)
class Suspicion:
    """What looks written, and at which points, by their place in the table."""

    reason: str
    places: tuple[int, ...]


def suspicions(points: Points) -> list[Suspicion]:
    """Look through a table of points.

    `sums-exact`: the loop is exactly Ze + (R1 + R2) at five points or more; real readings scatter, so R1 + R2
    or the loop was computed.  `loops-alike`: one loop value stands at eight points or more and at half of all;
    points along a run read more the farther they lie.
    """
    found = [Suspicion("sums-exact", _places(exact))] if (exact := _sums_exact(points)).sum() >= FEWEST_SUMS else []
    read = points.bound[Reading.LOOP] == Bound.EXACT
    values, counts = np.unique(points.value[Reading.LOOP][read], return_counts=True)
    many = (counts >= FEWEST_ALIKE) & (counts >= LEAST_SHARE_ALIKE * read.sum())
    alike = [read & (points.value[Reading.LOOP] == value) for value in values[many]]
    return found + [Suspicion("loops-alike", _places(places)) for places in alike]


def _sums_exact(points: Points) -> Flags:
    parts = [Reading.LOOP, Reading.EXTERNAL, Reading.LINE_PLUS_PROTECTIVE]
    known = np.logical_and.reduce(points.bound[parts] == Bound.EXACT, axis=0)
    loop, external, dead = points.value[parts]
    exact: Flags = known & (np.abs(loop - external - dead) < _LEAST_DIGIT_OHM)
    return exact


def _places(flags: Flags) -> tuple[int, ...]:
    return tuple(np.flatnonzero(flags).tolist())
