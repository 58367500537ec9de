"""The current that somebody would carry who touches one pole of a separated supply: as read, and by what drives it."""

from dataclasses import dataclass

import numpy as np

from faultloop.assessment.codes import Choice, EarthContacts, Number, Reading
from faultloop.assessment.given import Given
from faultloop.assessment.points import Flags
from faultloop.electrical.circuit_supplies import SeparatedCircuit, single_contact_currents
from faultloop.electrical.measurement import Array, Interval

MILLI, MEGA = 1e3, 1e6
POLES = [Reading.L1_CONTACT, Reading.L2_CONTACT]
SOLVED = (Number.CONTACT_LEAST_MA, Number.CONTACT_GREATEST_MA, Number.CONTACT_MA)


@dataclass(frozen=True, slots=True)
class Driven:
    """Contact current (2, n) of the poles [mA] by capacitance and insulation.

    `least`, `stated` and `stated_most` count what was stated alone; `nominal` and `greatest` wiring and windings too.
    """

    least: Array
    stated: Array
    stated_most: Array
    nominal: Array
    greatest: Array


@dataclass(frozen=True, slots=True)
class Contact:
    """Current of a single contact [mA], of the worse pole; its greatest end is open where not all is known.

    `stated_nf` and `pole_nf` are what of each pole's capacitance to earth was stated, and all of it with the wiring.
    """

    current_ma: Interval
    read: Flags
    every_pole_read: Flags
    solved: Flags
    stated_nf: Array
    pole_nf: Array
    driven: Driven


def contact(g: Given, voltage: Array, joined: Flags) -> Contact:
    """Of each pole the higher of what was read and what the stated capacitance drives, else all that may drive it.

    Of the two poles the greater counts; with one pole joined to earth the other has the whole voltage.  A network that
    was solved elsewhere brings its current along, and nothing is put beside it.
    """
    known, solved = g.known[POLES], ~np.isnan(g.points.number(Number.CONTACT_MA))
    stated, pole_nf, complete = _capacitance(g, voltage)
    driven = _driven(g, voltage, stated, pole_nf)
    least = np.fmax(g.least[POLES], driven.least)
    greatest = np.fmax(g.greatest[POLES], driven.stated_most)
    greatest = np.where(known, greatest, np.where(complete, driven.greatest, np.inf))
    nominal = np.where(known, np.fmax(g.points.value[POLES], driven.stated), driven.nominal)
    whole = MILLI * voltage / g.rule["body_dry"]
    worse = (np.where(joined, whole, np.fmax(*of)) for of in (least, greatest, nominal))
    ends = (np.where(solved, g.points.number(which), of) for which, of in zip(SOLVED, worse, strict=True))
    every = np.logical_and(*known)
    return Contact(Interval(*ends), np.logical_or(*known), every, solved, stated, pole_nf, driven)


def _capacitance(g: Given, voltage: Array) -> tuple[Array, Array, Flags]:
    """Capacitance of each pole to earth [nF], by filters alone and with the wiring; and whether all of it is known.

    Filters end at the cases, which reach earth by earth contacts that are wired through; where those are not joined to
    earth the filters' way ends there.  A capacitance that is not known is left out, and what is left is the least.
    """
    contacts, filters = g.points.choice(Choice.EARTH_CONTACTS), g.points.number(Number.FILTERS_NF)
    cut = (contacts == EarthContacts.UNCONNECTED) | (contacts == EarthContacts.BONDED)
    least = np.where(cut, 0.0, np.fmax(filters, g.points.number(Number.FILTERS_LEAST_NF)))
    filters = np.where(cut, 0.0, filters)
    wiring = g.points.number(Number.WIRING_M) * g.rule["separation_wiring_capacitance"]
    complete = ~np.isnan(filters + wiring + voltage) & g.known[Reading.INSULATION]
    stated = np.nan_to_num(least)
    return stated, stated + np.nan_to_num(wiring), complete


def _driven(g: Given, voltage: Array, stated: Array, pole_nf: Array) -> Driven:
    number, count = g.points.number, g.points.count
    # What was read of every pole or solved elsewhere is not computed beside, unless capacitance was stated.
    told = np.logical_and(*g.known[POLES]) & (stated == 0.0) | ~np.isnan(number(Number.CONTACT_MA)) | np.isnan(voltage)
    if told.all():
        zero, nothing = np.zeros((2, count)), np.full((2, count), np.nan)
        return Driven(zero, zero, zero, nothing, nothing)
    spread, one = g.rule["separation_capacitance_tolerance"] / 100.0, np.ones(count)
    none = np.zeros(count)
    # What is taken where nothing is stated lies high, and so raises no least.
    scales: tuple[Array, ...] = (1.0 - spread, one, 1.0 + spread, one, 1.0 + spread)
    poles = (stated, stated, stated, pole_nf, pole_nf)
    between, primary = number(Number.INTERWINDING_NF), number(Number.PRIMARY_V)
    # Insulation that was not read is not counted, and then nothing above the least is known.
    insulation = np.where(g.known[Reading.INSULATION], np.fmax(MEGA * g.least[Reading.INSULATION], 1.0), np.inf)
    capacitance = np.concatenate([pole * scale for pole, scale in zip(poles, scales, strict=True)])
    windings = (none, none, none, between, between)
    supply = SeparatedCircuit(
        secondary_v=np.tile(voltage, 5),
        primary_v=np.tile(np.where(np.isnan(primary), voltage, primary), 5),
        source_ohm=np.zeros(5 * count),
        frequency_hz=np.tile(number(Number.FREQUENCY_HZ), 5),
        l1_earth_nf=capacitance,
        l2_earth_nf=capacitance,
        interwinding_nf=np.concatenate([of * scale for of, scale in zip(windings, scales, strict=True)]),
        l1_earth_ohm=np.concatenate([np.full(3 * count, np.inf), np.tile(insulation, 2)]),
        l2_earth_ohm=np.concatenate([np.full(3 * count, np.inf), np.tile(insulation, 2)]),
    )
    found = MILLI * np.array(single_contact_currents(supply, np.tile(g.rule["body_dry"], 5)))
    parts = [found[:, at * count : (at + 1) * count] for at in range(5)]
    # Where nothing is stated nothing is driven, not even what rounding leaves.
    counted = (stated > 0.0) & ~np.isnan(voltage)
    return Driven(*(np.where(counted, part, 0.0) for part in parts[:3]), *parts[3:])
