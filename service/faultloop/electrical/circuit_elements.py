"""Elements of a linear network, and the law of each at one frequency.

Every element has a name, its nodes by name, and (n,) arrays of values: one number a network (an array of length one
holds for all).  Current is counted from ``plus`` to ``minus`` inside the element, so a source that delivers has a
negative one.  Phasors are complex r.m.s. values.

Put as `Impedance` whatever is small or may be zero or open: conductors, windings, links, switches, contacts.  Its
current is an unknown of its own, so a milliohm beside insulation of a gigaohm costs no figures.  A `Resistor` or
`Capacitor` is stamped by its admittance and may be open, but never zero ohms.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from faultloop.electrical.measurement import Array

Phasor = NDArray[np.complex128]
Mask = NDArray[np.bool_]
FARADS_IN_A_NANOFARAD = 1e-9
LEAST_RESISTANCE_OHM = 1e-300  # its reciprocal is still a number


@dataclass(frozen=True, slots=True)
class Resistor:
    """A resistance above zero [Ω], inf where open: insulation, a body, a load."""

    name: str
    plus: str
    minus: str
    resistance_ohm: Array


@dataclass(frozen=True, slots=True)
class Capacitor:
    """A capacitance of zero (open) or more [nF]: cable, filter, winding to winding."""

    name: str
    plus: str
    minus: str
    capacitance_nf: Array


@dataclass(frozen=True, slots=True)
class Inductor:
    """An inductance of zero (a link) or more [H]."""

    name: str
    plus: str
    minus: str
    inductance_h: Array


@dataclass(frozen=True, slots=True)
class Impedance:
    """Series resistance and reactance at the frequency [Ω]; both zero is a link, either inf is open."""

    name: str
    plus: str
    minus: str
    resistance_ohm: Array
    reactance_ohm: Array


@dataclass(frozen=True, slots=True)
class VoltageSource:
    """Electromotive force that lifts ``plus`` above ``minus`` [V], behind an internal impedance [Ω], zero if ideal."""

    name: str
    plus: str
    minus: str
    emf_v: Phasor
    resistance_ohm: Array
    reactance_ohm: Array


@dataclass(frozen=True, slots=True)
class CurrentSource:
    """Current driven out of ``plus`` and back into ``minus`` [A], whatever the voltage."""

    name: str
    plus: str
    minus: str
    current_a: Phasor


@dataclass(frozen=True, slots=True)
class IdealTransformer:
    """Two windings without loss, leakage or magnetising current; ratio is primary turns over secondary turns [1].

    Its branches are ``name.primary`` and ``name.secondary``, each from its plus to its minus.
    """

    name: str
    primary_plus: str
    primary_minus: str
    secondary_plus: str
    secondary_minus: str
    ratio: Array


Element = Resistor | Capacitor | Inductor | Impedance | VoltageSource | CurrentSource | IdealTransformer


@dataclass(frozen=True, slots=True)
class AdmittanceLaw:
    """i = y·v, with y = real + j·imag [S]."""

    real: Array
    imag: Array

    @property
    def open(self) -> Mask:
        """Where no current can flow."""
        return np.asarray((self.real == 0.0) & (self.imag == 0.0), np.bool_)


@dataclass(frozen=True, slots=True)
class ImpedanceLaw:
    """v = E + z·i, kept as s·v - (s·z)·i = s·E with s = 1/(1 + |R| + |X|), so that z may be zero or without end."""

    scale: Array
    real: Array
    imag: Array
    emf: Phasor

    @property
    def open(self) -> Mask:
        """Where no current can flow."""
        return np.equal(self.scale, 0.0)

    @property
    def ideal(self) -> Mask:
        """Where the voltage is E whatever the current."""
        return np.asarray((self.real == 0.0) & (self.imag == 0.0), np.bool_)


@dataclass(frozen=True, slots=True)
class CurrentLaw:
    """The current is given; it makes no path."""

    injected: Phasor


@dataclass(frozen=True, slots=True)
class RatioLaw:
    """v1 = r·v2 and i2 = -r·i1."""

    ratio: Array


Law = AdmittanceLaw | ImpedanceLaw | CurrentLaw | RatioLaw


def element_law(element: Element, angular_frequency: Array) -> tuple[Law, Mask]:
    """Law of an element at a frequency, and where its values can hold.

    Parameters
    ----------
    element : Element
        With (n,) values.
    angular_frequency : (n,) array
        ω = 2πf [rad/s]; zero for direct current, where a capacitor is open and an inductor a link.

    Returns
    -------
    Law
        Its coefficients, (n,) each; a harmless one (open, or ratio 1) where the values cannot hold.
    (n,) array of bool
        False where a value is unknown (nan), negative where that has no meaning, or zero or inf where that is excluded.

    References
    ----------
    .. [1] IEC 60050-131:2002 (laws of ideal circuit elements).
    """
    if isinstance(element, Resistor):
        good = element.resistance_ohm >= LEAST_RESISTANCE_OHM
        conductance = 1.0 / np.where(good, element.resistance_ohm, np.inf)
        return AdmittanceLaw(conductance, np.zeros_like(conductance)), good
    if isinstance(element, Capacitor):
        good = (element.capacitance_nf >= 0.0) & np.isfinite(element.capacitance_nf)
        farads = np.where(good, element.capacitance_nf, 0.0) * FARADS_IN_A_NANOFARAD
        susceptance = angular_frequency * farads
        return AdmittanceLaw(np.zeros_like(susceptance), susceptance), good
    if isinstance(element, CurrentSource):
        good = np.isfinite(element.current_a)
        return CurrentLaw(np.where(good, element.current_a, 0.0)), good
    if isinstance(element, IdealTransformer):
        good = np.isfinite(element.ratio) & (element.ratio != 0.0)
        return RatioLaw(np.where(good, element.ratio, 1.0)), good
    return _series_law(element, angular_frequency)


def _series_law(element: Inductor | Impedance | VoltageSource, angular_frequency: Array) -> tuple[Law, Mask]:
    """Law of what is stamped by its voltage equation."""
    if isinstance(element, Inductor):
        good = (element.inductance_h >= 0.0) & np.isfinite(element.inductance_h)
        reactance = angular_frequency * np.where(good, element.inductance_h, 0.0)
        resistance = np.zeros_like(reactance)
    else:
        resistance, reactance = element.resistance_ohm, element.reactance_ohm
        good = (resistance >= 0.0) & ~np.isnan(reactance)
    emf = np.zeros(resistance.shape, np.complex128)
    if isinstance(element, VoltageSource):
        good = good & np.isfinite(element.emf_v)
        emf = np.where(good, element.emf_v, 0.0)
    shut = good & np.isfinite(np.abs(resistance) + np.abs(reactance))
    resistance, reactance = np.where(shut, resistance, 0.0), np.where(shut, reactance, 0.0)
    scale = np.where(shut, 1.0 / (1.0 + np.abs(resistance) + np.abs(reactance)), 0.0)
    return ImpedanceLaw(scale, np.where(shut, scale * resistance, 1.0), scale * reactance, emf), good
