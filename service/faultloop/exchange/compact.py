"""Outcomes -> compact rows: verdict, urgency, what decides, and each check's verdict, value, limit and reason id."""

from typing import NamedTuple

import numpy as np

from faultloop.assessment.checks import CHECKS
from faultloop.assessment.standing import Verdict
from faultloop.assessment.urgency import Urgency
from faultloop.assessment.verdicts import Outcome
from faultloop.digests import rounded_column

CHECK_IDS = tuple(check.id for check in CHECKS)
# A check that was not examined has no verdict, only the reason.
_VERDICTS: dict[int, str | None] = {code: word for word, code in Verdict.codes().items() if code <= Verdict.PASS}
_VERDICTS |= {Verdict.NOT_EXAMINED: None, Verdict.NOT_APPLICABLE: None}
_URGENCIES = {code: word for word, code in Urgency.codes().items()}

Finding = tuple[str | None, float | None, float | None, str | None]


class Compact(NamedTuple):
    """One point: `findings` holds one entry a check, in the order of CHECK_IDS; None where it does not apply."""

    verdict: str
    urgency: str
    decided_by: str | None
    findings: tuple[Finding | None, ...]


def compact(outcome: Outcome) -> list[Compact]:
    """Turn the outcome of n points to n compact rows; no sentence is made."""
    found = outcome.findings
    findings = zip(*(_column(outcome, row) for row in range(len(CHECKS))), strict=True)
    decides = found.counts & (found.verdict == outcome.verdict)
    by = np.where(decides.any(axis=0), decides.argmax(axis=0), len(CHECKS)).tolist()
    names = (*CHECK_IDS, None)
    verdicts = map(_VERDICTS.__getitem__, outcome.verdict.tolist())
    urgencies = map(_URGENCIES.__getitem__, outcome.urgency.tolist())
    columns = zip(verdicts, urgencies, map(names.__getitem__, by), findings, strict=True)
    return list(map(Compact._make, columns))


def _column(outcome: Outcome, row: int) -> list[Finding | None]:
    """One check's findings at every point."""
    found, count = outcome.findings, outcome.verdict.shape[0]
    verdict = found.verdict[row]
    if (verdict == Verdict.NOT_APPLICABLE).all():
        return [None] * count
    examined = verdict < Verdict.NOT_EXAMINED
    if not examined.any() and (verdict == verdict[0]).all() and (found.reason[row] == found.reason[row][0]).all():
        return [(None, None, None, CHECKS[row].reasons[found.reason[row][0]])] * count
    value, limit = (rounded_column(np.where(examined, of[row], np.nan)) for of in (found.nominal, found.limit))
    words = map(_VERDICTS.__getitem__, verdict.tolist())
    reasons = map(CHECKS[row].reasons.__getitem__, found.reason[row].tolist())
    told: list[Finding | None] = list(zip(words, value, limit, reasons, strict=True))
    for at in np.flatnonzero(verdict == Verdict.NOT_APPLICABLE).tolist():
        told[at] = None
    return told
