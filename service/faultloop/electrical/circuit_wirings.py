"""Many networks over the same nodes, each wired in its own way: a bench and everything that may be changed at it.

`circuits.solve` takes networks of one shape, with an element for whatever any of them has.  Where each network is wired
otherwise nearly all elements would be open in nearly all of them, so here a network is a list of branches, and all are
stamped, counted from their references and solved at once.  Every branch is an admittance above zero; none is ideal.
"""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from faultloop.electrical.circuit_elements import Phasor
from faultloop.electrical.measurement import Array, Mask

Places = NDArray[np.int64]
EARTH = 0
BLOCK_ENTRIES = 1 << 17  # matrix entries solved at a time: about 2 MB, so that a block stays in the cache


@dataclass(frozen=True, slots=True)
class Branches:
    """Branches (k,) of all networks: which network, from which node to which, admittance [S], and emf [V] behind it.

    An emf lifts ``plus`` above ``minus``.
    """

    network: Places
    plus: Places
    minus: Places
    admittance: Phasor
    emf: Phasor


@dataclass(frozen=True, slots=True)
class Wired:
    """Solved networks.

    Attributes
    ----------
    potential_v : (n, m) array of complex
        Potential of each node from its reference [V].
    reference : (n, m) array of int
        Node that each node is counted from: earth (0) where anything joins it to earth, else one of its own part.
    own_ohm : (n, m) array of complex
        Potential of each node for one ampere driven into it out of its reference [Ω].
    transfer_ohm : (k, m, m) array of complex
        Potential of each node for one ampere driven into each other, of the first k networks [Ω].
    """

    potential_v: Phasor
    reference: Places
    own_ohm: Phasor
    transfer_ohm: Phasor


def solve_wirings(networks: int, nodes: int, branches: Branches, whole: int) -> Wired:
    """Potentials of many networks, and how each node answers to a current driven into it.

    Parameters
    ----------
    networks, nodes : int
        How many there are; node 0 is earth.
    branches : Branches
        At least none; every admittance is finite and not zero.
    whole : int
        How many of the first networks are to tell of every pair of nodes too.

    Returns
    -------
    Wired
        The same for a network alone and among others.

    Notes
    -----
    Y·v = j by nodes, with a source as a current j = y·E beside its admittance.  In each part that nothing joins to
    earth the balance of one node is replaced by "its potential is zero".

    References
    ----------
    .. [1] IEC 60050-131:2002, 131-13 (connected network), 131-15 (Kirchhoff laws).
    """
    found = Wired(
        np.empty((networks, nodes), np.complex128),
        np.empty((networks, nodes), np.int64),
        np.empty((networks, nodes), np.complex128),
        np.empty((min(whole, networks), nodes, nodes), np.complex128),
    )
    for block, mine in _blocks(networks, nodes, branches):
        _solve_block(found, block, branches, mine)
    return found


