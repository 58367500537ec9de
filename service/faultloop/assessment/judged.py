"""What a check gives back, and how a value is set against its limit."""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from faultloop.assessment.points import Codes, Decision, Flags, Ints, Points
from faultloop.assessment.quantities import Quantities
from faultloop.assessment.standing import Standing, Verdict, compare
from faultloop.electrical.measurement import Array, Interval

__all__ = ["AT_LEAST", "AT_MOST", "Check", "Decision", "Judged", "Standing", "Verdict", "compare"]

AT_MOST, AT_LEAST = 1, -1


class Condition(Codes):
    """Conditions on which a met requirement rests; the bit of each in `Judged.conditions`."""

    RESIDUAL_CARRIES_PATH = 0
    SEASON = 1
    DESIGNATED_EQUIPMENT = 2
    SUPERVISION = 3
    CONDUCTOR_RATING = 4
    BACK_UP_DOCUMENTED = 5


@dataclass(frozen=True, slots=True)
class Judged:
    """One check at n points, not yet a verdict.

    `standing` says whether the value is compared or why it is not; `defect` marks what is shown to be
    broken rather than merely not met; `reason` indexes the check's reasons, -1 leaving it to the verdict.
    """

    value: Interval
    limit: Array
    standing: Ints
    reason: Ints
    defect: Flags
    conditions: Ints


@dataclass(frozen=True, slots=True)
class Check:
    """A check: what it is called, what it measures, how it reasons.

    The first three reasons are those of a comparison: met, limit inside the uncertainty, not met.
    """

    id: str
    quantity: str
    unit: str
    sense: int
    reasons: tuple[str, ...]
    applies: Callable[[Points, Quantities], Flags]
    judge: Callable[[Points, Quantities], Judged]
    group: str | None = None
    report: bool = False


class Cases:
    """Settle standing and reason case by case: the first case that holds decides, else comparison does."""

    def __init__(self, reasons: tuple[str, ...]) -> None:
        self._reasons = reasons
        self._holds: list[Flags] = []
        self._standing: list[int] = []
        self._reason: list[int] = []
        self._defect: list[bool] = []
        self._offsets: list[tuple[int, Ints]] = []

    def when(
        self, holds: Flags, standing: int, reason: str, *, defect: bool = False, offset: Ints | None = None
    ) -> None:
        """Add a case; with `offset` the reason is that many further on in the check's list."""
        if offset is not None:
            self._offsets.append((len(self._holds), offset))
        self._holds.append(holds)
        self._standing.append(standing)
        self._reason.append(self._reasons.index(reason))
        self._defect.append(defect)

    def settle(self, value: Interval, limit: Array, conditions: Ints | None = None) -> "Judged":
        """Draw the cases together with the value and limit that are compared where none holds."""
        compared = np.ones_like(self._holds[0])
        first = np.array([*self._holds, compared]).argmax(axis=0)
        reason = np.array([*self._reason, -1])[first]
        for case, offset in self._offsets:
            reason = np.where(first == case, reason + offset, reason)
        return Judged(
            value=value,
            limit=limit,
            standing=np.array([*self._standing, Standing.COMPARED])[first],
            reason=reason,
            defect=np.array([*self._defect, False])[first],
            conditions=np.zeros_like(first) if conditions is None else conditions,
        )
