"""How severe a fault would be: body current over the current-time curve, to order work by."""

from dataclasses import dataclass

import numpy as np

from faultloop.assessment.codes import Choice, Feeds, Number
from faultloop.assessment.given import Given
from faultloop.assessment.insulated import Insulated
from faultloop.assessment.points import Flags
from faultloop.assessment.residual_times import ResidualTimes
from faultloop.assessment.separated import Separated
from faultloop.electrical.body import severity_ratio
from faultloop.electrical.measurement import Array, Interval
from faultloop.protection.band import faster
from faultloop.protection.catalogue import catalogue


@dataclass(frozen=True, slots=True)
class Severity:
    """Body current over its limit: with the barriers as they are, and with the residual device failed."""

    as_is: Array
    barrier_failed: Array
    time_s: Array
    touch_v: Array
    body_ohm: Array
    body_ma: Array


def severity(g: Given, touch_v: Array, overcurrent_s: Interval, device: ResidualTimes) -> Severity:
    """Severity at the nominal current; an untested residual device is taken to work, a failed one not."""
    points = g.points
    # Without a means of earthing exposed parts take the whole voltage, and no overcurrent flows.
    touch_v = np.where(g.earth_lost, points.number(Number.VOLTAGE), touch_v)
    outdoors = points.choice(Choice.FEEDS) == Feeds.MOBILE_OUTDOORS
    body = np.where(outdoors, g.rule["body_wet"], g.rule["body_dry"])
    credited = ~np.isnan(points.number(Number.RESIDUAL_MA)) & ~device.over_limit
    # A person who touches the part closes the path, so a device that sees no metallic return still sees them.
    metallic = np.where(g.earth_lost, 0.0, device.multiple_nominal)
    touched = np.fmax(metallic, touch_v / body / (points.number(Number.RESIDUAL_MA) / 1000.0))
    by_band = catalogue().residual.greatest_time(points.choice(Choice.RESIDUAL), touched)
    quick = np.where((touched > device.multiple_nominal) | g.earth_lost, by_band, device.time_s.nominal)
    residual = np.where(credited, quick, np.inf)
    # A device that nobody named is unknown, not absent: it shortens nothing and raises nothing.
    overcurrent = np.where(points.choice(Choice.DEVICE) < 0, np.nan, overcurrent_s.nominal)
    overcurrent = np.where(g.earth_lost, np.inf, overcurrent)
    time = faster(overcurrent, np.where(np.isnan(overcurrent) & np.isinf(residual), np.nan, residual))
    return Severity(
        as_is=severity_ratio(touch_v, body, time),
        barrier_failed=severity_ratio(touch_v, body, overcurrent),
        time_s=time,
        touch_v=touch_v,
        body_ohm=body,
        body_ma=1000.0 * touch_v / body,
    )


def of_separated(found: Severity, g: Given, supply: Separated) -> Severity:
    """Severity on separated supplies: the whole voltage where it stands between cases or to earth, else a contact.

    Nothing interrupts a contact; two faults behind one another leave the whole voltage.
    """
    body = g.rule["body_dry"]
    # A voltage that nobody stated may be any.
    voltage = np.where(np.isnan(supply.voltage), np.inf, supply.voltage)
    whole = supply.joined.shown | supply.unbonded
    felt = np.nan_to_num(supply.contact.current_ma.nominal) / 1000.0 * body
    # Extra-low voltage is not ordered by what it is not judged by.
    standing = np.where(supply.extra_low, 0.0, np.where(whole, voltage, felt))
    return _without_end(found, supply.here, standing, voltage, body)


def of_insulated(found: Severity, g: Given, supply: Insulated) -> Severity:
    """Severity on IT supplies: what a first fault leaves on exposed parts, and behind it the whole voltage."""
    body, voltage = g.rule["body_dry"], g.points.number(Number.VOLTAGE)
    voltage = np.where(np.isnan(voltage), np.inf, voltage)
    standing = np.where(g.earth_lost, voltage, np.nan_to_num(supply.touch_v.nominal))
    return _without_end(found, supply.here, standing, voltage, body)


def _without_end(found: Severity, here: Flags, standing_v: Array, behind_v: Array, body: Array) -> Severity:
    endless = np.full(here.shape, np.inf)
    parts = {
        "as_is": severity_ratio(standing_v, body, endless),
        "barrier_failed": severity_ratio(behind_v, body, endless),
        "time_s": endless,
        "touch_v": standing_v,
        "body_ohm": body,
        "body_ma": 1000.0 * standing_v / body,
    }
    return Severity(**{name: np.where(here, part, getattr(found, name)) for name, part in parts.items()})
