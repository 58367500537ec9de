"""Networks solved by whole matrices, pivots chosen by the values of each: slower, and loses the fewest figures."""

import numpy as np
from numpy.typing import NDArray

from faultloop.electrical.circuit_elements import AdmittanceLaw, CurrentLaw, Mask, Phasor, RatioLaw, law_of
from faultloop.electrical.circuit_equations import left_side, source_terms
from faultloop.electrical.circuit_solution import Equations

BLOCK_ENTRIES = 1 << 17  # matrix entries solved at a time: about 2 MB, so that a block stays in the cache


def solved(equations: Equations, right: Phasor, chosen: NDArray[np.intp], adjoint: bool = False) -> Phasor:
    """Unknowns for a right side, in blocks of networks.

    Parameters
    ----------
    equations : Equations
        Of n networks with m unknowns.
    right : (k, m) array of complex
        Right side b; where an equation is pinned, zero is taken.
    chosen : (k,) array of int
        Which networks.
    adjoint : bool
        Solve with the transposed matrix, as sensitivities ask.

    Returns
    -------
    (k, m) array of complex
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
        block = chosen[start : start + step]
        matrix = left_side(equations.layout, [law_of(law, block) for law in equations.laws], len(block))
        side = right[start : start + step, :, None].copy()
        which = equations.kinds.which[block]
        for kind in np.unique(which):
            here = which == kind
            for row, unknown in equations.kinds.fixings[kind].pins:
                matrix[here, row, :] = 0.0
                matrix[here, row, unknown] = 1.0
                if not adjoint:
                    side[here, row] = 0.0
        found[start : start + step] = _solved_or_nan(matrix.transpose(0, 2, 1) if adjoint else matrix, side)[:, :, 0]
    return found


def _solved_or_nan(matrix: Phasor, side: Phasor) -> Phasor:
    """Solve a block; where it holds a singular network, one by one."""
    try:
        return np.asarray(np.linalg.solve(matrix, side), np.complex128)
    except np.linalg.LinAlgError:
        if len(matrix) == 1:
            return np.full_like(side, np.nan)
        return np.concatenate([_solved_or_nan(matrix[at : at + 1], side[at : at + 1]) for at in range(len(matrix))])


def answered(equations: Equations, chosen: NDArray[np.intp]) -> tuple[Phasor, Mask]:
    """Potentials of all nodes and currents of all branches.

    Parameters
    ----------
    equations : Equations
        Of n networks.
    chosen : (k,) array of int
        Which of them.

    Returns
    -------
    (nodes + branches, k) array of complex
        Potentials, earth at zero, then currents; nan where nothing determines them or the matrix has no inverse.
    (k,) array of bool
        Where the matrix has no inverse.

    References
    ----------
    .. [1] C.-W. Ho, A. E. Ruehli, P. A. Brennan, "The modified nodal approach to network analysis",
       IEEE Trans. Circuits Syst. 22(6), 1975, 504-509.
    """
    layout = equations.layout
    laws = [law_of(law, chosen) for law in equations.laws]
    right = np.zeros((len(chosen), layout.unknowns), np.complex128)
    for _, row, term in source_terms(layout, laws):
        right[:, row] += term
    unknown = solved(equations, right, chosen)
    singular = np.asarray(~np.isfinite(unknown).all(axis=1), np.bool_)
    lost = np.array([fixing.lost for fixing in equations.kinds.fixings], np.bool_).reshape(-1, layout.unknowns)
    known = np.where(lost[equations.kinds.which[chosen]], np.nan, unknown).T
    none: Phasor = np.zeros(len(chosen), np.complex128)
    # Currents are taken while a lost potential stands at zero: they do not depend on it.
    potential = [unknown[:, row] if row >= 0 else none for row in layout.row]
    rows: list[Phasor] = [known[row] if row >= 0 else none for row in layout.row]
    for at, law in enumerate(laws):
        plus, minus = layout.terminals[layout.first_branch[at]]
        own = known[layout.own_unknown[at]]
        if isinstance(law, AdmittanceLaw):
            rows.append((law.real + 1j * law.imag) * (potential[plus] - potential[minus]))
        elif isinstance(law, CurrentLaw):
            rows.append(none - law.injected)
        elif isinstance(law, RatioLaw):
            rows += [own, -law.ratio * own]
        else:
            rows.append(own)
    return np.stack(rows), singular
