"""What a separated supply would do: its source, a fault pole to pole, two faults, a contact, what stays charged."""

from dataclasses import dataclass

import numpy as np

from faultloop.assessment.codes import Bound, Choice, EarthContacts, Earthing, Number, Reading, Reference
from faultloop.assessment.contact import Contact, contact
from faultloop.assessment.given import Given
from faultloop.assessment.points import Flags
from faultloop.assessment.policies import by_policy, limit_factor
from faultloop.assessment.rule_table import final_time
from faultloop.electrical.body import discharge_time, stored_energy
from faultloop.electrical.conductors import resistance
from faultloop.electrical.fault_current import prospective_current
from faultloop.electrical.measurement import Array, Interval, higher
from faultloop.electrical.sources import transformer_impedance

MILLI, MEGA = 1e3, 1e6


@dataclass(frozen=True, slots=True)
class FaultPath:
    """The loop of a fault on a separated supply: hot, and as the policy compares it [Ω]; and its current [A]."""

    hot: Interval
    compared: Interval
    current: Interval


@dataclass(frozen=True, slots=True)
class Joined:
    """By what a live part is shown to be joined to earth; `shown` by any, `whole` before a contact is looked at."""

    whole: Flags
    shown: Flags
    pole_at_earth: Flags
    by_loop: Flags
    by_insulation: Flags
    by_windings: Flags


@dataclass(frozen=True, slots=True)
class Separated:
    """Quantities of n separated supplies; nan where unknown.

    `several` marks more than one item with exposed parts, `unbonded` several that nothing bonds to each other.
    """

    here: Flags
    voltage: Array
    extra_low: Flags
    required_s: Array
    source: Interval
    operating_current: Array
    limit: Array
    pole_to_pole: FaultPath
    second_fault: FaultPath
    outlet_contradicts: Flags
    wiring_ohm: Array
    conductors_ohm: Array
    class_i: Array
    several: Flags
    unbonded: Flags
    contact: Contact
    joined: Joined
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
    limit = prospective_current(limit_factor(g), voltage, operating)
    source, wiring = _source(g, voltage), _wiring(g)
    read, extra = g.reading(Reading.LINE_LINE), _leads_and_bonding(g)

    def outlet(by: Array) -> Interval:
        return higher(_added(source, wiring, by), _added(_nothing(voltage), read, by))

    def both(by: Array) -> Interval:
        return _added(outlet(by), extra, by)

    cold = np.ones(points.count)
    least = np.fmax(source.least, read.least)
    class_i = _class_i(g)
    several = here & (class_i > 1.0)
    joined = _joined(g, here, voltage)
    found = contact(g, voltage, joined.whole)
    by_contact = here & (found.current_ma.least > g.rule["separation_contact_referenced"])
    stored = (number(Number.STORED_UF), number(Number.STORED_V))
    return Separated(
        here=here,
        voltage=voltage,
        extra_low=voltage <= g.rule["touch_voltage"],
        required_s=required,
        source=source,
        operating_current=operating,
        limit=np.where(np.isinf(operating), np.nan, limit),
        pole_to_pole=_path(g, voltage, outlet(factor), outlet(cold), least),
        second_fault=_path(g, voltage, both(factor), both(cold), least),
        # No outlet has less than the transformer that feeds it.
        outlet_contradicts=here & (read.greatest < source.least),
        wiring_ohm=wiring.nominal,
        conductors_ohm=wiring.nominal + extra.nominal,
        class_i=class_i,
        several=several,
        unbonded=several & _unbonded(g),
        contact=found,
        joined=_with_contact(joined, by_contact),
        stored_j=stored_energy(*stored),
        discharge_s=discharge_time(*stored, number(Number.DISCHARGE_OHM), g.rule["separation_discharged"]),
    )


def _class_i(g: Given) -> Array:
    """Items with exposed parts; where their class is not told, every item counts as one."""
    stated, items = g.points.number(Number.CLASS_I_ITEMS), g.points.number(Number.ITEMS)
    return np.where(np.isnan(stated), items, stated)


def _unbonded(g: Given) -> Flags:
    """Where earth contacts are joined to nothing, or what is to bond them reads as if it were not there."""
    contacts = g.points.choice(Choice.EARTH_CONTACTS)
    open_bond = g.reading(Reading.BONDING).least > g.rule["tn_loop"]
    bonded = contacts == EarthContacts.BONDED
    unbonded: Flags = (contacts == EarthContacts.UNCONNECTED) | (bonded & open_bond)
    return unbonded


