"""Currents to earth on supplies whose live parts are not earthed, by nodal solution."""

from dataclasses import dataclass

import numpy as np

from faultloop.electrical.circuit_elements import Capacitor, Element, Impedance, Resistor, VoltageSource
from faultloop.electrical.circuit_layout import Circuit
from faultloop.electrical.circuit_solution import current_through
from faultloop.electrical.circuits import solve
from faultloop.electrical.measurement import Array

THIRDS = np.exp(-2j * np.pi * np.arange(3) / 3.0)


@dataclass(frozen=True, slots=True)
class SeparatedCircuit:
    """A separated supply of two poles and what joins it to earth, (n,) each.

    Voltages [V] of the secondary between its poles and of the primary to earth, series impedance of the secondary [Ω],
    frequency [Hz], capacitance of each pole to earth and between the windings [nF], insulation of each pole to earth
    [Ω], inf where none is counted.
    """

    secondary_v: Array
    primary_v: Array
    source_ohm: Array
    frequency_hz: Array
    l1_earth_nf: Array
    l2_earth_nf: Array
    interwinding_nf: Array
    l1_earth_ohm: Array
    l2_earth_ohm: Array


def single_contact_currents(supply: SeparatedCircuit, body_ohm: Array) -> tuple[Array, Array]:
    """Current through somebody who stands on earth and touches one pole of a separated supply.

    Parameters
    ----------
    supply : SeparatedCircuit
        Of n supplies.
    body_ohm : (n,) array
        Resistance of the body, or of the load that stands for it in a test [Ω].

    Returns
    -------
    (n,) array, (n,) array
        Current [A] at L1 and at L2, the greater of the two polarities that the windings may have to each other; nan
        where a value is unknown.

    Notes
    -----
    The pole that is touched is held near earth, so that the capacitance of the other pole drives the current: I = U·ω·C
    while 1/(ωC) is far above the body.  Half of the capacitance between the windings joins each pair of like ends.

    References
    ----------
    .. [1] IEC 60364-4-41:2005, 413 (electrical separation).
    .. [2] IEC 60990:2016 (touch current and what drives it).
    """
    columns = [np.asarray(getattr(supply, name), np.float64) for name in supply.__slots__]
    count = max(len(column) for column in (*columns, body_ohm))
    columns = [np.broadcast_to(column, (count,)) for column in (*columns, body_ohm)]
    # Four networks a supply: either pole touched, either polarity of the primary.
    two_v, one_v, source, hertz, first, second, between, leak_1, leak_2, body = (np.tile(c, 4) for c in columns)
    sign = np.repeat([1.0, -1.0, 1.0, -1.0], count)
    touched_1 = np.repeat([True, True, False, False], count)
    none, link = np.zeros(4 * count), np.zeros(4 * count)
    elements: tuple[Element, ...] = (
        VoltageSource("secondary", "L1", "L2", two_v.astype(np.complex128), none, source),
        VoltageSource("primary", "line", "earth", sign * one_v.astype(np.complex128), link, link),
        Capacitor("first_ends", "line", "L1", between / 2.0),
        Capacitor("second_ends", "earth", "L2", between / 2.0),
        Capacitor("capacitance_1", "L1", "earth", first),
        Capacitor("capacitance_2", "L2", "earth", second),
        Resistor("insulation_1", "L1", "earth", leak_1),
        Resistor("insulation_2", "L2", "earth", leak_2),
        Resistor("body_1", "L1", "earth", np.where(touched_1, body, np.inf)),
        Resistor("body_2", "L2", "earth", np.where(touched_1, np.inf, body)),
    )
    solution = solve(Circuit(elements, hertz))
    at = np.abs(np.where(touched_1, current_through(solution, "body_1"), current_through(solution, "body_2")))
    return np.maximum(at[:count], at[count : 2 * count]), np.maximum(at[2 * count : 3 * count], at[3 * count :])


@dataclass(frozen=True, slots=True)
class InsulatedSupply:
    """An IT supply, (n,) each: voltage of a line to neutral [V], how many lines, frequency [Hz], capacitance of each
    line, and of the neutral where it goes along, to earth [nF]."""

    voltage_v: Array
    lines: Array
    frequency_hz: Array
    line_earth_nf: Array
    neutral_earth_nf: Array


def current_to_earth(supply: InsulatedSupply, path_ohm: Array) -> Array:
    """Current of a first fault of one line of an IT supply to earth, or of a contact with that line.

    Parameters
    ----------
    supply : InsulatedSupply
        Of n supplies.
    path_ohm : (n,) array
        What the current meets between the line and earth: an electrode R_A, a body [Ω]; zero is a dead short.

    Returns
    -------
    (n,) array
        I_d [A]; nan where a value is unknown.

    Notes
    -----
    Into a dead short I_d = 3·ω·C·U0 with three lines of equal capacitance C, and ω·C·U0 with one line and neutral.

    References
    ----------
    .. [1] IEC 60364-4-41:2005, 411.6.2 (current of a first fault).
    """
    columns = [np.asarray(getattr(supply, name), np.float64) for name in supply.__slots__]
    count = max(len(column) for column in (*columns, path_ohm))
    voltage, lines, hertz, line_nf, neutral_nf, path = (
        np.broadcast_to(column, (count,)) for column in (*columns, path_ohm)
    )
    none, elements = np.zeros(count), list[Element]()
    for at, phasor in enumerate(THIRDS):
        there = lines > at
        name, opened = f"L{at + 1}", np.where(there, 0.0, np.inf)
        elements.append(VoltageSource(f"line_{at + 1}", name, "neutral", voltage * phasor, opened, none))
        elements.append(Capacitor(f"capacitance_{at + 1}", name, "earth", np.where(there, line_nf, 0.0)))
    elements.append(Capacitor("neutral_capacitance", "neutral", "earth", neutral_nf))
    elements.append(Impedance("path", "L1", "earth", path, none))
    current = np.abs(current_through(solve(Circuit(tuple(elements), hertz)), "path"))
    return np.where(np.isnan(lines), np.nan, current)
