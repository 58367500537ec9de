"""A curve that the caller brings along, such as a maker's: steps at its points and nothing between them."""

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

from faultloop.protection.band import Band

Steps = Sequence[tuple[float, float]]


@dataclass(frozen=True, slots=True)
class OwnCurve:
    """A device that is known by the caller's own points alone."""

    rated_current_a: float
    source: str
    band: Band

    @property
    def designation(self) -> str:
        """What the device is called, which names the curve as the caller's own and its source."""
        return f"own curve {self.rated_current_a:g} A (“{self.source}”)"


def refuse_disorder(steps: Steps) -> None:
    """Refuse points that are no falling step.

    Parameters
    ----------
    steps : sequence of (current_a, time_s)
        Points of one edge: currents [A] and times [s].

    Raises
    ------
    ValueError
        If a current does not rise or a time does not fall from one point to the next; the message counts
        the points from one.
    """
    for at, ((i1, t1), (i2, t2)) in enumerate(pairwise(steps), start=2):
        if i2 <= i1:
            raise ValueError(f"currents must rise from point to point; point {at} does not")
        if t2 >= t1:
            raise ValueError(f"times must fall from point to point; point {at} does not")


def own_band(rated_current_a: float, greatest: Steps, least: Steps = ()) -> Band:
    """Band of the caller's own points.

    Parameters
    ----------
    rated_current_a : float
        Rated current or setting of the device [A].
    greatest : sequence of (current_a, time_s)
        At this current [A] or above the device operates within the time [s].
    least : sequence of (current_a, time_s), optional
        At this current [A] or below the device does not operate within the time [s].

    Returns
    -------
    Band
        The points as they stand; below the first of `greatest` the device never operates, and without
        `least` it may operate at once.

    Raises
    ------
    ValueError
        If an edge is no falling step, if a point promises operation at or below the rated current, or if
        the edges contradict each other.
    """
    refuse_disorder(greatest)
    refuse_disorder(least)
    if any(current <= rated_current_a for current, _ in greatest):
        raise ValueError(
            "a point of greatest lies at or below the rated current, at which no device is sure to operate;"
            " currents are in ampere, not in multiples of the rated current"
        )
    if any(i1 <= i2 and t1 < t2 for i1, t1 in greatest for i2, t2 in least):
        raise ValueError("greatest and least contradict each other: a greatest time is under the least one there")
    return Band(tuple(greatest), tuple(least))
