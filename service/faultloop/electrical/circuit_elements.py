"""Elements of a linear network, and the law of each at one frequency.

Every element has a name, its nodes by name, and (n,) arrays of values: one number a network (an array of length one
holds for all).  Current is counted from ``plus`` to ``minus`` inside the element, so a source that delivers has a
negative one.  Phasors are complex r.m.s. values.

Put as `Impedance` whatever is small or may be zero or open: conductors, windings, links, switches, contacts.  Its
current is an unknown of its own, so a milliohm beside insulation of a gigaohm costs no figures.  A `Resistor` or
`Capacitor` is stamped by its admittance and may be open, but never zero ohms.
"""

from dataclasses import dataclass, fields, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from faultloop.electrical.measurement import Array

Phasor = NDArray[np.complex128]
Mask = NDArray[np.bool_]
FARADS_IN_A_NANOFARAD = 1e-9
LEAST_RESISTANCE_OHM = 1e-300  # its reciprocal is still a number
NOUGHT = np.zeros(1)
NOUGHT.flags.writeable = False


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
    """i = y·v, with y = 1/R + j·b·c: a resistance [Ω], inf where there is none, beside c [nF] of b siemens each."""

    resistance: Array
    siemens: Array
    nanofarads: Array

    @property
    def real(self) -> Array:
        """Conductance [S]."""
        return 1.0 / self.resistance

    @property
    def imag(self) -> Array:
        """Susceptance [S]."""
        return self.siemens * self.nanofarads

    @property
    def open(self) -> Mask:
        """Where no current can flow."""
        return _both(self.resistance == np.inf, self.imag == 0.0)


@dataclass(frozen=True, slots=True)
class ImpedanceLaw:
    """v = E + z·i where closed, i = 0 where not.

    In a matrix it stands as s·v - (s·z)·i = s·E with s = 1/(1 + |R| + |X|), so that z may be zero or without end; real
    and imag are the parts of s·z.
    """

    closed: Mask
    resistance: Array
    reactance: Array
    emf: Phasor

    @property
    def scale(self) -> Array:
        """The factor s, zero where open."""
        return np.where(self.closed, 1.0 / (1.0 + np.abs(self.resistance) + np.abs(self.reactance)), 0.0)

    @property
    def real(self) -> Array:
        """Real part of s·z, one where open."""
        return np.where(self.closed, self.scale * self.resistance, 1.0)

    @property
    def imag(self) -> Array:
        """Imaginary part of s·z."""
        return self.scale * self.reactance

    @property
    def open(self) -> Mask:
        """Where no current can flow."""
        return ~self.closed

    @property
    def ideal(self) -> Mask:
        """Where the voltage is E whatever the current."""
        return np.asarray(self.closed & (self.resistance == 0.0) & (self.reactance == 0.0), np.bool_)


@dataclass(frozen=True, slots=True)
class CurrentLaw:
    """The current is given; it makes no path."""

    injected: Phasor


@dataclass(frozen=True, slots=True)
class RatioLaw:
    """v1 = r·v2 and i2 = -r·i1."""

    ratio: Array


Law = AdmittanceLaw | ImpedanceLaw | CurrentLaw | RatioLaw


def law_of(law: Law, chosen: slice | NDArray[np.intp]) -> Law:
    """The law of some networks.

    Parameters
    ----------
    law : Law
        With columns (n,), or (1,) that hold for all.
    chosen : slice or (k,) array of int
        Which networks.

    Returns
    -------
    Law
        With columns of the chosen ones, or the same (1,).

    References
    ----------
    .. [1] IEC 60050-131:2002 (laws of ideal circuit elements).
    """
    columns = {field.name: getattr(law, field.name) for field in fields(law)}
    return replace(law, **{name: column[chosen] for name, column in columns.items() if len(column) != 1})


def element_law(element: Element, angular_frequency: Array) -> tuple[Law, Mask]:
    """Law of an element at a frequency, and where its values can hold.

    Parameters
    ----------
    element : Element
        With (n,) values, or (1,) where one holds for all.
    angular_frequency : (n,) or (1,) array
        ω = 2πf [rad/s]; zero for direct current, where a capacitor is open and an inductor a link.

    Returns
    -------
    Law
        Its coefficients, (n,) or (1,) each; a harmless one (open, or ratio 1) where the values cannot hold.
    (n,) or (1,) array of bool
        False where a value is unknown (nan), negative where that has no meaning, or zero or inf where that is excluded.

    References
    ----------
    .. [1] IEC 60050-131:2002 (laws of ideal circuit elements).
    """
    if isinstance(element, Resistor):
        good = element.resistance_ohm >= LEAST_RESISTANCE_OHM
        return AdmittanceLaw(_kept(good, element.resistance_ohm, np.inf), NOUGHT, NOUGHT), good
    if isinstance(element, Capacitor):
        good = (element.capacitance_nf >= 0.0) & np.isfinite(element.capacitance_nf)
        siemens = angular_frequency * FARADS_IN_A_NANOFARAD
        return AdmittanceLaw(np.array([np.inf]), siemens, _kept(good, element.capacitance_nf, 0.0)), good
    if isinstance(element, CurrentSource):
        good = np.isfinite(element.current_a)
        return CurrentLaw(_kept(good, element.current_a, 0.0)), good
    if isinstance(element, IdealTransformer):
        good = np.isfinite(element.ratio) & (element.ratio != 0.0)
        return RatioLaw(_kept(good, element.ratio, 1.0)), good
    return _series_law(element, angular_frequency)


def _series_law(element: Inductor | Impedance | VoltageSource, angular_frequency: Array) -> tuple[Law, Mask]:
    """Law of what is stamped by its voltage equation."""
    if isinstance(element, Inductor):
        good = (element.inductance_h >= 0.0) & np.isfinite(element.inductance_h)
        resistance, reactance = NOUGHT, angular_frequency * _kept(good, element.inductance_h, 0.0)
    else:
        resistance, reactance = element.resistance_ohm, element.reactance_ohm
        good = (resistance >= 0.0) & ~np.isnan(reactance)
    emf: Phasor = NOUGHT.astype(np.complex128)
    if isinstance(element, VoltageSource):
        good = good & np.isfinite(element.emf_v)
        emf = _kept(good, element.emf_v, 0.0)
    closed = good & np.isfinite(np.abs(resistance) + np.abs(reactance))
    return ImpedanceLaw(closed, _kept(closed, resistance, 0.0), _kept(closed, reactance, 0.0), emf), good


def _kept(mask: Mask, column: Any, other: float) -> Any:
    """The column, with another value where the mask is false; itself where it is true throughout."""
    return column if mask.all() else np.where(mask, column, other)


def _both(one: Mask, other: Mask) -> Mask:
    """Where both hold, without a pass where one of length one holds for all."""
    for mask, rest in ((one, other), (other, one)):
        if len(mask) == 1 and mask[0]:
            return rest
    return np.asarray(one & other, np.bool_)