def _source(g: Given, voltage: Array) -> Interval:
    """The transformer's impedance with the network ahead of it as the secondary sees it.

    The tolerance of its short-circuit voltage is what is uncertain of a stated one.  A network that is not stated
    counts as none beside a transformer that decides by itself, and leaves the loop of any other open.
    """
    number = g.points.number
    impedance = transformer_impedance(number(Number.TRANSFORMER_VA), voltage, number(Number.SHORT_CIRCUIT_PERCENT))
    stated = number(Number.SHORT_CIRCUIT_TOLERANCE)
    percent = np.where(np.isnan(stated), g.rule["separation_short_circuit_tolerance"], stated) * g.points.coverage
    spread = impedance * percent / 100.0
    ratio, ahead = voltage / number(Number.PRIMARY_V), g.reading(Reading.ORIGIN_LINE_NEUTRAL)
    square = np.where(np.isnan(ratio), 1.0, ratio * ratio)
    unknown = ~g.known[Reading.ORIGIN_LINE_NEUTRAL] & (impedance < g.rule["separation_source_decides"])
    greatest = impedance + spread + np.nan_to_num(ahead.greatest * square)
    return Interval(
        np.maximum(impedance - spread, 0.0) + np.nan_to_num(ahead.least * square),
        np.where(unknown, np.inf, greatest),
        impedance + np.nan_to_num(ahead.nominal * square),
    )


def _wiring(g: Given) -> Interval:
    """Both conductors from the transformer to the outlets, cold; none where no wiring is stated, which is said.

    Wiring of a conductor that is not stated leaves the loop open above.
    """
    length, per_km = g.points.number(Number.LENGTH_M), g.points.number(Number.LINE_OHM_PER_KM)
    both = np.where(np.isnan(length), 0.0, 2.0 * resistance(per_km, length))
    counted = np.nan_to_num(both)
    return Interval(counted, np.where(np.isnan(both), np.inf, both), counted)


def _nothing(like: Array) -> Interval:
    none = np.zeros_like(like)
    return Interval(none, none, none)


def _leads_and_bonding(g: Given) -> Interval:
    """Leads of the two items in fault and the bonding between them, cold; open above where one of them is not known."""
    leads, bonding = g.points.number(Number.LEADS_OHM), g.reading(Reading.BONDING)
    stated = np.nan_to_num(np.fmax(leads, g.points.number(Number.LEADS_LEAST_OHM)))
    return Interval(
        stated + np.nan_to_num(bonding.least),
        np.where(np.isnan(leads + bonding.nominal), np.inf, stated + bonding.greatest),
        stated + np.nan_to_num(bonding.nominal),
    )


def _added(source: Interval, cold: Interval, factor: Array) -> Interval:
    """Source and conductors, hot by a factor, added by size, which no angle between them can exceed."""
    return Interval(
        source.least + cold.least * factor,
        source.greatest + cold.greatest * factor,
        source.nominal + cold.nominal * factor,
    )


def _path(g: Given, voltage: Array, hot: Interval, cold: Interval, least: Array) -> FaultPath:
    """Least and nominal current by the hot loop; the greatest by the least that feeds it, which no conductor raises."""
    c_min = g.rule["c_min"]
    current = Interval(
        prospective_current(c_min, voltage, hot.greatest),
        prospective_current(g.rule["c_max"], voltage, least),
        prospective_current(c_min, voltage, hot.nominal),
    )
    return FaultPath(hot, by_policy(g.points, hot, cold), current)


def _joined(g: Given, here: Flags, voltage: Array) -> Joined:
    """What shows that a live part is joined to earth, before a contact is looked at."""
    bound = g.points.bound[Reading.LOOP]
    # Between a pole and earth of a floating supply a loop tester finds nothing to read.
    by_loop = here & ((bound == Bound.EXACT) | (bound == Bound.BELOW))
    at_earth = here & _pole_at_earth(g, voltage)
    by_insulation, by_windings = (
        here & _conducts(g, which, voltage) for which in (Reading.INSULATION, Reading.WINDING_INSULATION)
    )
    stated = here & (g.points.choice(Choice.REFERENCE) == Reference.EARTHED)
    whole: Flags = stated | at_earth | by_loop | by_insulation | by_windings
    return Joined(whole, whole, at_earth, by_loop, by_insulation, by_windings)


def _with_contact(joined: Joined, by_contact: Flags) -> Joined:
    shown = joined.whole | by_contact
    return Joined(
        joined.whole, shown, joined.pole_at_earth, joined.by_loop, joined.by_insulation, joined.by_windings
    )


def _conducts(g: Given, which: int, voltage: Array) -> Flags:
    """Where a reading of insulation lets the current through from which a pole counts as joined to earth."""
    most = voltage / (g.rule["separation_contact_referenced"] / MILLI)
    ohm = MEGA * g.reading(which).greatest
    return np.asarray((ohm < most) | (ohm <= 0.0), np.bool_)


def _pole_at_earth(g: Given, voltage: Array) -> Flags:
    """Where one pole stands at earth by the voltmeter and the other at the whole voltage."""
    read = (g.reading(Reading.L1_EARTH_VOLTAGE), g.reading(Reading.L2_EARTH_VOLTAGE))
    near, whole = g.rule["separation_pole_at_earth"], 100.0 - 2.0 * g.rule["voltage_tolerance"]
    one, other = (100.0 * of.nominal / voltage for of in read)
    found: Flags = ((one <= near) & (other >= whole)) | ((other <= near) & (one >= whole))
    return found
