"""What fixes the potentials and currents of a circuit, found from its shape and its ideal parts alone.

Parts of a network that no branch joins to earth are islands: each is counted from a node of its own.  What the ideal
parts (sources, links, transformers) leave open or contradict is found by the rank of the same network with every
ordinary element put at a plain positive value, so that milliohms beside gigaohms are not taken for a missing rank.
"""

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from functools import lru_cache
from typing import Any

import numpy as np
from numpy.typing import NDArray

from faultloop.electrical.circuit_elements import AdmittanceLaw, CurrentLaw, ImpedanceLaw, Law, RatioLaw
from faultloop.electrical.circuit_equations import left_side
from faultloop.electrical.circuit_layout import ADMITTANCE, CURRENT, RATIO, Layout
from faultloop.electrical.measurement import Array

ORDINARY, OPEN, IDEAL = 0, 1, 2
NO_RANK = 1e-9  # singular values and entries below this part of the greatest count as zero
KEPT = 256


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


@dataclass(frozen=True, slots=True)
class Kinds:
    """Kinds of networks of one shape: what is open or ideal, the fixing, and (n,) which kind each network is."""

    states: tuple[tuple[int, ...], ...]
    fixings: tuple[Fixing, ...]
    which: NDArray[np.intp]


def islands(layout: Layout, states: Sequence[int]) -> tuple[int, ...]:
    """Least node of the island that each node belongs to, earth standing for its own.

    Parameters
    ----------
    layout : Layout
        Nodes and branches; a current source joins nothing, a winding joins its ends and not the other winding.
    states : sequence of int
        One an element; an open one joins nothing.

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

    for at, kind in enumerate(layout.kinds):
        if kind == CURRENT or states[at] == OPEN:
            continue
        first = layout.first_branch[at]
        for branch in (first, first + 1) if kind == RATIO else (first,):
            low, high = sorted(root(node) for node in layout.terminals[branch])
            parent[high] = low
    earth = [node for node, row in enumerate(layout.row) if row < 0]
    for node in earth:
        parent[root(node)], parent[node] = node, node
    return tuple(root(node) for node in range(len(layout.nodes)))


def fixings(layout: Layout, laws: Sequence[Law], count: int) -> Kinds:
    """How each of the networks is made solvable.

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
    Kinds
        As many as differ in what is open or ideal, or in the ratios of transformers.

    Notes
    -----
    Ordinary values make no difference.

    References
    ----------
    .. [1] C.-W. Ho, A. E. Ruehli, P. A. Brennan, "The modified nodal approach to network analysis",
       IEEE Trans. Circuits Syst. 22(6), 1975, 504-509.
    .. [2] G. H. Golub, C. F. Van Loan, Matrix Computations, 4th ed., 2.4 (rank and null space by singular values).
    .. [3] IEC 60050-131:2002, 131-13 (connected network).
    """
    ratios = [law.ratio for law in laws if isinstance(law, RatioLaw)]
    told, which = _unique_rows([*(_state(law) for law in laws), *ratios], count)
    found: dict[tuple[tuple[int, ...], Fixing], int] = {}
    place = np.zeros(len(told), np.intp)
    for states, members in _by_states(told[:, : len(laws)].astype(np.int8)):
        turns = told[members, len(laws) :]
        if len(members) == 1:
            made = _fixed_once(layout, states, tuple(turns[0].tolist()))
        else:
            made = _fixed(layout, states, turns)
        for member, fixing in zip(members, made, strict=True):
            place[member] = found.setdefault((states, fixing), len(found))
    return Kinds(tuple(states for states, _ in found), tuple(fixing for _, fixing in found), place[which])


def _state(law: Law) -> NDArray[np.int8]:
    """OPEN, IDEAL where the voltage does not depend on the current, or ORDINARY; a single one where all agree."""
    if isinstance(law, AdmittanceLaw) and law.open.any():
        return np.where(law.open, OPEN, ORDINARY).astype(np.int8)
    if isinstance(law, ImpedanceLaw) and (law.open.any() or law.ideal.any()):
        return np.where(law.open, OPEN, np.where(law.ideal, IDEAL, ORDINARY)).astype(np.int8)
    return np.zeros(1, np.int8)


def _unique_rows(columns: Sequence[NDArray[Any]], count: int) -> tuple[Array, NDArray[np.intp]]:
    """Distinct rows, and which of them each row is; the usual case of equal rows is not sorted."""
    if count == 0 or all(len(column) == 1 or (column == column[0]).all() for column in columns):
        return np.array([[column[0] for column in columns]] * min(count, 1)).reshape(-1, len(columns)), np.zeros(
            count, np.intp
        )
    rows = np.column_stack([np.broadcast_to(column, (count,)) for column in columns])
    kinds, which = np.unique(rows, axis=0, return_inverse=True)
    return kinds, which.reshape(-1)


@lru_cache(maxsize=KEPT)
def _fixed_once(layout: Layout, states: tuple[int, ...], ratios: tuple[float, ...]) -> list[Fixing]:
    """Fixing of networks that agree in their ratios."""
    return _fixed(layout, states, np.array([ratios]))


def _fixed(layout: Layout, states: tuple[int, ...], ratios: Array) -> list[Fixing]:
    """Fixings of networks that differ in their ratios only, (n, transformers)."""
    turns = iter(ratios.T)
    plain = [_plain(kind, at, states[at], turns, len(ratios)) for at, kind in enumerate(layout.kinds)]
    return _fix(layout, plain, islands(layout, states), len(ratios))


def _by_states(states: NDArray[np.int8]) -> Iterable[tuple[tuple[int, ...], list[int]]]:
    """Rows with one pattern of open and ideal elements, together."""
    groups: dict[tuple[int, ...], list[int]] = {}
    for at, row in enumerate(states.tolist()):
        groups.setdefault(tuple(row), []).append(at)
    return groups.items()


def _plain(kind: str, at: int, state: int, ratios: Iterator[Array], count: int) -> Law:
    """The law with an ordinary value put at one between 1 and 2, another for each element, without reactance."""
    value = np.full(count, 1.0 + (at * 0.6180339887498949) % 1.0)
    zero, one = np.zeros(count), np.ones(count)
    if kind == ADMITTANCE:
        return AdmittanceLaw(one * np.inf if state == OPEN else value, zero, zero)
    if kind == RATIO:
        return RatioLaw(next(ratios))
    if kind == CURRENT:
        return CurrentLaw(zero.astype(np.complex128))
    return ImpedanceLaw(one > float(state == OPEN), zero if state == IDEAL else value, zero, zero.astype(np.complex128))


def _fix(layout: Layout, laws: Sequence[Law], reference: tuple[int, ...], count: int) -> list[Fixing]:
    """Fixings of networks that differ in ratios only."""
    floating = sorted({node for node in reference if layout.row[node] >= 0})
    pins = [(layout.row[node], layout.row[node]) for node in floating]
    sums = np.zeros((len(floating), layout.unknowns))
    for node, own in enumerate(reference):
        if own in floating:
            sums[floating.index(own), layout.row[node]] = 1.0
    nothing: tuple[Array, Array] = (np.zeros((0, layout.unknowns)), np.zeros((0, layout.unknowns)))
    spaces = _null_spaces(layout, laws, pins, count) if _has_ideal_parts(laws) else [nothing] * count
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


def _null_spaces(
    layout: Layout, laws: Sequence[Law], pins: Sequence[tuple[int, int]], count: int
) -> Iterator[tuple[Array, Array]]:
    """Of each network, the sums of equations in which all unknowns cancel, and the unknowns that nothing determines."""
    matrix = left_side(layout, laws, count).real
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
