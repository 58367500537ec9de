"""Can the overcurrent device break the greatest current at its board?"""

import numpy as np

from faultloop.assessment.checks.common import COMPARISON
from faultloop.assessment.codes import EARTHED, INSULATED, SEPARATED, Choice, Number, Reading
from faultloop.assessment.judged import AT_MOST, Cases, Check, Condition, Judged, Standing
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities
from faultloop.assessment.separated import Separated
from faultloop.electrical.fault_current import prospective_current
from faultloop.electrical.measurement import Array, Interval

REASONS = (
    *COMPARISON,
    "capacity-missing",
    "current-missing",
    "three-phase-current-missing",
    "outlet-current-over-capacity",
    "board-below-outlet",
    "current-over-range",
    "assembly-rating",
    "back-up-not-documented",
    "assembly-rating-exceeded",
)


def _applies(points: Points, _: Quantities) -> Flags:
    device: Flags = points.choice(Choice.DEVICE) >= 0
    return device


def _at_board(points: Points, q: Quantities) -> tuple[Interval, Flags]:
    """Prospective current at the board [kA] and whether it is known.

    Of a stated current and the loops at the board the greatest holds; a device of one pole sees the loop to earth
    as well.  A declared value governs where there is none, or where the loop's uncertainty is over half of it.
    """
    loop, declared = q.given.reading(Reading.ORIGIN_LINE_NEUTRAL), points.number(Number.DECLARED_CURRENT_KA)
    stated, earth = q.given.reading(Reading.BOARD_CURRENT), q.given.reading(Reading.BOARD_LOOP)
    voltage, c_max = points.number(Number.VOLTAGE), q.rule("c_max")
    single = points.choice(Choice.MULTIPOLE) == 0
    vague = q.given.uncertainty[Reading.ORIGIN_LINE_NEUTRAL] > loop.nominal / 2.0
    usable = single & ~np.isnan(loop.nominal) & ~(vague & ~np.isnan(declared))

    def greater(of_stated: Array, to_neutral: Array, to_earth: Array) -> Array:
        by_loop = np.where(usable, prospective_current(c_max, voltage, to_neutral) / 1000.0, np.nan)
        by_earth = np.where(single & ~q.tt, prospective_current(c_max, voltage, to_earth) / 1000.0, np.nan)
        known = np.fmax(np.fmax(of_stated, by_loop), by_earth)
        return np.where(np.isnan(known), declared, known)

    interval = Interval(
        greater(stated.least, loop.greatest, earth.greatest),
        greater(stated.greatest, loop.least, earth.least),
        greater(stated.nominal, loop.nominal, earth.nominal),
    )
    if q.separated is not None:
        interval = _behind_the_transformer(q, q.separated, interval)
    return interval, ~np.isnan(interval.nominal)


def _behind_the_transformer(q: Quantities, supply: Separated, other: Interval) -> Interval:
    """On separated supplies the current that the transformer alone lets flow [kA]."""
    ends = (supply.source.greatest, supply.source.least, supply.source.nominal)
    by_source = (prospective_current(q.rule("c_max"), supply.voltage, of) / 1000.0 for of in ends)
    others = (other.least, other.greatest, other.nominal)
    return Interval(*(np.where(supply.here, own, of) for own, of in zip(by_source, others, strict=True)))


def _judge(points: Points, q: Quantities) -> Judged:
    capacity, assembly = points.number(Number.BREAKING_CAPACITY_KA), points.number(Number.ASSEMBLY_RATING_KA)
    cases = Cases(REASONS)
    cases.when(np.isnan(capacity), Standing.NOT_EXAMINED, "capacity-missing")
    if cases.settle_everything():
        return cases.settle_unvalued()
    current, known = _at_board(points, q)
    outlet = (
        np.fmax(
            q.current.least,
            prospective_current(q.rule("c_min"), points.number(Number.VOLTAGE), q.line_neutral.hot.greatest),
        )
        / 1000.0
    )
    over = current.greatest > capacity
    beyond = outlet > capacity
    # An assembly with a rating on paper may stand behind more than the device breaks alone.
    cases.when(beyond & ~(assembly >= outlet), Standing.UNMET, "outlet-current-over-capacity")
    cases.when(beyond & ~known, Standing.UNDETERMINED, "current-missing")
    # The current at the board is at least that of an outlet behind it; no board has none.
    contradicted = known & ((outlet > current.greatest) | ~(current.greatest > 0.0))
    cases.when(contradicted, Standing.UNDETERMINED, "board-below-outlet")
    cases.when(~known & (points.choice(Choice.MULTIPOLE) == 1), Standing.NOT_EXAMINED, "three-phase-current-missing")
    cases.when(~known, Standing.NOT_EXAMINED, "current-missing")
    open_end = np.isinf(current.greatest) & (current.least <= capacity)
    cases.when(open_end, Standing.UNDETERMINED, "current-over-range")
    cases.when(over & (assembly >= current.greatest), Standing.MET, "assembly-rating")
    cases.when(over & (assembly < current.least), Standing.UNMET, "assembly-rating-exceeded")
    cases.when(over, Standing.UNDETERMINED, "back-up-not-documented")
    backed = known & over & (assembly >= current.greatest)
    bits = np.where(backed, 1 << Condition.BACK_UP_DOCUMENTED, 0)
    return cases.settle(current, capacity, bits)


CHECK = Check(
    id="breaking-capacity",
    quantity="prospective_short_circuit_current_ka",
    unit="kA",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
    supplies=EARTHED | INSULATED | SEPARATED,
)
