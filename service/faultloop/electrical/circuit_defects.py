"""Names of what floats, contradicts itself or stays open in a circuit."""

from collections.abc import Iterable, Sequence

import numpy as np

from faultloop.electrical.circuit_elements import Mask, Phasor
from faultloop.electrical.circuit_equations import source_terms
from faultloop.electrical.circuit_solution import (
    CONFLICTING_SOURCES,
    IMPOSSIBLE_VALUE,
    SINGULAR,
    UNDETERMINED,
    Defect,
    Equations,
    Island,
)

AGREE = 1e-9  # sources whose sum is below this part of their sizes are taken to agree
Parts = tuple[tuple[str, ...], tuple[str, ...]]


def floating_islands(equations: Equations) -> tuple[Island, ...]:
    """Islands that no branch joins to earth.

    Parameters
    ----------
    equations : Equations
        Of n networks.

    Returns
    -------
    tuple of Island
        None where every node has a path to earth.

    References
    ----------
    .. [1] IEC 60050-131:2002, 131-13 (connected network).
    """
    layout = equations.layout
    found: dict[tuple[tuple[str, ...], str], Mask] = {}
    for at, fixing in enumerate(equations.kinds.fixings):
        here = equations.kind(at)
        if not here.any():
            continue
        for own in sorted({node for node in fixing.reference if layout.row[node] >= 0}):
            nodes = tuple(layout.nodes[node] for node, of in enumerate(fixing.reference) if of == own)
            key = (nodes, layout.nodes[own])
            found[key] = found.get(key, False) | here
    return tuple(Island(nodes, reference, networks) for (nodes, reference), networks in found.items())


def impossible_values(equations: Equations, good: Sequence[Mask]) -> list[Defect]:
    """Elements whose value is unknown or out of range.

    Parameters
    ----------
    equations : Equations
        Of n networks.
    good : sequence of (n,) array of bool
        One an element: where its values can hold.

    Returns
    -------
    list of Defect
        One an element concerned.

    References
    ----------
    .. [1] IEC 60050-131:2002 (ideal circuit elements).
    """
    named = zip(equations.circuit.elements, good, strict=True)
    shape = equations.usable.shape
    return [
        Defect(IMPOSSIBLE_VALUE, (), (element.name,), np.broadcast_to(~mask, shape))
        for element, mask in named
        if not mask.all()
    ]


def conflicting_sources(equations: Equations) -> list[Defect]:
    """Sources that contradict each other, or that drive a current that has no way back.

    Parameters
    ----------
    equations : Equations
        Of n networks.

    Returns
    -------
    list of Defect
        With the ideal parts and the sources that meet in the conflict, and the nodes where they do.

    Notes
    -----
    A sum of equations in which all unknowns cancel must have a right side of zero (Rouché and Capelli).

    References
    ----------
    .. [1] IEC 60050-131:2002, 131-15 (Kirchhoff laws).
    """
    layout = equations.layout
    found: list[tuple[Parts, Mask]] = []
    if not any(fixing.conditions for fixing in equations.kinds.fixings):
        return []
    terms = source_terms(layout, equations.laws)
    for at, fixing in enumerate(equations.kinds.fixings):
        here = equations.kind(at)
        for condition in fixing.conditions:
            shares: dict[int, Phasor] = {}
            size = np.zeros(len(here))
            for element, row, term in terms:
                shares[element] = shares.get(element, 0.0) + condition[row] * term
                size += np.abs(condition[row] * term)
            total = sum(shares.values(), np.zeros(len(here), np.complex128))
            conflict = here & (np.abs(total) > AGREE * size)
            concerned = {element for element, share in shares.items() if (conflict & (share != 0.0)).any()}
            concerned |= {one for one, row in enumerate(layout.own_unknown) if row >= 0 and condition[row] != 0.0}
            nodes = [name for name, row in zip(layout.nodes, layout.row, strict=True) if row >= 0 and condition[row]]
            found.append(((tuple(nodes), _names(equations, concerned)), conflict))
    return _merged(CONFLICTING_SOURCES, found)


def undetermined_parts(equations: Equations) -> list[Defect]:
    """Potentials and currents that nothing fixes, in an island or between its ideal parts.

    Parameters
    ----------
    equations : Equations
        Of n networks.

    Returns
    -------
    list of Defect
        With nodes whose potential and elements whose current is not determined.

    References
    ----------
    .. [1] IEC 60050-131:2002, 131-15 (Kirchhoff laws).
    """
    layout = equations.layout
    found: list[tuple[Parts, Mask]] = []
    for at, fixing in enumerate(equations.kinds.fixings):
        lost = [unknown for unknown, is_lost in enumerate(fixing.lost) if is_lost]
        nodes = tuple(name for name, row in zip(layout.nodes, layout.row, strict=True) if row in lost)
        elements = {element for element, own in enumerate(layout.own_unknown) if own in lost}
        found.append(((nodes, _names(equations, elements)), equations.kind(at) & bool(lost)))
    return _merged(UNDETERMINED, found)


def singular_networks(mask: Mask) -> list[Defect]:
    """Networks whose values cancel.

    Parameters
    ----------
    mask : (n,) array of bool
        Where the matrix has no inverse.

    Returns
    -------
    list of Defect
        At most one, without names: the whole network takes part.

    References
    ----------
    .. [1] IEC 60050-131:2002 (resonance).
    """
    return _merged(SINGULAR, [(((), ()), mask)])


def _names(equations: Equations, elements: Iterable[int]) -> tuple[str, ...]:
    """Names of elements, in the order of the circuit."""
    return tuple(equations.circuit.elements[at].name for at in sorted(elements))


def _merged(kind: str, found: Iterable[tuple[Parts, Mask]]) -> list[Defect]:
    """One defect for all networks in which the same parts are concerned."""
    masks: dict[Parts, Mask] = {}
    for parts, mask in found:
        if mask.any():
            masks[parts] = masks.get(parts, False) | mask
    return [Defect(kind, nodes, elements, mask) for (nodes, elements), mask in masks.items()]
