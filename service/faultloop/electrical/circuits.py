"""Nodal solution of small linear networks with complex phasors at one frequency, many networks of one shape at once.

A part that no branch joins to earth floats: its potentials are counted from a node of its own, and a voltage between it
and anything else is unknown (nan), never invented.  What cannot be solved is named in ``Solution.defects``.
"""

from itertools import accumulate
from math import comb

import numpy as np
from numpy.typing import NDArray

from faultloop.electrical.circuit_defects import (
    conflicting_sources,
    floating_islands,
    impossible_values,
    singular_networks,
    undetermined_parts,
)
from faultloop.electrical.circuit_dense import answered
from faultloop.electrical.circuit_elements import Mask, Phasor, law_of
from faultloop.electrical.circuit_elimination import eliminated
from faultloop.electrical.circuit_equations import circuit_laws, columns
from faultloop.electrical.circuit_islands import OPEN, fixings
from faultloop.electrical.circuit_layout import Circuit, Layout, lay_out
from faultloop.electrical.circuit_plan import PLANS, plan
from faultloop.electrical.circuit_solution import Equations, Solution
from faultloop.electrical.circuit_tape import Program


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
    `IdealTransformer`.  Values are not copied.

    References
    ----------
    .. [1] C.-W. Ho, A. E. Ruehli, P. A. Brennan, "The modified nodal approach to network analysis",
       IEEE Trans. Circuits Syst. 22(6), 1975, 504-509.
    """
    layout = lay_out(circuit)
    circuit, count = columns(circuit)
    laws, good = circuit_laws(circuit)
    usable = np.ones(count, np.bool_)
    for mask in good:
        if not mask.all():
            usable &= mask
    equations = Equations(circuit, layout, laws, fixings(layout, laws, count), usable)
    found, singular = _answers(equations)
    defects = [*impossible_values(equations, good), *conflicting_sources(equations), *singular_networks(singular)]
    nodes = len(layout.nodes)
    for defect in defects:
        found[nodes:, defect.networks] = np.nan
        for node, row in enumerate(layout.row):
            if row >= 0:
                found[node, defect.networks] = np.nan
    return Solution(
        equations=equations,
        potential_v=found[:nodes].T,
        current_a=found[nodes:].T,
        reference=_references(equations),
        islands=floating_islands(equations),
        defects=(*defects, *undetermined_parts(equations)),
    )


def _answers(equations: Equations) -> tuple[Phasor, Mask]:
    """Potentials and currents of all networks, one row each, and where the values cancel altogether."""
    layout, count = equations.layout, len(equations.usable)
    groups = _by_program(equations)
    program = next(iter(groups), None)
    if len(groups) == 1 and program is not None:
        found, sound = eliminated(program, equations.laws, count)
    else:
        found = np.zeros((len(layout.nodes) + len(layout.branches), count), np.complex128)
        sound = np.zeros(count, np.bool_)
        for program, kinds in groups.items():
            chosen = np.flatnonzero(np.isin(equations.kinds.which, kinds))
            if program is not None:
                laws = [law_of(law, chosen) for law in equations.laws]
                found[:, chosen], sound[chosen] = eliminated(program, laws, len(chosen))
    singular = np.zeros(count, np.bool_)
    rest = np.flatnonzero(~sound & equations.usable)
    if len(rest):
        found[:, rest], singular[rest] = answered(equations, rest)
    return found, singular


def _by_program(equations: Equations) -> dict[Program | None, list[int]]:
    """Kinds of networks that share a program; those with none are solved by whole matrices."""
    layout, kinds = equations.layout, equations.kinds
    groups: dict[Program | None, list[int]] = {}
    most = _most_cut(layout)
    for at, (states, fixing) in enumerate(zip(kinds.states, kinds.fixings, strict=True)):
        program = None
        cut = frozenset(one for one, own in enumerate(layout.own_unknown) if own >= 0 and states[one] == OPEN)
        if not any(fixing.lost) and len(cut) <= most:
            program = plan(layout, cut, frozenset(row for row, _ in fixing.pins))
        groups.setdefault(program, []).append(at)
    return groups


def _most_cut(layout: Layout) -> int:
    """How many elements may be open: so many that no more programs than are kept can be asked for one layout.

    It depends on the layout alone, so that a network is solved by itself as it is among others.
    """
    elements = sum(own >= 0 for own in layout.own_unknown)
    programs = accumulate(comb(elements, most) for most in range(elements + 1))
    return sum(asked <= PLANS for asked in programs) - 1


def _references(equations: Equations) -> NDArray[np.intp]:
    """Reference of each node of each network; one row seen many times where all agree."""
    shape = (len(equations.usable), len(equations.layout.nodes))
    told = np.array([fixing.reference for fixing in equations.kinds.fixings], np.intp).reshape(-1, shape[1])
    return np.broadcast_to(told, shape) if len(told) == 1 else told[equations.kinds.which]
