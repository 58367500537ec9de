"""Does the separated supply feed one item, or several whose exposed parts are bonded to each other and not to earth?"""

import numpy as np

from faultloop.assessment.codes import SEPARATED, Choice, EarthContacts, Number
from faultloop.assessment.judged import AT_MOST, Cases, Check, Condition, Judged, Standing
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities
from faultloop.electrical.measurement import Interval

REASONS = (
    "earth-contacts-earthed",
    "extra-low-voltage",
    "items-unknown",
    "earth-contacts-unknown",
    "not-bonded",
    "bonding-unknown",
    "several-bonded",
    "several-without-exposed-parts",
    "one-of-several-outlets",
    "one-item",
)


def _applies(points: Points, _: Quantities) -> Flags:
    return np.ones(points.count, dtype=np.bool_)


def _judge(points: Points, q: Quantities) -> Judged:
    found = q.separated
    assert found is not None
    items, contacts = points.number(Number.ITEMS), points.choice(Choice.EARTH_CONTACTS)
    more, single = items > 1.0, points.number(Number.OUTLETS) <= 1.0
    bonded, unknown = contacts == EarthContacts.BONDED, contacts == EarthContacts.UNKNOWN
    cases = Cases(REASONS)
    cases.when(contacts == EarthContacts.EARTHED, Standing.UNMET, "earth-contacts-earthed", defect=True)
    cases.when(found.extra_low, Standing.NOT_EXAMINED, "extra-low-voltage")
    cases.when(np.isnan(items), Standing.UNDETERMINED, "items-unknown")
    cases.when(found.unbonded, Standing.UNMET, "not-bonded", defect=True)
    cases.when(found.several & unknown, Standing.UNDETERMINED, "bonding-unknown")
    cases.when(found.several & bonded, Standing.MET, "several-bonded")
    # Earth contacts that nobody looked at are the usual hidden way to earth.
    cases.when(unknown & (found.class_i > 0.0), Standing.UNDETERMINED, "earth-contacts-unknown")
    cases.when(more, Standing.MET, "several-without-exposed-parts")
    cases.when(~single, Standing.MET, "one-of-several-outlets")
    cases.when(np.ones(points.count, np.bool_), Standing.MET, "one-item")
    bits = np.where(more, 1 << Condition.SUPERVISION, np.where(single, 0, 1 << Condition.ONE_ITEM_AT_A_TIME))
    return cases.settle(Interval(items, items, items), np.ones(points.count), bits)


CHECK = Check(
    id="separated-items",
    quantity="items",
    unit="1",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
    supplies=SEPARATED,
)
