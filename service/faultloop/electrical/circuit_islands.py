"""What fixes the potentials and currents of a circuit, found from its shape and its ideal parts alone.

Parts of a network that no branch joins to earth are islands: each is counted from a node of its own.  What the ideal
parts (sources, links, transformers) leave open or contradict is found by the rank of the same network with every
ordinary element put at a plain positive value, so that milliohms beside gigaohms are not taken for a missing rank.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from faultloop.electrical.circuit_elements import AdmittanceLaw, CurrentLaw, ImpedanceLaw, Law, RatioLaw
from faultloop.electrical.circuit_equations import left_side
from faultloop.electrical.circuit_layout import Layout
from faultloop.electrical.measurement import Array

ORDINARY, OPEN, IDEAL = 0, 1, 2
NO_RANK = 1e-9  # singular values and entries below this part of the greatest count as zero
States = NDArray[np.int8]


@dataclass(frozen=True, slots=True)
class Fixing:
    """How networks of one shape and one kind of ideal parts are made solvable.

    ``reference`` is the node from which each node is counted; ``pins`` are the equations (row, unknown) replaced by
    "unknown = 0"; ``lost`` marks unknowns that nothing determines; each of ``conditions`` (d, m) is a sum of equations
    in which every unknown cancels, so that the sources in it must cancel too.
    """

    reference: tuple[int, ...]
    pins: tuple[tuple[int, int], ...]
    lost: tuple[bool, ...]
    conditions: tuple[tuple[float, ...], ...]


def element_states(laws: Sequence[Law]) -> States:
    """Which elements are open, ideal or ordinary.

    Parameters
    ----------
    laws : sequence of Law
        One an element, (n,) coefficients.

    Returns
    -------
    (n, e) array of int8
        OPEN where no current can flow, IDEAL where the voltage does not depend on the current.

    References
    ----------
    .. [1] IEC 60050-131:2002 (ideal circuit elements).
    """
    columns = []
    for law in laws:
        if isinstance(law, AdmittanceLaw):
            columns.append(np.where(law.open, OPEN, ORDINARY))
        elif isinstance(law, ImpedanceLaw):
            columns.append(np.where(law.open, OPEN, np.where(law.ideal, IDEAL, ORDINARY)))
        else:
            length = len(law.injected) if isinstance(law, CurrentLaw) else len(law.ratio)
            columns.append(np.zeros(length, np.int8))
    return np.stack(columns, axis=1).astype(np.int8)


def islands(layout: Layout, laws: Sequence[Law], states: States) -> tuple[int, ...]:
    """Least node of the island that each node belongs to, earth standing for its own.

    Parameters
    ----------
    layout : Layout
        Nodes and branches.
    laws : sequence of Law
        One an element; a current source joins nothing, a winding joins its ends and not the other winding.
    states : (e,) array of int8
        Of these networks; an open element joins nothing.

    Returns
    -------
    tuple of int
        One an node: the same number means one island.

    References
    ----------
    .. [1] R. E. Tarjan, "Efficiency of a good but not linear set union algorithm", J. ACM 22(2), 1975, 215-225.
    .. [2] IEC 60050-131:2002, 131-13 (connected network).
    """
    parent = list(range(len(layout.nodes)))

    def root(node: int) -> int:
        while parent[node] != node:
            parent[node] = parent[parent[node]]
            node = parent[node]
        return node

    for at, law in enumerate(laws):
        if isinstance(law, CurrentLaw) or states[at] == OPEN:
            continue
        first = layout.first_branch[at]
        for branch in (first, first + 1) if isinstance(law, RatioLaw) else (first,):
            low, high = sorted(root(node) for node in layout.terminals[branch])
            parent[high] = low
    earth = [node for node, row in enumerate(layout.row) if row < 0]
    for node in earth:
        parent[root(node)], parent[node] = node, node
    return tuple(root(node) for node in range(len(layout.nodes)))


def fixings(layout: Layout, laws: Sequence[Law]) -> tuple[tuple[Fixing, ...], NDArray[np.intp]]:
    """How each of the networks is made solvable.

    Parameters
    ----------
    layout : Layout
        Places of m unknowns.
    laws : sequence of Law
        One an element, (n,) coefficients.

    Returns
    -------
    tuple of Fixing
        As many as there are kinds.
    (n,) array of int
        Which of them holds for each network.

    Notes
    -----
    Kinds differ in what is open or ideal and in the ratios of transformers; ordinary values make no difference.

    References
    ----------
    .. [1] C.-W. Ho, A. E. Ruehli, P. A. Brennan, "The modified nodal approach to network analysis",
       IEEE Trans. Circuits Syst. 22(6), 1975, 504-509.
    .. [2] G. H. Golub, C. F. Van Loan, Matrix Computations, 4th ed., 2.4 (rank and null space by singular values).
    .. [3] IEC 60050-131:2002, 131-13 (connected network).
    """
    states = element_states(laws)
    ratios = [law.ratio for law in laws if isinstance(law, RatioLaw)]
    told = np.column_stack([states, *ratios])
    kinds, which = _unique_rows(told)
    found: dict[Fixing, int] = {}
    place = np.zeros(len(kinds), np.intp)
    for shape, members in _by_states(kinds[:, : len(laws)].astype(np.int8)):
        reference = islands(layout, laws, shape)
        turns = iter(kinds[members, len(laws) :].T)
        plain = [_plain(law, at, shape[at], turns, len(members)) for at, law in enumerate(laws)]
        for member, fixing in zip(members, _fix(layout, plain, reference, len(members)), strict=True):
            place[member] = found.setdefault(fixing, len(found))
    return tuple(found), place[which]


def _unique_rows(rows: Array) -> tuple[Array, NDArray[np.intp]]:
    """Distinct rows, and which of them each row is; the usual case of equal rows is not sorted."""
    if len(rows) == 0 or (rows == rows[:1]).all():
        return rows[:1], np.zeros(len(rows), np.intp)
    kinds, which = np.unique(rows, axis=0, return_inverse=True)
    return kinds, which.reshape(-1)


def _by_states(states: States) -> list[tuple[States, list[int]]]:
    """Rows with one pattern of open and ideal elements, together."""
    groups: dict[bytes, list[int]] = {}
    for at, row in enumerate(states):
        groups.setdefault(row.tobytes(), []).append(at)
    return [(states[members[0]], members) for members in groups.values()]


def _plain(law: Law, at: int, state: int, ratios: Iterator[Array], count: int) -> Law:
    """The law with an ordinary value put at one between 1 and 2, another for each element, without reactance."""
    value = np.full(count, 1.0 + (at * 0.6180339887498949) % 1.0)
    zero, one = np.zeros(count), np.ones(count)
    if isinstance(law, AdmittanceLaw):
        return AdmittanceLaw(zero if state == OPEN else value, zero)
    if isinstance(law, ImpedanceLaw):
        real = zero if state == IDEAL else value
        return ImpedanceLaw(zero if state == OPEN else one, real, zero, zero.astype(np.complex128))
    return RatioLaw(next(ratios)) if isinstance(law, RatioLaw) else CurrentLaw(zero.astype(np.complex128))


def _fix(layout: Layout, laws: Sequence[Law], reference: tuple[int, ...], count: int) -> list[Fixing]:
    """Fixings of networks that differ in ratios only."""
    floating = sorted({node for node in reference if layout.row[node] >= 0})
    pins = [(layout.row[node], layout.row[node]) for node in floating]
    sums = np.zeros((len(floating), layout.unknowns))
    for node, own in enumerate(reference):
        if own in floating:
            sums[floating.index(own), layout.row[node]] = 1.0
    nothing: tuple[Array, Array] = (np.zeros((0, layout.unknowns)), np.zeros((0, layout.unknowns)))
    spaces = _null_spaces(layout, laws, pins) if _has_ideal_parts(laws) else [nothing] * count
    found = []
    for left, right in spaces:
        conditions, rows = _reduced(left)
        free, unknowns = _reduced(right)
        found.append(
            Fixing(
                reference=reference,
                pins=(*pins, *zip(rows, unknowns, strict=True)),
                lost=tuple(bool(one) for one in (free != 0.0).any(axis=0)),
                conditions=tuple(tuple(row) for row in np.concatenate([sums, conditions]).tolist()),
            )
        )
    return found


def _has_ideal_parts(laws: Sequence[Law]) -> bool:
    """Whether the rank can be short: positive impedances alone, counted from a node in each island, have it all."""
    return any(isinstance(law, RatioLaw) or (isinstance(law, ImpedanceLaw) and law.ideal.any()) for law in laws)


def _null_spaces(layout: Layout, laws: Sequence[Law], pins: Sequence[tuple[int, int]]) -> Iterator[tuple[Array, Array]]:
    """Of each network, the sums of equations in which all unknowns cancel, and the unknowns that nothing determines."""
    matrix = left_side(layout, laws, slice(None)).real
    for row, unknown in pins:
        matrix[:, row, :] = 0.0
        matrix[:, row, unknown] = 1.0
    sizes = np.linalg.svd(matrix, compute_uv=False)
    for one, lacking in zip(matrix, sizes < NO_RANK * np.maximum(sizes[:, :1], 1.0), strict=True):
        left, _, right = np.linalg.svd(one) if lacking.any() else (one, None, one)
        yield left.T[lacking], right[lacking]


def _reduced(basis: Array) -> tuple[Array, list[int]]:
    """The same null space by vectors that each own a coordinate, and those coordinates.

    By Gauss and Jordan with the greatest pivot.
    """
    basis, taken = basis.copy(), []
    for at in range(len(basis)):
        rest = np.abs(basis[at:])
        row, column = divmod(int(rest.argmax()), rest.shape[1])
        basis[[at, at + row]] = basis[[at + row, at]]
        basis[at] /= basis[at, column]
        for other in range(len(basis)):
            if other != at:
                basis[other] -= basis[other, column] * basis[at]
        taken.append(column)
    basis[np.abs(basis) < NO_RANK] = 0.0
    return basis, taken
