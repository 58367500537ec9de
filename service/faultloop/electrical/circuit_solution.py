"""What is known of a circuit once it is solved, and what can be read from it."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from faultloop.electrical.circuit_elements import Law, Mask, Phasor
from faultloop.electrical.circuit_islands import Kinds
from faultloop.electrical.circuit_layout import Circuit, Layout
from faultloop.electrical.measurement import Array

IMPOSSIBLE_VALUE = "impossible-value"
CONFLICTING_SOURCES = "conflicting-sources"
UNDETERMINED = "undetermined"
SINGULAR = "singular"


@dataclass(frozen=True, slots=True)
class Defect:
    """What keeps some networks from an answer: the parts concerned, by name, and an (n,) mask of the networks.

    ``impossible-value``: a value is unknown or out of range.  ``conflicting-sources``: sources that no ordinary
    impedance separates contradict each other, or a current source has no way back.  ``singular``: the values cancel, as
    in resonance without loss.  These leave the whole network unknown.  ``undetermined``: nothing fixes just these
    potentials or currents (links in a loop share a current in no known way).
    """

    kind: str
    nodes: tuple[str, ...]
    elements: tuple[str, ...]
    networks: Mask


@dataclass(frozen=True, slots=True)
class Island:
    """Nodes that no branch joins to earth, the node that they are counted from, and an (n,) mask of the networks."""

    nodes: tuple[str, ...]
    reference: str
    networks: Mask


@dataclass(frozen=True, slots=True)
class Equations:
    """A circuit made ready: its laws, how each of its networks is made solvable, and whose values can all hold."""

    circuit: Circuit
    layout: Layout
    laws: tuple[Law, ...]
    kinds: Kinds
    usable: Mask

    def kind(self, at: int) -> Mask:
        """Usable networks of one kind.

        Parameters
        ----------
        at : int
            Index of the kind.

        Returns
        -------
        (n,) array of bool
            Of a network with an impossible value nothing is said, for it is not known what is open in it.

        References
        ----------
        .. [1] IEC 60050-131:2002, 131-13 (connected network).
        """
        return np.asarray((self.kinds.which == at) & self.usable, np.bool_)


@dataclass(frozen=True, slots=True)
class Solution:
    """Potentials (n, nodes) [V] from each node's reference, branch currents (n, branches) [A]; unknown ones are nan.

    ``reference`` (n, nodes) is the index of the node that each node is counted from.
    """

    equations: Equations
    potential_v: Phasor
    current_a: Phasor
    reference: NDArray[np.intp]
    islands: tuple[Island, ...]
    defects: tuple[Defect, ...]

    @property
    def nodes(self) -> tuple[str, ...]:
        """Names along the second axis of the potentials."""
        return self.equations.layout.nodes

    @property
    def branches(self) -> tuple[str, ...]:
        """Names along the second axis of the currents."""
        return self.equations.layout.branches


def voltage_between(solution: Solution, plus: str, minus: str) -> Phasor:
    """Voltage of one node over another.

    Parameters
    ----------
    solution : Solution
        Of n networks.
    plus, minus : str
        Names of nodes.

    Returns
    -------
    (n,) array of complex
        [V]; nan where nothing joins the two, for then the voltage is not determined.

    Raises
    ------
    ValueError
        If there is no such node.

    References
    ----------
    .. [1] IEC 60050-131:2002, 131-11 (voltage).
    """
    unknown = sorted({plus, minus} - set(solution.nodes))
    if unknown:
        raise ValueError(f"the circuit has no node called {' or '.join(unknown)}")
    high, low = solution.nodes.index(plus), solution.nodes.index(minus)
    joined = solution.reference[:, high] == solution.reference[:, low]
    return np.where(joined, solution.potential_v[:, high] - solution.potential_v[:, low], np.nan)


def current_through(solution: Solution, branch: str) -> Phasor:
    """Current of a branch from its plus to its minus.

    Parameters
    ----------
    solution : Solution
        Of n networks.
    branch : str
        Name of an element, or of a winding (``name.primary``, ``name.secondary``).

    Returns
    -------
    (n,) array of complex
        [A].

    Raises
    ------
    ValueError
        If there is no such branch.

    References
    ----------
    .. [1] IEC 60050-131:2002, 131-11 (current).
    """
    if branch not in solution.branches:
        raise ValueError(f"the circuit has no branch called {branch}")
    return solution.current_a[:, solution.branches.index(branch)]


def power(solution: Solution) -> Phasor:
    """Complex power that each branch takes up.

    Parameters
    ----------
    solution : Solution
        Of n networks.

    Returns
    -------
    (n, branches) array of complex
        S = U·I* [VA], active power in the real part, reactive in the imaginary; negative from a branch that delivers,
        zero where no current flows, nan where it is unknown.

    References
    ----------
    .. [1] IEC 60050-131:2002, 131-11-39 (complex power).
    """
    plus, minus = (list(ends) for ends in zip(*solution.equations.layout.terminals, strict=True))
    voltage = solution.potential_v[:, plus] - solution.potential_v[:, minus]
    return np.where(solution.current_a == 0.0, 0.0, voltage * np.conj(solution.current_a))


def power_imbalance(solution: Solution) -> Array:
    """Power that is left over when all branches are summed, as a part of all that flows.

    Parameters
    ----------
    solution : Solution
        Of n networks.

    Returns
    -------
    (n,) array
        |ΣS|/Σ|S| [1], rounding only; zero where no power flows, nan where a branch is unknown.

    References
    ----------
    .. [1] B. D. H. Tellegen, "A general network theorem, with applications", Philips Res. Rep. 7, 1952, 259-269.
    .. [2] IEC 60050-131:2002, 131-11-39 (complex power).
    """
    total = np.zeros(len(solution.current_a), np.complex128)
    size = np.zeros(len(solution.current_a))
    for branch in power(solution).T:
        total, size = total + branch, size + np.abs(branch)
    return np.abs(total) / np.where(size == 0.0, 1.0, size)
