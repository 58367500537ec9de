"""Verdicts, standings, and the one comparison of an interval with its limit."""

import numpy as np

from faultloop.assessment.codes import Codes, Decision
from faultloop.assessment.points import Ints
from faultloop.electrical.measurement import Array, Interval


class Verdict(Codes):
    """Verdicts, worst first; the last two are list entries and never a verdict."""

    FAIL = 0
    UNDETERMINED = 1
    MARGINAL = 2
    PASS_WITH_CONDITIONS = 3
    PASS = 4
    NOT_EXAMINED = 5
    NOT_APPLICABLE = 6


class Standing(Codes):
    """Why a check is, or is not, a matter of comparison."""

    COMPARED = 0
    MET = 1
    UNMET = 2
    UNDETERMINED = 3
    NOT_EXAMINED = 4
    NOT_APPLICABLE = 5


STANDING_VERDICT = np.array(
    [
        Verdict.UNDETERMINED,
        Verdict.PASS,
        Verdict.FAIL,
        Verdict.UNDETERMINED,
        Verdict.NOT_EXAMINED,
        Verdict.NOT_APPLICABLE,
    ],
    dtype=np.int64,
)


def compare(value: Interval, limit: Array, sense: Ints, decision: Ints) -> Ints:
    """Set intervals against their limits, (n,) or (K, n); sense is +1 (at most) or -1 (at least).

    `guarded`: met with the whole interval, not met with none of it, else marginal; `simple`: the nominal
    value alone.  An end left open (inf) can never meet, and is undetermined unless the other end fails.
    Anything unknown is undetermined.
    """
    over, under = value.greatest - limit, value.least - limit
    at_most = sense > 0
    endangering, favourable = np.where(at_most, over, -under), np.where(at_most, under, -over)
    nominal = sense * (value.nominal - limit)
    guarded = np.where(endangering <= 0, Verdict.PASS, np.where(favourable > 0, Verdict.FAIL, Verdict.MARGINAL))
    simple = np.where(nominal <= 0, Verdict.PASS, Verdict.FAIL)
    verdict = np.where(decision == Decision.SIMPLE, simple, guarded)
    undecided = np.isinf(endangering) & (verdict != Verdict.FAIL)
    undecided |= np.isinf(favourable) & (verdict == Verdict.MARGINAL)
    verdict = np.where(undecided, Verdict.UNDETERMINED, verdict)
    return np.where(np.isnan(endangering + favourable + nominal), Verdict.UNDETERMINED, verdict)
