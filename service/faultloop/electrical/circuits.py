"""Nodal solution of small linear networks with complex phasors at one frequency, many networks of one shape at once.

A part that no branch joins to earth floats: its potentials are counted from a node of its own, and a voltage between it
and anything else is unknown (nan), never invented.  What cannot be solved is named in ``Solution.defects``.
"""

import numpy as np

from faultloop.electrical.circuit_defects import (
    conflicting_sources,
    floating_islands,
    impossible_values,
    singular_networks,
    undetermined_parts,
)
from faultloop.electrical.circuit_elements import AdmittanceLaw, CurrentLaw, Phasor, RatioLaw
from faultloop.electrical.circuit_equations import circuit_laws, left_side, source_terms, spread
from faultloop.electrical.circuit_islands import fixings
from faultloop.electrical.circuit_layout import Circuit, Layout, lay_out
from faultloop.electrical.circuit_solution import Equations, Solution

BLOCK_ENTRIES = 1 << 17  # matrix entries solved at a time: about 2 MB, so that a block stays in the cache


def solve(circuit: Circuit) -> Solution:
    """Potentials and branch currents of many networks of one shape.

    Parameters
    ----------
    circuit : Circuit
        Values (n,) or (1,).

    Returns
    -------
    Solution
        The same for one network and for many, to the last bit.  A network that cannot be solved is nan, named in the
        defects, and no harm to its neighbours.

    Raises
    ------
    ValueError
        If the circuit has no element, two branches have one name, or a value has another length.

    Notes
    -----
    A·x = b, where x holds the potentials of the nodes and the currents of `Inductor`, `Impedance`, `VoltageSource` and
    `IdealTransformer`.

    References
    ----------
    .. [1] C.-W. Ho, A. E. Ruehli, P. A. Brennan, "The modified nodal approach to network analysis",
       IEEE Trans. Circuits Syst. 22(6), 1975, 504-509.
    """
    layout = lay_out(circuit)
    circuit = spread(circuit)
    laws, good = circuit_laws(circuit)
    equations = Equations(circuit, layout, laws, *fixings(layout, laws), np.logical_and.reduce(good))
    terms = source_terms(layout, laws)
    right = np.zeros((len(equations.which), layout.unknowns), np.complex128)
    for _, row, term in terms:
        right[:, row] += term
    unknown = solved(equations, right)
    defects = impossible_values(equations, good)
    defects += conflicting_sources(equations, terms)
    defects += singular_networks(unknown)
    current = _currents(equations, unknown)  # while a lost potential stands at zero: the currents do not depend on it
    lost = np.array([fixing.lost for fixing in equations.fixings], np.bool_).reshape(-1, layout.unknowns)
    unknown[lost[equations.which]] = np.nan
    for defect in defects:
        unknown[defect.networks] = current[defect.networks] = np.nan
    reference = np.array([fixing.reference for fixing in equations.fixings], np.intp).reshape(-1, len(layout.nodes))
    return Solution(
        equations=equations,
        potential_v=_potentials(layout, unknown),
        current_a=current,
        reference=reference[equations.which],
        islands=floating_islands(equations),
        defects=(*defects, *undetermined_parts(equations)),
    )


def solved(equations: Equations, right: Phasor, adjoint: bool = False) -> Phasor:
    """Unknowns for a right side, in blocks of networks.

    Parameters
    ----------
    equations : Equations
        Of n networks with m unknowns.
    right : (n, m) array of complex
        Right side b; where an equation is pinned, zero is taken.
    adjoint : bool
        Solve with the transposed matrix, as sensitivities ask.

    Returns
    -------
    (n, m) array of complex
        x; nan where the matrix has no inverse.

    References
    ----------
    .. [1] C.-W. Ho, A. E. Ruehli, P. A. Brennan, "The modified nodal approach to network analysis",
       IEEE Trans. Circuits Syst. 22(6), 1975, 504-509.
    """
    networks, unknowns = right.shape
    found = np.empty((networks, unknowns), np.complex128)
    step = max(1, BLOCK_ENTRIES // max(1, unknowns * unknowns))
    for start in range(0, networks, step):
        block = slice(start, start + step)
        matrix = left_side(equations.layout, equations.laws, block)
        side = right[block, :, None].copy()
        for kind in np.unique(equations.which[block]):
            here = equations.which[block] == kind
            for row, unknown in equations.fixings[kind].pins:
                matrix[here, row, :] = 0.0
                matrix[here, row, unknown] = 1.0
                if not adjoint:
                    side[here, row] = 0.0
        found[block] = _solved_or_nan(matrix.transpose(0, 2, 1) if adjoint else matrix, side)[:, :, 0]
    return found


def _solved_or_nan(matrix: Phasor, side: Phasor) -> Phasor:
    """Solve a block; where it holds a singular network, one by one."""
    try:
        return np.asarray(np.linalg.solve(matrix, side), np.complex128)
    except np.linalg.LinAlgError:
        if len(matrix) == 1:
            return np.full_like(side, np.nan)
        return np.concatenate([_solved_or_nan(matrix[at : at + 1], side[at : at + 1]) for at in range(len(matrix))])


def _potentials(layout: Layout, unknown: Phasor) -> Phasor:
    """Potentials of all nodes, earth at zero; nan in a network that is unknown altogether."""
    columns = [unknown[:, row] if row >= 0 else np.zeros(len(unknown)) for row in layout.row]
    return np.stack(columns, axis=1).astype(np.complex128)


def _currents(equations: Equations, unknown: Phasor) -> Phasor:
    """Currents of all branches."""
    layout = equations.layout
    potential = _potentials(layout, unknown)
    lost = np.array([fixing.lost for fixing in equations.fixings], np.bool_).reshape(-1, layout.unknowns)
    unknown = np.where(lost[equations.which], np.nan, unknown)
    columns = []
    for at, law in enumerate(equations.laws):
        plus, minus = layout.terminals[layout.first_branch[at]]
        own = unknown[:, layout.own_unknown[at]]
        if isinstance(law, AdmittanceLaw):
            columns.append((law.real + 1j * law.imag) * (potential[:, plus] - potential[:, minus]))
        elif isinstance(law, CurrentLaw):
            columns.append(-law.injected)
        elif isinstance(law, RatioLaw):
            columns += [own, -law.ratio * own]
        else:
            columns.append(own)
    return np.stack(columns, axis=1)
