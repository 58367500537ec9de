"""Would a second fault, on another pole and in another item, be cleared in the required time?"""

from dataclasses import dataclass

import numpy as np

from faultloop.assessment.checks.common import COMPARISON, PREREQUISITES
from faultloop.assessment.codes import INSULATED, SEPARATED, Choice, EarthContacts, ExposedParts, Number, Reading
from faultloop.assessment.judged import AT_MOST, Cases, Check, Judged, Standing
from faultloop.assessment.points import Flags, Points
from faultloop.assessment.quantities import Quantities, Wanting
from faultloop.electrical.measurement import Array, Interval, either

REASONS = (
    *COMPARISON,
    *PREREQUISITES,
    "device-missing",
    "voltage-unknown",
    "no-required-time",
    "loop-unknown",
    "exposed-parts-unknown",
    "loop-missing",
    "loop-reads-earth",
    "apart-electrode-missing",
    "apart-without-residual-device",
    "operating-time-missing",
    "device-over-time",
    "apart-within-limit",
    "apart-over-limit",
    "apart-limit-inside-uncertainty",
    "over-limit-already",
    "no-guaranteed-current",
    "reading-over-range",
    "no-trip-undecided",
)


@dataclass(frozen=True, slots=True)
class _Fault:
    """What a second fault meets, whichever kind of supply it is on."""

    here: Flags
    loop: Interval
    limit: Array
    operating: Array
    required: Array
    voltage: Array


def _applies(points: Points, q: Quantities) -> Flags:
    """On an IT supply always, on a separated one where several items are bonded."""
    if q.separated is None:
        return np.ones(points.count, dtype=np.bool_)
    bonded = (points.choice(Choice.EARTH_CONTACTS) == EarthContacts.BONDED) & ~q.separated.unbonded
    applies: Flags = ~q.separated.here | (q.separated.several & bonded)
    return applies


def _judge(points: Points, q: Quantities) -> Judged:
    cases, fault = Cases(REASONS), _fault(points, q)
    here, loop, limit = fault.here, fault.loop, fault.limit
    wanting = np.where(here, Wanting.NOTHING, q.wanting)
    cases.when(wanting != Wanting.NOTHING, Standing.UNDETERMINED, PREREQUISITES[0], offset=wanting - 1)
    if q.insulated is not None and q.insulated.apart.any():
        loop, limit = _apart(cases, points, q, loop, limit)
    if q.insulated is not None:
        _loop_of_insulated(cases, points, q)
    cases.when(points.choice(Choice.DEVICE) < 0, Standing.UNDETERMINED, "device-missing")
    cases.when(np.isnan(fault.voltage), Standing.UNDETERMINED, "voltage-unknown")
    cases.when(here & np.isnan(fault.required), Standing.NOT_EXAMINED, "no-required-time")
    cases.when(here & np.isnan(loop.nominal), Standing.UNDETERMINED, "loop-unknown")
    cases.when(np.isinf(fault.operating), Standing.UNDETERMINED, "no-guaranteed-current")
    open_end, within = np.isinf(loop.greatest), loop.least <= limit
    cases.when(here & open_end & within, Standing.UNDETERMINED, "loop-unknown")
    cases.when(here & open_end, Standing.UNMET, "over-limit-already")
    cases.when(open_end & within, Standing.UNDETERMINED, "reading-over-range")
    # Behind a first fault that stands a second one is all that is wanting.
    standing = np.zeros(points.count, np.bool_) if q.insulated is None else q.insulated.fault_standing
    cases.when(standing & (loop.least > limit), Standing.UNMET, "over-limit", defect=True)
    return cases.settle(loop, limit)


def _fault(points: Points, q: Quantities) -> _Fault:
    fault = _Fault(
        here=np.zeros(points.count, np.bool_),
        loop=q.compared,
        limit=q.loop_limit,
        operating=q.operating_current,
        required=q.required_s,
        voltage=points.number(Number.VOLTAGE),
    )
    if (it := q.insulated) is not None:
        loop, limit = either(it.here, it.second_compared, fault.loop), np.where(it.here, it.second_limit, fault.limit)
        voltage = np.where(it.here, it.second_v, fault.voltage)
        fault = _Fault(fault.here, loop, limit, fault.operating, fault.required, voltage)
    if (supply := q.separated) is not None:
        fault = _Fault(
            here=supply.here,
            loop=either(supply.here, supply.second_fault.compared, fault.loop),
            limit=np.where(supply.here, supply.limit, fault.limit),
            operating=np.where(supply.here, supply.operating_current, fault.operating),
            required=np.where(supply.here, supply.required_s, fault.required),
            voltage=np.where(supply.here, supply.voltage, fault.voltage),
        )
    return fault


def _loop_of_insulated(cases: Cases, points: Points, q: Quantities) -> None:
    """What stands against the loop of an IT supply: how its exposed parts are earthed, and how the loop was read."""
    assert q.insulated is not None
    here, known = q.insulated.here, ~np.isnan(q.insulated.second_compared.nominal)
    unknown = here & (points.choice(Choice.EXPOSED_PARTS) == ExposedParts.UNKNOWN)
    cases.when(unknown, Standing.UNDETERMINED, "exposed-parts-unknown")
    cases.when(q.insulated.loop_reads_earth, Standing.UNDETERMINED, "loop-reads-earth")
    cases.when(here & ~known, Standing.UNDETERMINED, "loop-missing")
    loop, limit = q.insulated.second_compared, q.insulated.second_limit
    undecided = q.insulated.no_trip & (loop.least <= limit) & (loop.nominal > limit)
    cases.when(undecided, Standing.UNDETERMINED, "no-trip-undecided")


def _apart(cases: Cases, points: Points, q: Quantities, loop: Interval, limit: Array) -> tuple[Interval, Array]:
    """Exposed parts with electrodes of their own need residual devices, as on TT; settled in its own words."""
    assert q.insulated is not None
    apart, device = q.insulated.apart, q.residual
    # Without a residual device the overcurrent device would have to do, which few electrodes allow.
    no_device, operating = np.isnan(points.number(Number.RESIDUAL_MA)), q.operating_current
    nothing = no_device & ~(operating < np.inf)
    cases.when(apart & nothing, Standing.UNDETERMINED, "apart-without-residual-device")
    cases.when(apart & ~q.given.known[Reading.ELECTRODE], Standing.UNDETERMINED, "apart-electrode-missing")
    cases.when(apart & device.over_limit, Standing.UNMET, "device-over-time", defect=True)
    cases.when(apart & ~no_device & ~device.tested, Standing.UNDETERMINED, "operating-time-missing")
    electrode = q.given.reading(Reading.ELECTRODE)
    residual_a = points.number(Number.RESIDUAL_GREATEST_MA) / 1000.0
    most = q.rule("touch_voltage") / np.where(no_device, operating, residual_a)
    cases.when(apart & (electrode.greatest <= most), Standing.MET, "apart-within-limit")
    cases.when(apart & (electrode.least > most), Standing.UNMET, "apart-over-limit")
    cases.when(apart, Standing.UNDETERMINED, "apart-limit-inside-uncertainty")
    return either(apart, electrode, loop), np.where(apart, most, limit)


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
