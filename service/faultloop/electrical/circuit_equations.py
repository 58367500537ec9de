"""Laws of a circuit's elements, and its equations A·x = b by modified nodal analysis."""

from collections.abc import Sequence
from dataclasses import fields, replace
from itertools import product
from typing import Any

import numpy as np
from numpy.typing import NDArray

from faultloop.electrical.circuit_elements import (
    AdmittanceLaw,
    CurrentLaw,
    Element,
    ImpedanceLaw,
    Law,
    Mask,
    Phasor,
    RatioLaw,
    element_law,
)
from faultloop.electrical.circuit_layout import LETTERS, SOURCE, Circuit, Layout, branch_ends

VALUES = {kind: tuple(field.name for field in fields(kind) if field.type is not str) for kind in LETTERS}


def columns(circuit: Circuit) -> tuple[Circuit, int]:
    """The circuit with values as columns of numbers, and how many networks it is.

    Parameters
    ----------
    circuit : Circuit
        Values (n,) or (1,).

    Returns
    -------
    Circuit
        Values (n,) or (1,), float64 or complex128; of the same memory where they are that already.
    int
        n.

    Raises
    ------
    ValueError
        If a value is not a column, or two lengths disagree; the message names the element.

    References
    ----------
    .. [1] IEC 60050-131:2002 (laws of ideal circuit elements).
    """
    elements = tuple(_with_columns(element) for element in circuit.elements)
    made = Circuit(elements, _column(circuit.frequency_hz), circuit.earth)
    shapes = {made.frequency_hz.shape}
    for element in elements:
        shapes |= {getattr(element, name).shape for name in VALUES[type(element)]}
    longer = sorted(shapes - {(1,)})
    shape = longer[0] if longer else (1,)
    if len(longer) > 1 or len(shape) != 1:
        told = ", ".join(f"{e.name}: {[getattr(e, name).shape for name in VALUES[type(e)]]}" for e in elements)
        raise ValueError(f"every value must be a column of one length, or of length one; found {told}")
    return made, shape[0]


def _with_columns(element: Element) -> Element:
    """The element itself, where its values are columns of numbers already."""
    told: dict[str, Any] = {name: getattr(element, name) for name in VALUES[type(element)]}
    made: dict[str, Any] = {name: _column(value) for name, value in told.items()}
    return element if all(made[name] is told[name] for name in told) else replace(element, **made)


def _column(value: Any) -> NDArray[Any]:
    """Values as float64 or complex128."""
    return np.asarray(value, np.complex128 if np.iscomplexobj(value) else np.float64)


def circuit_laws(circuit: Circuit) -> tuple[tuple[Law, ...], tuple[Mask, ...]]:
    """Laws of all elements, and where their values can hold.

    Parameters
    ----------
    circuit : Circuit
        Values (n,) or (1,).

    Returns
    -------
    tuple of Law
        One an element.
    tuple of (n,) or (1,) array of bool
        One an element; false in every one where the frequency is unknown, negative or without end.

    References
    ----------
    .. [1] IEC 60050-131:2002 (laws of ideal circuit elements).
    """
    frequency = circuit.frequency_hz
    known = (frequency >= 0.0) & np.isfinite(frequency)
    angular = 2.0 * np.pi * np.where(known, frequency, 0.0)
    pairs = [element_law(element, angular) for element in circuit.elements]
    return tuple(law for law, _ in pairs), tuple(good if known.all() else good & known for _, good in pairs)


def left_side(layout: Layout, laws: Sequence[Law], count: int) -> Phasor:
    """Matrices A of some networks: a row for the current balance of each node, then one for each voltage equation.

    Parameters
    ----------
    layout : Layout
        Places of m unknowns.
    laws : sequence of Law
        One an element, (n,) or (1,) coefficients.
    count : int
        n.

    Returns
    -------
    (n, m, m) array of complex
        Earth has no row and no column.

    Notes
    -----
    Coefficients are added one by one along (n,), never as a product of matrices, so that a network's matrix does not
    depend on its neighbours.

    References
    ----------
    .. [1] C.-W. Ho, A. E. Ruehli, P. A. Brennan, "The modified nodal approach to network analysis",
       IEEE Trans. Circuits Syst. 22(6), 1975, 504-509.
    """
    matrix = np.zeros((count, layout.unknowns, layout.unknowns), np.complex128)
    real, imag = matrix.real, matrix.imag
    for at, law in enumerate(laws):
        first, own = layout.first_branch[at], layout.own_unknown[at]
        ends = branch_ends(layout, first)
        if isinstance(law, AdmittanceLaw):
            for (row, one), (column, other) in product(ends, ends):
                real[:, row, column] += one * other * law.real
                imag[:, row, column] += one * other * law.imag
        elif isinstance(law, ImpedanceLaw):
            for node, sign in ends:
                real[:, node, own] += sign
                real[:, own, node] += sign * law.scale
            real[:, own, own] -= law.real
            imag[:, own, own] -= law.imag
        elif isinstance(law, RatioLaw):
            for node, sign in ends:
                real[:, node, own] += sign
                real[:, own, node] += sign
            for node, sign in branch_ends(layout, first + 1):
                real[:, node, own] -= sign * law.ratio
                real[:, own, node] -= sign * law.ratio
    return matrix


def source_terms(layout: Layout, laws: Sequence[Law]) -> list[tuple[int, int, Phasor]]:
    """What each source adds to the right side b.

    Parameters
    ----------
    layout : Layout
        Places of m unknowns.
    laws : sequence of Law
        One an element, (n,) or (1,) coefficients.

    Returns
    -------
    list of (element, row, (n,) or (1,) array of complex)
        In the order of the elements.

    References
    ----------
    .. [1] C.-W. Ho, A. E. Ruehli, P. A. Brennan, "The modified nodal approach to network analysis",
       IEEE Trans. Circuits Syst. 22(6), 1975, 504-509.
    """
    terms: list[tuple[int, int, Phasor]] = []
    for at, (kind, law) in enumerate(zip(layout.kinds, laws, strict=True)):
        if kind == SOURCE and isinstance(law, ImpedanceLaw):
            terms.append((at, layout.own_unknown[at], law.emf * law.scale))
        elif isinstance(law, CurrentLaw):
            ends = branch_ends(layout, layout.first_branch[at])
            terms += [(at, node, sign * law.injected) for node, sign in ends]
    return terms
