"""Would a second fault, on another pole and in another item, be cleared in the required time?"""

import numpy as np

from faultloop.assessment.checks.common import COMPARISON, PREREQUISITES
from faultloop.assessment.judged import AT_MOST, Cases, Check, Judged, Standing
from faultloop.assessment.loops import Fault
from faultloop.assessment.points import (
    INSULATED,
    SEPARATED,
    Choice,
    EarthContacts,
    ExposedParts,
    Flags,
    Number,
    Points,
    Reading,
)
from faultloop.assessment.quantities import Quantities, Wanting
from faultloop.electrical.measurement import Array, Interval

REASONS = (
    *COMPARISON,
    *PREREQUISITES,
    "device-missing",
    "voltage-unknown",
    "no-required-time",
    "loop-unknown",
    "exposed-parts-unknown",
    "loop-missing",
    "apart-electrode-missing",
    "apart-without-residual-device",
    "apart-within-limit",
    "apart-over-limit",
    "apart-limit-inside-uncertainty",
    "over-limit-already",
    "no-guaranteed-current",
    "reading-over-range",
)


def _applies(points: Points, q: Quantities) -> Flags:
    """On an IT supply always, on a separated one where several items are bonded."""
    if q.separated is None:
        return np.ones(points.count, dtype=np.bool_)
    bonded = points.choice(Choice.EARTH_CONTACTS) == EarthContacts.BONDED
    applies: Flags = ~q.separated.here | (q.separated.several & bonded)
    return applies


def _judge(points: Points, q: Quantities) -> Judged:
    cases = Cases(REASONS)
    apart, here = np.zeros(points.count, np.bool_), np.zeros(points.count, np.bool_)
    loop, limit, operating, voltage = q.compared, q.loop_limit, q.operating_current, points.number(Number.VOLTAGE)
    required = q.required_s
    if q.separated is not None:
        here, supply = q.separated.here, q.separated
        loop = _where(here, supply.second_fault.compared, loop)
        limit = np.where(here, supply.limit, limit)
        operating = np.where(here, supply.operating_current, operating)
        required = np.where(here, supply.required_s, required)
        voltage = np.where(here, supply.voltage, voltage)
    if q.insulated is not None:
        apart = q.insulated.apart
        limit = np.where(q.insulated.here, q.insulated.second_limit, limit)
        voltage = np.where(q.insulated.here, q.insulated.second_v, voltage)
        _together_or_apart(cases, points, q)
    if apart.any():
        loop, limit = _by_electrode(cases, q, apart, loop, limit)
    wanting = np.where(here, Wanting.NOTHING, q.wanting)
    cases.when(wanting != Wanting.NOTHING, Standing.UNDETERMINED, PREREQUISITES[0], offset=wanting - 1)
    cases.when(points.choice(Choice.DEVICE) < 0, Standing.UNDETERMINED, "device-missing")
    cases.when(np.isnan(voltage), Standing.UNDETERMINED, "voltage-unknown")
    cases.when(here & np.isnan(required), Standing.NOT_EXAMINED, "no-required-time")
    cases.when(here & np.isnan(loop.nominal), Standing.UNDETERMINED, "loop-unknown")
    cases.when(~here & (q.loops.fault != Fault.NONE), Standing.UNDETERMINED, "loop-missing")
    cases.when(np.isinf(operating), Standing.UNDETERMINED, "no-guaranteed-current")
    open_end, within = np.isinf(loop.greatest), loop.least <= limit
    cases.when(here & open_end & within, Standing.UNDETERMINED, "loop-unknown")
    cases.when(here & open_end, Standing.UNMET, "over-limit-already")
    cases.when(open_end & within, Standing.UNDETERMINED, "reading-over-range")
    return cases.settle(loop, limit)


def _where(here: Flags, one: Interval, other: Interval) -> Interval:
    return Interval(
        np.where(here, one.least, other.least),
        np.where(here, one.greatest, other.greatest),
        np.where(here, one.nominal, other.nominal),
    )


def _together_or_apart(cases: Cases, points: Points, q: Quantities) -> None:
    """Exposed parts that have electrodes of their own need residual devices, as on TT."""
    assert q.insulated is not None
    unknown = q.insulated.here & (points.choice(Choice.EXPOSED_PARTS) == ExposedParts.UNKNOWN)
    cases.when(unknown, Standing.UNDETERMINED, "exposed-parts-unknown")
    no_device = np.isnan(points.number(Number.RESIDUAL_MA))
    cases.when(q.insulated.apart & no_device, Standing.UNDETERMINED, "apart-without-residual-device")
    unread = ~q.given.known[Reading.ELECTRODE]
    cases.when(q.insulated.apart & unread, Standing.UNDETERMINED, "apart-electrode-missing")


def _by_electrode(
    cases: Cases, q: Quantities, apart: Flags, loop: Interval, limit: Array
) -> tuple[Interval, Array]:
    """The electrode against the touch-voltage limit over the residual current, settled in its own words."""
    electrode = q.given.reading(Reading.ELECTRODE)
    most = 1000.0 * q.rule("touch_voltage") / q.given.points.number(Number.RESIDUAL_GREATEST_MA)
    cases.when(apart & (electrode.greatest <= most), Standing.MET, "apart-within-limit")
    cases.when(apart & (electrode.least > most), Standing.UNMET, "apart-over-limit")
    cases.when(apart, Standing.UNDETERMINED, "apart-limit-inside-uncertainty")
    return _where(apart, electrode, loop), np.where(apart, most, limit)


CHECK = Check(
    id="second-fault-disconnection",
    quantity="second_fault_loop_impedance_ohm",
    unit="ohm",
    sense=AT_MOST,
    reasons=REASONS,
    applies=_applies,
    judge=_judge,
    supplies=SEPARATED | INSULATED,
)
