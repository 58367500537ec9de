"""What a separated supply would do: its source, a fault pole to pole, two faults, a contact, what stays charged."""

from dataclasses import dataclass

import numpy as np

from faultloop.assessment.contact import Contact, contact
from faultloop.assessment.given import Given
from faultloop.assessment.points import Bound, Choice, EarthContacts, Earthing, Flags, Number, Reading, Reference
from faultloop.assessment.policies import by_policy, limit_factor
from faultloop.assessment.rule_table import final_time
from faultloop.electrical.body import discharge_time, stored_energy
from faultloop.electrical.conductors import resistance
from faultloop.electrical.fault_current import prospective_current
from faultloop.electrical.measurement import Array, Interval
from faultloop.electrical.sources import transformer_impedance


@dataclass(frozen=True, slots=True)
class Fault:
    """A fault on a separated supply: its hot loop and the one that the policy compares [Ω], and its current [A]."""

    hot: Interval
    compared: Interval
    current: Interval


@dataclass(frozen=True, slots=True)
class Separated:
    """Quantities of n separated supplies; nan where unknown.

    `several` marks more than one item with exposed parts, `joined` a live part that is shown to be joined to earth.
    """

    here: Flags
    voltage: Array
    required_s: Array
    source: Interval
    operating_current: Array
    limit: Array
    pole_to_pole: Fault
    second_fault: Fault
    wiring_ohm: Array
    conductors_ohm: Array
    class_i: Array
    several: Flags
    unbonded: Flags
    contact: Contact
    pole_at_earth: Flags
    joined: Flags
    stored_j: Array
    discharge_s: Array


def separated(g: Given, factor: Array) -> Separated:
    """Compute what the checks of n separated supplies share."""
    points, number = g.points, g.points.number
    here = points.choice(Choice.EARTHING) == Earthing.SEPARATED
    voltage = np.where(here, number(Number.BETWEEN_LINES_V), np.nan)
    # The time is that of a final circuit by the voltage that two faults put between two cases.
    required = final_time(points, g.rule, voltage, np.zeros(points.count, np.bool_))
    operating = points.overcurrent.operating_current(points.choice(Choice.DEVICE), required)
    source, wiring, cold = _source(g, voltage), _wiring(g), np.ones(points.count)
    both = _cores(g, wiring)
    at_earth = _pole_at_earth(g, voltage)
    joined = (points.choice(Choice.REFERENCE) == Reference.EARTHED) | at_earth
    joined |= points.bound[Reading.LOOP] == Bound.EXACT
    found = contact(g, voltage, joined)
    class_i = _class_i(g)
    several = here & (class_i > 1.0)
    stored = (number(Number.STORED_UF), number(Number.STORED_V))
    return Separated(
        here=here,
        voltage=voltage,
        required_s=required,
        source=source,
        operating_current=operating,
        limit=np.where(np.isinf(operating), np.nan, prospective_current(limit_factor(g), voltage, operating)),
        pole_to_pole=_pole_to_pole(g, voltage, source, wiring, factor),
        second_fault=_fault(g, voltage, _added(source, both, factor), _added(source, both, cold), source.least),
        wiring_ohm=wiring,
        conductors_ohm=both.nominal,
        class_i=class_i,
        several=several,
        unbonded=several & (points.choice(Choice.EARTH_CONTACTS) == EarthContacts.UNCONNECTED),
        contact=found,
        pole_at_earth=at_earth,
        joined=here & (joined | (found.current_ma.least > g.rule["separation_contact_referenced"])),
        stored_j=stored_energy(*stored),
        discharge_s=discharge_time(*stored, number(Number.DISCHARGE_OHM), g.rule["separation_discharged"]),
    )


def _class_i(g: Given) -> Array:
    """Items with exposed parts; where their class is not told, every item counts as one."""
    stated, items = g.points.number(Number.CLASS_I_ITEMS), g.points.number(Number.ITEMS)
    return np.where(np.isnan(stated), items, stated)