def _blocks(networks: int, nodes: int, branches: Branches) -> Iterator[tuple[slice, Places]]:
    """Some networks at a time, with the branches that are theirs."""
    order = np.argsort(branches.network, kind="stable")
    sorted_by, step = branches.network[order], max(1, BLOCK_ENTRIES // (nodes * nodes))
    for start in range(0, networks, step):
        stop = min(start + step, networks)
        begin, end = np.searchsorted(sorted_by, (start, stop)).tolist()
        yield slice(start, stop), order[begin:end]


def _solve_block(found: Wired, block: slice, branches: Branches, mine: Places) -> None:
    """Solve some networks by the branches that are theirs."""
    nodes, count = found.potential_v.shape[1], block.stop - block.start
    network, plus, minus = branches.network[mine] - block.start, branches.plus[mine], branches.minus[mine]
    y, driven = branches.admittance[mine], branches.admittance[mine] * branches.emf[mine]
    flat, joins = np.zeros(count * nodes * nodes, np.complex128), np.zeros(count * nodes * nodes, np.bool_)
    for row, column, sign in ((plus, plus, 1.0), (minus, minus, 1.0), (plus, minus, -1.0), (minus, plus, -1.0)):
        place = (network * nodes + row) * nodes + column
        np.add.at(flat, place, sign * y)
        joins[place] = True
    matrix, joined = flat.reshape(count, nodes, nodes), joins.reshape(count, nodes, nodes)
    side = np.zeros((count, nodes, nodes + 1), np.complex128)
    sources = side[:, :, 0]
    np.add.at(sources, (network, plus), driven)
    np.add.at(sources, (network, minus), -driven)
    side[:, :, 1:] = np.eye(nodes)
    reference = _references(joined)
    pinned = reference == np.arange(nodes)
    matrix[pinned] = np.broadcast_to(np.eye(nodes, dtype=np.complex128), matrix.shape)[pinned]
    side[pinned] = 0.0
    solved = np.linalg.solve(matrix, side)
    found.potential_v[block], found.reference[block] = solved[:, :, 0], reference
    found.own_ohm[block] = np.diagonal(solved[:, :, 1:], axis1=1, axis2=2)
    kept = found.transfer_ohm[block]
    kept[:] = solved[: len(kept), :, 1:]


def _references(joined: Mask) -> Places:
    """First node of each node's part: reach is doubled until it takes in all."""
    nodes = joined.shape[1]
    reach = (joined | np.eye(nodes, dtype=np.bool_)).astype(np.float32)
    for _ in range(max(1, int(np.ceil(np.log2(max(nodes, 2)))))):
        reach = (np.matmul(reach, reach) > 0.0).astype(np.float32)
    first: Places = reach.argmax(axis=2)
    return first


def contact_with_earth(wired: Wired, touched: Places, resistance_ohm: float) -> Phasor:
    """Current of a resistance put between a node and earth.

    Parameters
    ----------
    wired : Wired
        Of n networks.
    touched : (n, c) array of int
        Nodes of each network.
    resistance_ohm : float
        What joins them: a body [Ω].

    Returns
    -------
    (n, c) array of complex
        [A]; zero where nothing joins the node to earth.

    Notes
    -----
    I = U/(Z + R), where Z is the impedance between the node and earth with all sources at rest.

    References
    ----------
    .. [1] IEC 60050-131:2002, 131-15-21 (Thévenin theorem).
    """
    at = np.arange(len(touched))[:, None]
    current = wired.potential_v[at, touched] / (wired.own_ohm[at, touched] + resistance_ohm)
    return np.where(wired.reference[at, touched] == EARTH, current, 0.0)


def contact(wired: Wired, plus: Places, minus: Places, resistance_ohm: float | Array) -> tuple[Phasor, Phasor]:
    """Voltage that stands between two nodes, and the current of a resistance put between them.

    Parameters
    ----------
    wired : Wired
        Of which the first k networks were solved whole.
    plus, minus : (k, c) array of int
        Pairs of nodes of these networks.
    resistance_ohm : float or (k, 1) array
        What joins them: a body, a link [Ω].

    Returns
    -------
    voltage_v : (k, c) array of complex
        Before they are joined [V]; nan where nothing joins the two parts, for then it is not determined.
    current_a : (k, c) array of complex
        Once they are joined [A]; zero where nothing joins the two parts.

    Notes
    -----
    I = U/(Z + R), where Z is the impedance between the two nodes with all sources at rest.

    References
    ----------
    .. [1] IEC 60050-131:2002, 131-15-21 (Thévenin theorem).
    """
    at = np.arange(len(plus))[:, None]
    z = wired.transfer_ohm
    inner = z[at, plus, plus] + z[at, minus, minus] - z[at, plus, minus] - z[at, minus, plus]
    voltage = wired.potential_v[at, plus] - wired.potential_v[at, minus]
    together = wired.reference[at, plus] == wired.reference[at, minus]
    return np.where(together, voltage, np.nan), np.where(together, voltage / (inner + resistance_ohm), 0.0)


def nearest_path(networks: int, nodes: int, branches: Branches, weight: Array, to: int = EARTH) -> tuple[Array, Places]:
    """Least sum of weights from each node to earth or another node, and the next node on that way.

    Parameters
    ----------
    networks, nodes : int
        How many there are; node 0 is earth.
    branches : Branches
        Of all networks.
    weight : (k,) array
        Of each branch [Ω], not negative; inf where a branch is no way.
    to : int
        Node that the ways lead to.

    Returns
    -------
    distance : (n, m) array
        Sum along the best way [Ω]; inf where there is none.
    following : (n, m) array of int
        Next node on the way.

    References
    ----------
    .. [1] IEC 60050-131:2002, 131-13 (path).
    .. [2] R. Bellman, "On a routing problem", Quart. Appl. Math. 16, 1958, 87-90.
    """
    ways = np.flatnonzero(np.isfinite(weight))
    base = branches.network[ways] * nodes
    one, other = base + branches.plus[ways], base + branches.minus[ways]
    begin, end, long = np.concatenate([one, other]), np.concatenate([other, one]), np.tile(weight[ways], 2)
    distance = np.full(networks * nodes, np.inf)
    distance[to::nodes] = 0.0
    for _ in range(nodes):
        before = distance.copy()
        np.minimum.at(distance, begin, distance[end] + long)
        if (distance == before).all():
            break
    following = np.zeros(networks * nodes, np.int64)
    # Behind each node stands the first by which it is as near as it is; the root has none.
    nearest = np.flatnonzero((distance[begin] == distance[end] + long) & (distance[begin] > 0.0))[::-1]
    following[begin[nearest]] = end[nearest] % nodes
    return distance.reshape(networks, nodes), following.reshape(networks, nodes)
