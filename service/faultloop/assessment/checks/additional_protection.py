"""Has the outlet the sensitive residual device that the rule set asks for?"""

import numpy as np

from faultloop.assessment.checks.common import COMPARISON, PREREQUISITES, prerequisites_are_wanting
from faultloop.assessment.codes import EARTHED, INSULATED, Choice, Feeds, Number, Role, Users
from faultloop.assessment.judged import AT_MOST, Cases, Check, Condition, Judged, Standing
from faultloop.assessment.points import Flags, Ints, Points
from faultloop.assessment.quantities import Quantities
from faultloop.electrical.measurement import Interval
from faultloop.protection.catalogue import catalogue

REASONS = (
    *COMPARISON,
    *PREREQUISITES,
    "exempt",
    "absent",
    "use-missing",
    "rated-current-missing",
    "device-over-time",
    "role-unclear",
    "device-delayed",
    "operating-time-missing",
)
_DESIGNATED, _INSTRUCTED, _SKILLED = 1, 2, 4


def _applies(points: Points, q: Quantities) -> Flags:
    feeds, rated = points.choice(Choice.FEEDS), points.number(Number.RATED_CURRENT)
    sockets = ((feeds == Feeds.SOCKET_OUTLETS) | (feeds == Feeds.UNKNOWN)) & ~(rated > q.rule("additional_sockets"))
    mobile = (feeds == Feeds.MOBILE_OUTDOORS) & ~(rated > q.rule("additional_mobile"))
    # A circuit that is said to feed sockets feeds them, whatever else it is called.
    concerned: Flags = (sockets | mobile) & ((points.choice(Choice.ROLE) != Role.DISTRIBUTION) | (feeds > 0))
    return concerned


def _exemption(points: Points, q: Quantities) -> Ints:
    """Condition bits under which the rule set exempts the outlet; 0 where it does not."""
    allowed = q.given.rule.table.exempt[points.choice(Choice.RULES)]
    users, designated = points.choice(Choice.USERS), points.choice(Choice.DESIGNATED) == 1
    supervised = (users == Users.SKILLED) & ((allowed & _SKILLED) > 0)
    supervised |= (users == Users.INSTRUCTED) & ((allowed & _INSTRUCTED) > 0)
    by_use = designated & ((allowed & _DESIGNATED) > 0)
    bits = np.where(supervised, 1 << Condition.SUPERVISION, 0) | np.where(
        by_use, 1 << Condition.DESIGNATED_EQUIPMENT, 0
    )
    # Mobile equipment outdoors has no exemption.
    return np.where(points.choice(Choice.FEEDS) == Feeds.SOCKET_OUTLETS, bits, 0).astype(np.int64)


def _judge(points: Points, q: Quantities) -> Judged:
    least, quick = points.number(Number.RESIDUAL_LEAST_MA), points.number(Number.RESIDUAL_QUICK_MA)
    limit, general = q.rule("additional_ma"), catalogue().residual_rows["general"]
    sensitive = quick <= limit
    own = (points.number(Number.RESIDUAL_MA) == quick) & (points.choice(Choice.RESIDUAL) == general)
    proven = sensitive & own & q.residual.tested & ~q.residual.over_limit
    bits = np.where(proven, 0, _exemption(points, q))
    cases = Cases(REASONS)
    prerequisites_are_wanting(cases, q, Standing.NOT_EXAMINED)
    cases.when(bits > 0, Standing.MET, "exempt")
    cases.when(sensitive & own & q.residual.over_limit, Standing.UNMET, "device-over-time", defect=True)
    cases.when(sensitive & ~proven, Standing.UNDETERMINED, "operating-time-missing")
    unclear = points.choice(Choice.ROLE) == Role.DISTRIBUTION
    cases.when(~sensitive & unclear, Standing.UNDETERMINED, "role-unclear")
    cases.when(~sensitive & (least <= limit), Standing.UNMET, "device-delayed")
    unknown_use = points.choice(Choice.FEEDS) == Feeds.UNKNOWN
    cases.when(~sensitive & unknown_use, Standing.UNDETERMINED, "use-missing")
    unrated = np.isnan(points.number(Number.RATED_CURRENT))
    cases.when(~sensitive & unrated, Standing.UNDETERMINED, "rated-current-missing")
    cases.when(np.isnan(least), Standing.UNMET, "absent")
    value = np.where(sensitive, quick, least)
    return cases.settle(Interval(value, value, value), limit, bits)


CHECK = Check(
    id="additional-protection",
    quantity="rated_residual_operating_current_ma",
    unit="mA",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
    supplies=EARTHED | INSULATED,
)