def _source(g: Given, voltage: Array) -> Interval:
    """The transformer's impedance; the tolerance of its short-circuit voltage is what is uncertain of a stated one."""
    number = g.points.number
    impedance = transformer_impedance(number(Number.TRANSFORMER_VA), voltage, number(Number.SHORT_CIRCUIT_PERCENT))
    stated = number(Number.SHORT_CIRCUIT_TOLERANCE)
    percent = np.where(np.isnan(stated), g.rule["separation_short_circuit_tolerance"], stated) * g.points.coverage
    spread = impedance * percent / 100.0
    return Interval(np.maximum(impedance - spread, 0.0), impedance + spread, impedance)


def _wiring(g: Given) -> Array:
    """Both conductors from the transformer to the outlets, cold; none where no wiring is stated, which is said."""
    length, per_km = g.points.number(Number.LENGTH_M), g.points.number(Number.LINE_OHM_PER_KM)
    return np.where(np.isnan(length), 0.0, 2.0 * resistance(per_km, length))


def _cores(g: Given, wiring: Array) -> Interval:
    """Wiring, leads and bonding of two faults, cold; open above where one of them is not known."""
    leads, bonding = g.points.number(Number.LEADS_OHM), g.reading(Reading.BONDING)
    stated = np.nan_to_num(np.fmax(leads, g.points.number(Number.LEADS_LEAST_OHM))) + np.nan_to_num(wiring)
    whole = ~np.isnan(leads + wiring + bonding.nominal)
    return Interval(
        stated + np.nan_to_num(bonding.least),
        np.where(whole, stated + bonding.greatest, np.inf),
        stated + np.nan_to_num(bonding.nominal),
    )


def _added(source: Interval, cold: Interval, factor: Array) -> Interval:
    """Source and conductors, hot by a factor, added by size, which no angle between them can exceed."""
    return Interval(
        source.least + cold.least * factor,
        source.greatest + cold.greatest * factor,
        source.nominal + cold.nominal * factor,
    )


def _pole_to_pole(g: Given, voltage: Array, source: Interval, wiring: Array, factor: Array) -> Fault:
    """The loop from pole to pole as read at the outlet, else by source and wiring."""
    read, known = g.reading(Reading.LINE_LINE), g.known[Reading.LINE_LINE]
    made = Interval(wiring, wiring, wiring)

    def heated(by: Array) -> Interval:
        parts = _added(source, made, by)
        return Interval(
            np.where(known, read.least * by, parts.least),
            np.where(known, read.greatest * by, parts.greatest),
            np.where(known, read.nominal * by, parts.nominal),
        )

    return _fault(g, voltage, heated(factor), heated(np.ones_like(factor)), np.where(known, read.least, source.least))


def _fault(g: Given, voltage: Array, hot: Interval, cold: Interval, cold_least: Array) -> Fault:
    """Least and nominal current by the hot loop; the greatest by the source alone, which no conductor raises."""
    c_min = g.rule["c_min"]
    current = Interval(
        prospective_current(c_min, voltage, hot.greatest),
        prospective_current(g.rule["c_max"], voltage, cold_least),
        prospective_current(c_min, voltage, hot.nominal),
    )
    return Fault(hot, by_policy(g.points, hot, cold), current)


def _pole_at_earth(g: Given, voltage: Array) -> Flags:
    """Where one pole stands at earth by the voltmeter and the other at the whole voltage."""
    read = (g.reading(Reading.L1_EARTH_VOLTAGE), g.reading(Reading.L2_EARTH_VOLTAGE))
    near, whole = g.rule["separation_pole_at_earth"], 100.0 - g.rule["voltage_tolerance"]
    one, other = (100.0 * of.nominal / voltage for of in read)
    found: Flags = ((one <= near) & (other >= whole)) | ((other <= near) & (one >= whole))
    return found
