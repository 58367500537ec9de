"""decide(): judged values -> findings -> groups -> verdict and urgency; the any-of groups are data."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from faultloop.assessment.checks import CHECKS
from faultloop.assessment.codes import Choice
from faultloop.assessment.judged import Condition, Judged, Settled, Standing, Verdict, compare, settled, unjudged
from faultloop.assessment.points import Flags, Ints, Points
from faultloop.assessment.quantities import Quantities, shared
from faultloop.assessment.standing import STANDING_VERDICT
from faultloop.assessment.tables import Tables, tables
from faultloop.assessment.urgency import urgency
from faultloop.electrical.measurement import Array, Interval

# A requirement that any one member meets takes its best member; every other check counts by itself.
ANY_OF: dict[str, tuple[str, ...]] = {
    "fault-protection": ("overcurrent-disconnection", "residual-disconnection"),
}


ROWS = {check.id: row for row, check in enumerate(CHECKS)}
CONDITIONS = Condition.codes()
REPORTS = np.array([check.report for check in CHECKS])[:, None]
SENSES = np.array([check.sense for check in CHECKS])[:, None]
# Reason of a comparison by verdict: fail, undetermined, marginal, pass-with-conditions, pass; two never compared.
# A check settles whatever is unknown before it compares, so an undetermined comparison has no words of its own.
COMPARED_REASON = np.array([2, 1, 1, 0, 0, 0, 0])


@dataclass(frozen=True, slots=True)
class Findings:
    """What every check found at every point, (K, n)."""

    verdict: Ints
    reason: Ints
    least: Array
    greatest: Array
    nominal: Array
    limit: Array
    defect: Flags
    conditions: Ints
    counts: Flags
    compared: Flags


@dataclass(frozen=True, slots=True)
class Outcome:
    """The verdict of every point, and what it rests on."""

    findings: Findings
    quantities: Quantities
    verdict: Ints
    urgency: Ints
    conditions: Ints


def decide(points: Points, by: Tables | None = None) -> Outcome:
    """Judge n points by every check and draw the verdicts; the one path for one point and for a million.

    The points' rows are those of the tables; without any they are the shipped ones.
    """
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        quantities = shared(points, by or tables())
        judged, applies = zip(*_judged(points, quantities), strict=True)
        return _outcome(points, quantities, judged, applies)


def _judged(points: Points, q: Quantities) -> Iterator[tuple[Judged, Flags]]:
    """Every check judged, and where it applies; one that is for other supplies than there are is not looked at."""
    earthing = points.choice(Choice.EARTHING)
    present, nobody, nowhere = frozenset(earthing.tolist()), unjudged(points.count), np.zeros(points.count, np.bool_)
    for check in CHECKS:
        if present.isdisjoint(check.supplies):
            yield nobody, nowhere
            continue
        applies = check.applies(points, q)
        if not present <= check.supplies:
            applies = applies & np.isin(earthing, tuple(check.supplies))
        yield check.judge(points, q), applies


def _outcome(points: Points, quantities: Quantities, judged: Sequence[Judged], applies: Sequence[Flags]) -> Outcome:
    value = Interval(
        np.array([j.value.least for j in judged]),
        np.array([j.value.greatest for j in judged]),
        np.array([j.value.nominal for j in judged]),
    )
    limit, conditions = np.array([j.limit for j in judged]), np.array([j.conditions for j in judged])
    compared = compare(value, limit, SENSES, points.choice(Choice.DECISION))
    drawn = settled([j.cases for j in judged], points.count)
    verdict, reason = _verdicts(compared, drawn, np.array(applies), conditions)
    counts, overall = _grouped(verdict)
    findings = Findings(
        verdict=verdict,
        reason=reason,
        least=value.least,
        greatest=value.greatest,
        nominal=value.nominal,
        limit=limit,
        defect=drawn.defect & (verdict == Verdict.FAIL),
        conditions=np.where(verdict == Verdict.PASS_WITH_CONDITIONS, conditions, 0),
        counts=counts,
        compared=drawn.standing == Standing.COMPARED,
    )
    held = np.bitwise_or.reduce(np.where(counts, findings.conditions, 0), axis=0)
    # A defect orders work even where another member of an any-of group decides.
    defect: Flags = np.logical_or.reduce(findings.defect, axis=0)
    level = urgency(points, quantities, overall, defect, _cleared(verdict))
    return Outcome(findings, quantities, overall, level, held)


def _verdicts(compared: Ints, drawn: Settled, applies: Flags, conditions: Ints) -> tuple[Ints, Ints]:
    """Verdicts and reasons, (K, n): compared where a check leaves it to that, conditional where it must."""
    verdict = np.where(drawn.standing == Standing.COMPARED, compared, STANDING_VERDICT[drawn.standing])
    reason = np.where(drawn.reason < 0, COMPARED_REASON[verdict], drawn.reason)
    conditional = (verdict == Verdict.PASS) & (conditions != 0)
    verdict = np.where(conditional, Verdict.PASS_WITH_CONDITIONS, verdict)
    return np.where(applies, verdict, Verdict.NOT_APPLICABLE), np.where(applies, reason, -1)


def _cleared(verdict: Ints) -> Flags:
    """Where a member of fault protection is met."""
    members = verdict[[ROWS[member] for member in ANY_OF["fault-protection"]]]
    met: Flags = np.logical_or.reduce((members == Verdict.PASS) | (members == Verdict.PASS_WITH_CONDITIONS), axis=0)
    return met


def _grouped(verdict: Ints) -> tuple[Flags, Ints]:
    """Which findings count at each point, and the worst of those that do."""
    given = verdict <= Verdict.PASS
    counts = given & ~REPORTS
    for members in ANY_OF.values():
        at = [ROWS[member] for member in members]
        best = np.where(given[at], verdict[at], -1).max(axis=0)
        decided = np.zeros(verdict.shape[1], dtype=np.bool_)
        for row in at:
            counts[row] = given[row] & (verdict[row] == best) & ~decided
            decided |= counts[row]
    worst = np.where(counts, verdict, Verdict.PASS).min(axis=0)
    return counts, worst


def conditions_of(bits: int) -> list[str]:
    """Words of the conditions held in a field of bits."""
    return [word for word, bit in CONDITIONS.items() if bits >> bit & 1] if bits else []
