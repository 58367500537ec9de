"""Urgency: what to see to first, by body current, time and what is left when the barrier fails."""

from dataclasses import dataclass

import numpy as np

from faultloop.assessment.points import Choice, Codes, Feeds, Flags, Ints, Number, Points
from faultloop.assessment.quantities import Quantities
from faultloop.assessment.standing import Verdict
from faultloop.electrical.body import severity_ratio
from faultloop.electrical.measurement import Array
from faultloop.protection.band import faster
from faultloop.protection.catalogue import catalogue


class Urgency(Codes):
    """Urgencies, most urgent first; none of them permits anything."""

    STOP_USE = 0
    URGENT = 1
    PLANNED = 2
    NOTE = 3
    NONE = 4


# Where the current-time curve that orders the work ends.
LONGEST_ORDERED_S = 3.0


@dataclass(frozen=True, slots=True)
class Severity:
    """Body current over its limit: with the barriers as they are, and with the residual device failed."""

    as_is: Array
    barrier_failed: Array
    time_s: Array
    body_ma: Array


def severity(points: Points, q: Quantities) -> Severity:
    """Severity at the nominal current; an untested residual device is taken to work, a failed one not."""
    outdoors = points.choice(Choice.FEEDS) == Feeds.MOBILE_OUTDOORS
    body = np.where(outdoors, q.rule("body_wet"), q.rule("body_dry"))
    credited = ~np.isnan(points.number(Number.RESIDUAL_MA)) & ~q.residual.over_limit
    # A person who touches the part closes the path, so a device that sees no metallic return still sees them.
    touched = np.fmax(q.residual.multiple_nominal, q.touch_v / body / (points.number(Number.RESIDUAL_MA) / 1000.0))
    by_band = catalogue().residual.greatest_time(points.choice(Choice.RESIDUAL), touched)
    quick = np.where(touched > q.residual.multiple_nominal, by_band, q.residual.time_s.nominal)
    residual = np.where(credited, quick, np.inf)
    # A device that nobody named is unknown, not absent: it shortens nothing and raises nothing.
    overcurrent = np.where(points.choice(Choice.DEVICE) < 0, np.nan, q.overcurrent_s.nominal)
    time = faster(overcurrent, np.where(np.isnan(overcurrent) & np.isinf(residual), np.nan, residual))
    return Severity(
        as_is=severity_ratio(q.touch_v, body, time),
        barrier_failed=severity_ratio(q.touch_v, body, overcurrent),
        time_s=time,
        body_ma=1000.0 * q.touch_v / body,
    )


def urgency(points: Points, q: Quantities, verdict: Ints, defect: Flags) -> tuple[Ints, Severity]:
    """Order the work: nothing for a pass, else by severity; a sustained current escalates one step."""
    found = severity(points, q)
    level = np.full(points.count, Urgency.PLANNED, dtype=np.int64)
    level[defect & (found.barrier_failed >= 1.0)] = Urgency.URGENT
    level[found.as_is >= 1.0] = Urgency.STOP_USE
    sustained = (found.body_ma > q.rule("sustained_ma")) & (found.time_s > LONGEST_ORDERED_S)
    level = np.where(sustained, np.maximum(level - 1, Urgency.STOP_USE), level)
    level = np.where(verdict == Verdict.PASS_WITH_CONDITIONS, Urgency.NOTE, level)
    return np.where(verdict == Verdict.PASS, Urgency.NONE, level).astype(np.int64), found
