"""How a voltage or a current of a circuit moves with the values of its elements, by the adjoint network."""

from collections.abc import Mapping

import numpy as np

from faultloop.electrical.circuit_dense import solved
from faultloop.electrical.circuit_elements import (
    FARADS_IN_A_NANOFARAD,
    AdmittanceLaw,
    Capacitor,
    CurrentSource,
    Element,
    IdealTransformer,
    ImpedanceLaw,
    Inductor,
    Phasor,
    Resistor,
    VoltageSource,
)
from faultloop.electrical.circuit_layout import branch_ends
from faultloop.electrical.circuit_solution import Solution, current_through, voltage_between
from faultloop.electrical.measurement import Array

Sensitivities = dict[tuple[str, str], Phasor]


def voltage_sensitivities(solution: Solution, plus: str, minus: str) -> Sensitivities:
    """Derivatives of a voltage by the values of all elements.

    Parameters
    ----------
    solution : Solution
        Of n networks.
    plus, minus : str
        Names of nodes.

    Returns
    -------
    dict of (element, field) to (n,) array of complex
        ∂U/∂p in volts per unit of the field [V/Ω, V/nF, V/H, V/V, V/A, V/1]; nan where the voltage is unknown.  An open
        element (a resistance or reactance of inf) has 0: no finite step of its value closes it.

    Raises
    ------
    ValueError
        If there is no such node.

    Notes
    -----
    With A·x = b and U = cᵀ·x, the adjoint Aᵀ·λ = c gives ∂U/∂p = λᵀ·(∂b/∂p - ∂A/∂p·x): two solutions give the
    derivative by every value.

    References
    ----------
    .. [1] S. W. Director, R. A. Rohrer, "The generalized adjoint network and network sensitivities",
       IEEE Trans. Circuit Theory 16(3), 1969, 318-323.
    """
    known = np.isfinite(voltage_between(solution, plus, minus))
    chosen = np.zeros((len(known), solution.equations.layout.unknowns), np.complex128)
    for node, sign in ((plus, 1.0), (minus, -1.0)):
        row = solution.equations.layout.row[solution.nodes.index(node)]
        if row >= 0:
            chosen[:, row] += sign
    found = _by_adjoint(solution, chosen)
    return {which: np.where(known, value, np.nan) for which, value in found.items()}


def current_sensitivities(solution: Solution, branch: str) -> Sensitivities:
    """Derivatives of a branch current by the values of all elements.

    Parameters
    ----------
    solution : Solution
        Of n networks.
    branch : str
        Name of an element, or of a winding.

    Returns
    -------
    dict of (element, field) to (n,) array of complex
        ∂I/∂p in amperes per unit of the field [A/Ω, A/nF, A/H, A/V, A/A, A/1]; nan where the current is unknown.

    Raises
    ------
    ValueError
        If there is no such branch.

    Notes
    -----
    As for a voltage; where the current follows from the voltage by the element's own value, or from the other winding
    by the ratio, the derivative of that law is added.

    References
    ----------
    .. [1] S. W. Director, R. A. Rohrer, "The generalized adjoint network and network sensitivities",
       IEEE Trans. Circuit Theory 16(3), 1969, 318-323.
    """
    known = np.isfinite(current_through(solution, branch))
    layout = solution.equations.layout
    at = solution.branches.index(branch)
    owner = max(one for one, first in enumerate(layout.first_branch) if first <= at)
    element, law = solution.equations.circuit.elements[owner], solution.equations.laws[owner]
    chosen = np.zeros((len(known), layout.unknowns), np.complex128)
    direct: Sensitivities = {}
    if isinstance(law, AdmittanceLaw):
        for row, sign in branch_ends(layout, at):
            chosen[:, row] += sign * (law.real + 1j * law.imag)
        for field, slope in _admittance_slope(solution, element).items():
            direct[element.name, field] = slope * _voltage(solution, at)
    elif isinstance(element, CurrentSource):
        direct[element.name, "current_a"] = np.full(len(known), -1.0 + 0.0j)
    elif isinstance(element, IdealTransformer) and at > layout.first_branch[owner]:
        chosen[:, layout.own_unknown[owner]] = -element.ratio
        direct[element.name, "ratio"] = -solution.current_a[:, layout.first_branch[owner]]
    else:
        chosen[:, layout.own_unknown[owner]] = 1.0
    found = _by_adjoint(solution, chosen)
    return {which: np.where(known, value + direct.get(which, 0.0), np.nan) for which, value in found.items()}


