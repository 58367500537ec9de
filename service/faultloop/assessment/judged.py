"""What a check gives back, and how a value is set against its limit."""

from collections.abc import Callable
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from faultloop.assessment.codes import EARTHED, Codes, Decision
from faultloop.assessment.points import Flags, Ints, Points
from faultloop.assessment.quantities import Quantities
from faultloop.assessment.standing import Standing, Verdict, compare
from faultloop.electrical.measurement import Array, Interval

__all__ = ["AT_LEAST", "AT_MOST", "Check", "Decision", "Judged", "Settled", "Standing", "Verdict", "compare", "settled"]

AT_MOST, AT_LEAST = 1, -1


class Condition(Codes):
    """Conditions on which a met requirement rests; the bit of each in `Judged.conditions`."""

    RESIDUAL_CARRIES_PATH = 0
    SEASON = 1
    DESIGNATED_EQUIPMENT = 2
    SUPERVISION = 3
    CONDUCTOR_RATING = 4
    BACK_UP_DOCUMENTED = 5
    INSTRUMENT_CHECKED = 6
    BENCH_AS_IT_STANDS = 7
    ONE_ITEM_AT_A_TIME = 8
    CONTACT_FELT = 9
    DISCHARGED_FIRST = 10
    FIRST_FAULT_CLEARED = 11
    MONITOR_TESTED = 12


@lru_cache(maxsize=64)
def _codes(reasons: tuple[str, ...]) -> dict[str, int]:
    """Place of each reason in its check's list."""
    return {reason: code for code, reason in enumerate(reasons)}


class Cases:
    """Standing and reason case by case: the first case that holds decides, else comparison does."""

    def __init__(self, reasons: tuple[str, ...]) -> None:
        self._codes = _codes(reasons)
        self.holds: list[Flags] = []
        self.standing: list[int] = []
        self.reason: list[int] = []
        self.defect: list[bool] = []
        self.offsets: list[tuple[int, Ints]] = []

    def when(
        self, holds: Flags, standing: int, reason: str, *, defect: bool = False, offset: Ints | None = None
    ) -> None:
        """Add a case; with `offset` the reason is that many further on in the check's list."""
        if offset is not None:
            self.offsets.append((len(self.holds), offset))
        self.holds.append(holds)
        self.standing.append(standing)
        self.reason.append(self._codes[reason])
        self.defect.append(defect)

    def settle_everything(self) -> bool:
        """Whether the cases so far decide every point, so that nothing further can change one."""
        return bool(np.logical_or.reduce(self.holds).all())

    def settle(self, value: Interval, limit: Array, conditions: Ints | None = None) -> "Judged":
        """Draw the cases together with the value and limit that are compared where none holds."""
        return Judged(value, limit, self, np.zeros(limit.shape, np.int64) if conditions is None else conditions)

    def settle_unvalued(self) -> "Judged":
        """Draw together cases that decide every point without a value."""
        nothing = np.full(self.holds[0].shape, np.nan)
        return self.settle(Interval(nothing, nothing, nothing), nothing)


@dataclass(frozen=True, slots=True)
class Judged:
    """One check at n points, not yet a verdict: a value, its limit, and the cases that come before comparison."""

    value: Interval
    limit: Array
    cases: Cases
    conditions: Ints


def unjudged(count: int) -> Judged:
    """Of a check that concerns none of n points: nothing."""
    nothing = np.full(count, np.nan)
    return Judged(Interval(nothing, nothing, nothing), nothing, Cases(()), np.zeros(count, np.int64))


@dataclass(frozen=True, slots=True)
class Settled:
    """Every check's cases drawn together, (K, n) each.

    `standing` says whether the value is compared or why it is not; `defect` marks what is shown to be
    broken rather than merely not met; `reason` indexes the check's reasons, -1 leaving it to the verdict.
    """

    standing: Ints
    reason: Ints
    defect: Flags


@lru_cache(maxsize=64)
def _layout(counts: tuple[int, ...]) -> tuple[Ints, Ints]:
    """Where each check's cases stand in one list of all: rows (K, C), the last always holding, and starts (K, 1)."""
    starts = np.cumsum([0, *(count + 1 for count in counts[:-1])])
    rows = np.full((len(counts), max(counts) + 1), 0, dtype=np.int64)
    for at, (start, count) in enumerate(zip(starts.tolist(), counts, strict=True)):
        rows[at] = np.minimum(start + np.arange(rows.shape[1]), start + count)
    return rows, starts[:, None]


def settled(checks: list[Cases], count: int) -> Settled:
    """Settle all checks at n points: one look for the first case that holds, whatever the number of checks."""
    always = np.ones(count, np.bool_)
    holds = np.array([flags for cases in checks for flags in (*cases.holds, always)])
    rows, starts = _layout(tuple(len(cases.holds) for cases in checks))
    first = starts + holds[rows].argmax(axis=1)
    standing = np.array([code for cases in checks for code in (*cases.standing, Standing.COMPARED)])[first]
    reason = np.array([code for cases in checks for code in (*cases.reason, -1)])[first]
    defect = np.array([flag for cases in checks for flag in (*cases.defect, False)])[first]
    for row, cases in enumerate(checks):
        for case, offset in cases.offsets:
            reason[row] += np.where(first[row] == starts[row, 0] + case, offset, 0)
    return Settled(standing, reason, defect)


@dataclass(frozen=True, slots=True)
class Check:
    """A check: what it is called, what it measures, how it reasons, and which supplies it is for.

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
    supplies: frozenset[int] = EARTHED
