"""What an IT supply would do: the current and the touch voltage of a first fault, and who touches a line."""

from dataclasses import dataclass

import numpy as np

from faultloop.assessment.given import Given
from faultloop.assessment.points import Choice, Distributed, Earthing, ExposedParts, Flags, Number, Reading
from faultloop.electrical.circuit_supplies import InsulatedSupply, current_to_earth
from faultloop.electrical.fault_current import prospective_current
from faultloop.electrical.measurement import Array, Interval

MILLI = 1e3


@dataclass(frozen=True, slots=True)
class Insulated:
    """Quantities of n IT supplies; nan where unknown.

    `first_fault_ma` and the touch voltage that it makes at the electrode, current of a contact with one line, and the
    limit of the loop of a second fault.
    """

    here: Flags
    apart: Flags
    first_fault_ma: Interval
    touch_v: Interval
    contact_ma: Array
    second_v: Array
    second_limit: Array
    second_fault_a: Interval


def insulated(g: Given, operating: Array, hot: Interval, cold: Interval) -> Insulated:
    """Compute what the checks of n IT supplies share."""
    points, number = g.points, g.points.number
    here = points.choice(Choice.EARTHING) == Earthing.IT
    apart = here & (points.choice(Choice.EXPOSED_PARTS) == ExposedParts.SEPARATELY)
    fault, touched = _currents(g, here)
    read, electrode = g.reading(Reading.FIRST_FAULT), g.reading(Reading.ELECTRODE)
    # What was read and what the capacitances drive are both believed, and the higher decides.
    current = Interval(
        np.fmax(read.least, fault.least), np.fmax(read.greatest, fault.greatest), np.fmax(read.nominal, fault.nominal)
    )
    # A line that is held to earth by an electrode brings no more to it than its own voltage.
    line = g.rule["c_max"] * number(Number.VOLTAGE)
    touch = Interval(
        np.fmin(current.least * electrode.least / MILLI, line),
        np.fmin(current.greatest * electrode.greatest / MILLI, line),
        np.fmin(current.nominal * electrode.nominal / MILLI, line),
    )
    # Two faults share the loop: without a neutral between two lines, with one between line and neutral.
    with_neutral = points.choice(Choice.NEUTRAL_DISTRIBUTED) != Distributed.NO
    between = np.where(points.choice(Choice.PHASES) == 1, number(Number.VOLTAGE), number(Number.BETWEEN_LINES_V))
    voltage = np.where(with_neutral, number(Number.VOLTAGE), between)
    c_min, limit = g.rule["c_min"], prospective_current(g.rule["c_min"], voltage, 2.0 * operating)
    second = Interval(
        prospective_current(c_min, voltage, 2.0 * hot.greatest),
        prospective_current(g.rule["c_max"], voltage, 2.0 * cold.least),
        prospective_current(c_min, voltage, 2.0 * hot.nominal),
    )
    limit = np.where(np.isinf(operating), np.nan, limit)
    return Insulated(here, apart, current, touch, touched, voltage, limit, second)


def _currents(g: Given, here: Flags) -> tuple[Interval, Array]:
    """First fault into the electrode, least to greatest by the tolerance of capacitances, and a contact [mA]."""
    points, number, count = g.points, g.points.number, g.points.count
    line = np.where(here, number(Number.LINE_EARTH_NF), np.nan)
    if np.isnan(line).all():
        nothing = np.full(count, np.nan)
        return Interval(nothing, nothing, nothing), nothing
    phases = points.choice(Choice.PHASES).astype(np.float64)
    spread = g.rule["separation_capacitance_tolerance"] / 100.0
    scale = np.concatenate([1.0 - spread, 1.0 + spread, np.ones(2 * count)])
    # On one phase the neutral is the other live conductor; one that nobody spoke of is counted.
    neutral = (points.choice(Choice.NEUTRAL_DISTRIBUTED) != Distributed.NO) | (phases == 1.0)
    supply = InsulatedSupply(
        voltage_v=np.tile(number(Number.VOLTAGE), 4),
        lines=np.tile(np.where(phases == 0.0, np.nan, phases), 4),
        frequency_hz=np.tile(number(Number.FREQUENCY_HZ), 4),
        line_earth_nf=np.tile(line, 4) * scale,
        neutral_earth_nf=np.tile(np.where(neutral, line, 0.0), 4) * scale,
    )
    electrode = g.reading(Reading.ELECTRODE)
    # Paired as the touch voltage wants them: the least current into the least electrode.
    path = np.concatenate([electrode.least, electrode.greatest, electrode.nominal, g.rule["body_dry"]])
    by = MILLI * current_to_earth(supply, path)
    least, greatest, nominal, touched = (by[at * count : (at + 1) * count] for at in range(4))
    return Interval(least, greatest, nominal), touched