def magnitude_sensitivities(
    phasor: Phasor, sensitivities: Mapping[tuple[str, str], Phasor]
) -> dict[tuple[str, str], Array]:
    """Derivatives of the magnitude of a phasor from those of the phasor, for real values.

    Parameters
    ----------
    phasor : (n,) array of complex
        Voltage or current [V or A].
    sensitivities : mapping of (element, field) to (n,) array of complex
        Its derivatives.

    Returns
    -------
    dict of (element, field) to (n,) array
        ∂|U|/∂p = Re(U*·∂U/∂p)/|U|; nan where the phasor is zero, for there the magnitude has a corner.

    References
    ----------
    .. [1] JCGM 102:2011, 6 (uncertainty of complex quantities by their derivatives).
    """
    size = np.abs(phasor)
    size = np.where(size == 0.0, np.nan, size)
    return {which: (np.conj(phasor) * slope).real / size for which, slope in sensitivities.items()}


def _by_adjoint(solution: Solution, chosen: Phasor) -> Sensitivities:
    """λᵀ·(∂b/∂p - ∂A/∂p·x) for every value p."""
    equations, layout = solution.equations, solution.equations.layout
    adjoint = solved(equations, chosen, np.arange(len(chosen)), adjoint=True)
    found: Sensitivities = {}

    def lift(branch: int) -> Phasor:
        none: Phasor = np.zeros(len(adjoint), np.complex128)
        return sum((sign * adjoint[:, row] for row, sign in branch_ends(layout, branch)), none)

    for at, (element, law) in enumerate(zip(equations.circuit.elements, equations.laws, strict=True)):
        first, own = layout.first_branch[at], adjoint[:, layout.own_unknown[at]]
        current = solution.current_a[:, first]
        if isinstance(law, AdmittanceLaw):
            for field, slope in _admittance_slope(solution, element).items():
                found[element.name, field] = -lift(first) * slope * _voltage(solution, first)
        elif isinstance(element, CurrentSource):
            found[element.name, "current_a"] = lift(first)
        elif isinstance(element, IdealTransformer):
            found[element.name, "ratio"] = own * _voltage(solution, first + 1) + lift(first + 1) * current
        elif isinstance(law, ImpedanceLaw):
            by_impedance = own * law.scale * current
            if isinstance(element, Inductor):
                angular = 2.0 * np.pi * equations.circuit.frequency_hz
                found[element.name, "inductance_h"] = by_impedance * (1j * angular)
                continue
            found[element.name, "resistance_ohm"] = by_impedance
            found[element.name, "reactance_ohm"] = by_impedance * 1j
            if isinstance(element, VoltageSource):
                found[element.name, "emf_v"] = own * law.scale
    return found


def _admittance_slope(solution: Solution, element: Element) -> dict[str, Phasor]:
    """Derivative of an admittance by its value."""
    if isinstance(element, Resistor):
        conductance = 1.0 / np.where(element.resistance_ohm == 0.0, np.nan, element.resistance_ohm)
        return {"resistance_ohm": np.asarray(-conductance * conductance, np.complex128)}
    if isinstance(element, Capacitor):
        angular = 2.0 * np.pi * solution.equations.circuit.frequency_hz
        return {"capacitance_nf": np.asarray(1j * angular * FARADS_IN_A_NANOFARAD, np.complex128)}
    return {}


def _voltage(solution: Solution, branch: int) -> Phasor:
    """Voltage over a branch."""
    plus, minus = solution.equations.layout.terminals[branch]
    return solution.potential_v[:, plus] - solution.potential_v[:, minus]
