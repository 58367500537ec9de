"""The current that somebody would carry who touches one pole of a separated supply: as read, and by what drives it."""

from dataclasses import dataclass

import numpy as np

from faultloop.assessment.given import Given
from faultloop.assessment.points import Choice, EarthContacts, Flags, Number, Reading
from faultloop.electrical.measurement import Array, Interval
from faultloop.electrical.unearthed import SeparatedCircuit, single_contact_currents

MILLI, MEGA = 1e3, 1e6
POLES = (Reading.L1_CONTACT, Reading.L2_CONTACT)
SOLVED = (Number.CONTACT_LEAST_MA, Number.CONTACT_GREATEST_MA, Number.CONTACT_MA)


@dataclass(frozen=True, slots=True)
class Contact:
    """Current of a single contact [mA], of the worse pole; its greatest end is open where not all is known.

    `parted` has the same of each pole as read, and `driven` as computed: by these it is explained.
    """

    current_ma: Interval
    read: Flags
    solved: Flags
    pole_nf: Array
    driven_ma: Array


def contact(g: Given, voltage: Array) -> Contact:
    """Of each pole the higher of what was read and what was computed, of the two poles the greater.

    A network that was solved elsewhere brings its current along, and nothing is put beside it.
    """
    number, known = g.points.number, g.known[list(POLES)]
    pole_nf, complete = _capacitance(g, voltage)
    least, greatest, nominal = _driven(g, voltage, pole_nf)
    ends = np.where(complete, greatest, np.inf)
    top = np.where(known, np.fmax(g.greatest[list(POLES)], greatest), ends)
    found = (np.fmax(g.least[list(POLES)], least), top, np.fmax(g.points.value[list(POLES)], nominal))
    worse = (np.fmax(*of) for of in found)
    solved = ~np.isnan(number(Number.CONTACT_MA))
    current = (np.where(solved, number(which), of) for which, of in zip(SOLVED, worse, strict=True))
    return Contact(Interval(*current), np.logical_or(*known), solved, pole_nf, np.fmax(*nominal))


def _capacitance(g: Given, voltage: Array) -> tuple[Array, Flags]:
    """Capacitance of each pole to earth by wiring and filters [nF], and where all that drives a current is known.

    Filters end at the cases, which reach earth by earth contacts that are wired through; where those are not joined to
    earth the filters' way ends there.  A capacitance that is not known is left out, and what is left is the least.
    """
    contacts, filters = g.points.choice(Choice.EARTH_CONTACTS), g.points.number(Number.FILTERS_NF)
    cut = (contacts == EarthContacts.UNCONNECTED) | (contacts == EarthContacts.BONDED)
    filters = np.where(cut & np.isnan(filters), 0.0, filters)
    wiring = g.points.number(Number.WIRING_M) * g.rule["separation_wiring_capacitance"]
    complete = ~np.isnan(filters + wiring + voltage) & g.known[Reading.INSULATION]
    return np.nan_to_num(filters) + np.nan_to_num(wiring), complete


def _driven(g: Given, voltage: Array, pole_nf: Array) -> tuple[Array, Array, Array]:
    """Contact current of each pole (2, n) by capacitance and insulation [mA]: least, greatest, nominal."""
    number, count = g.points.number, g.points.count
    if np.isnan(voltage).all():
        nothing = np.full((2, count), np.nan)
        return nothing, nothing, nothing
    between, primary = number(Number.INTERWINDING_NF), number(Number.PRIMARY_V)
    spread = g.rule["separation_capacitance_tolerance"] / 100.0
    scale = np.concatenate([1.0 - spread, 1.0 + spread, np.ones(count)])
    # Insulation that was not read is not counted, and then nothing above the least is known.
    insulation = np.where(g.known[Reading.INSULATION], MEGA * g.least[Reading.INSULATION], np.inf)
    supply = SeparatedCircuit(
        secondary_v=np.tile(voltage, 3),
        primary_v=np.tile(np.where(np.isnan(primary), voltage, primary), 3),
        source_ohm=np.zeros(3 * count),
        frequency_hz=np.tile(number(Number.FREQUENCY_HZ), 3),
        l1_earth_nf=np.tile(pole_nf, 3) * scale,
        l2_earth_nf=np.tile(pole_nf, 3) * scale,
        interwinding_nf=np.tile(np.where(np.isnan(between), g.rule["separation_interwinding"], between), 3) * scale,
        l1_earth_ohm=np.tile(insulation, 3),
        l2_earth_ohm=np.tile(insulation, 3),
    )
    poles = MILLI * np.array(single_contact_currents(supply, np.tile(g.rule["body_dry"], 3)))
    least, greatest, nominal = poles[:, :count], poles[:, count : 2 * count], poles[:, 2 * count :]
    return least, greatest, nominal
