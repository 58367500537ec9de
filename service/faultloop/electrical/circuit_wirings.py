"""Many networks over the same nodes, each wired in its own way: a bench and everything that may be changed at it.

`circuits.solve` takes networks of one shape, with an element for whatever any of them has.  Where each network is wired
otherwise nearly all elements would be open in nearly all of them, so here a network is a list of branches, and all are
stamped, counted from their references and solved at once.  Every branch is an admittance above zero; none is ideal.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from faultloop.electrical.circuit_elements import Mask, Phasor
from faultloop.electrical.measurement import Array

Places = NDArray[np.int64]
EARTH = 0


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
    transfer_ohm : (n, m, m) array of complex
        Potential of each node for one ampere driven out of the reference into each node [Ω].
    """

    potential_v: Phasor
    reference: Places
    transfer_ohm: Phasor


def solve_wirings(networks: int, nodes: int, branches: Branches) -> Wired:
    """Potentials of many networks, and how each node answers to a current driven into another.

    Parameters
    ----------
    networks, nodes : int
        How many there are; node 0 is earth.
    branches : Branches
        At least none; every admittance is finite and not zero.

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
    network, plus, minus, y = branches.network, branches.plus, branches.minus, branches.admittance
    size = nodes * nodes
    flat, base = np.zeros(networks * size, np.complex128), network * size
    joins = np.zeros(networks * size, np.bool_)
    for row, column, sign in ((plus, plus, 1.0), (minus, minus, 1.0), (plus, minus, -1.0), (minus, plus, -1.0)):
        place = base + row * nodes + column
        np.add.at(flat, place, sign * y)
        joins[place] = True
    matrix, joined = flat.reshape(networks, nodes, nodes), joins.reshape(networks, nodes, nodes)
    side = np.zeros((networks, nodes, nodes + 1), np.complex128)
    driven = y * branches.emf
    sources = side[:, :, 0]
    np.add.at(sources, (network, plus), driven)
    np.add.at(sources, (network, minus), -driven)
    side[:, :, 1:] = np.eye(nodes)
    reference = _references(joined)
    pinned = reference == np.arange(nodes)
    matrix[pinned] = np.broadcast_to(np.eye(nodes, dtype=np.complex128), matrix.shape)[pinned]
    side[pinned] = 0.0
    found: Phasor = np.asarray(np.linalg.solve(matrix, side), np.complex128)
    return Wired(found[:, :, 0], reference, found[:, :, 1:])


def _references(joined: Mask) -> Places:
    """First node of each node's part: reach is doubled until it takes in all."""
    nodes = joined.shape[1]
    reach = (joined | np.eye(nodes, dtype=np.bool_)).astype(np.float32)
    for _ in range(max(1, int(np.ceil(np.log2(max(nodes, 2)))))):
        reach = (np.matmul(reach, reach) > 0.0).astype(np.float32)
    first: Places = reach.argmax(axis=2)
    return first


def contact(wired: Wired, plus: Places, minus: Places, resistance_ohm: float | Array) -> tuple[Phasor, Phasor]:
    """Voltage that stands between two nodes, and the current of a resistance put between them.

    Parameters
    ----------
    wired : Wired
        Of n networks.
    plus, minus : (n, c) array of int
        Pairs of nodes of each network.
    resistance_ohm : float or (n, 1) array
        What joins them: a body, a link [Ω].

    Returns
    -------
    voltage_v : (n, c) array of complex
        Before they are joined [V]; nan where nothing joins the two parts, for then it is not determined.
    current_a : (n, c) array of complex
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


def nearest_path(networks: int, nodes: int, branches: Branches, weight: Array) -> tuple[Array, Places]:
    """Least sum of weights from each node to earth, and the next node on that way.

    Parameters
    ----------
    networks, nodes : int
        How many there are; node 0 is earth.
    branches : Branches
        Of all networks.
    weight : (k,) array
        Of each branch [Ω], not negative; inf where a branch is no way.

    Returns
    -------
    distance : (n, m) array
        Sum along the best way [Ω]; inf where there is none.
    following : (n, m) array of int
        Next node on the way to earth.

    References
    ----------
    .. [1] IEC 60050-131:2002, 131-13 (path).
    .. [2] R. Bellman, "On a routing problem", Quart. Appl. Math. 16, 1958, 87-90.
    """
    step = np.full((networks, nodes, nodes), np.inf)
    for one, other in ((branches.plus, branches.minus), (branches.minus, branches.plus)):
        np.minimum.at(step, (branches.network, one, other), weight)
    distance = np.full((networks, nodes), np.inf)
    distance[:, EARTH] = 0.0
    following = np.zeros((networks, nodes), np.int64)
    for _ in range(nodes):
        sums = step + distance[:, None, :]
        best = sums.min(axis=2)
        shorter = best < distance
        if not shorter.any():
            break
        following = np.where(shorter, sums.argmin(axis=2), following)
        distance = np.where(shorter, best, distance)
    return distance, following
