"""A circuit, and the places of its nodes, branches and unknowns."""

from dataclasses import dataclass
from functools import lru_cache

from faultloop.electrical.circuit_elements import (
    Capacitor,
    CurrentSource,
    Element,
    IdealTransformer,
    Impedance,
    Inductor,
    Resistor,
    VoltageSource,
)
from faultloop.electrical.measurement import Array

ADMITTANCE, IMPEDANCE, SOURCE, CURRENT, RATIO = "yzejr"
LETTERS: dict[type[Element], str] = {
    Resistor: ADMITTANCE,
    Capacitor: ADMITTANCE,
    Inductor: IMPEDANCE,
    Impedance: IMPEDANCE,
    VoltageSource: SOURCE,
    CurrentSource: CURRENT,
    IdealTransformer: RATIO,
}
WITH_OWN_EQUATION = (IMPEDANCE, SOURCE, RATIO)
LAYOUTS = 256
Branches = tuple[tuple[str, str, str], ...]


@dataclass(frozen=True, slots=True)
class Circuit:
    """Many networks of one shape: the same elements between the same nodes, (n,) values each.

    The frequency [Hz] is (n,) or (1,) too.  Potentials are counted from ``earth``, where it is among the nodes.
    """

    elements: tuple[Element, ...]
    frequency_hz: Array
    earth: str = "earth"


@dataclass(frozen=True, slots=True)
class Layout:
    """Names and places of a circuit's nodes, branches and unknowns.

    ``kinds`` has a letter an element: y admittance, z impedance, e impedance with a source, j current, r ratio.
    ``row`` is the unknown of each node (-1 for earth), ``terminals`` are the nodes of each branch, ``first_branch`` and
    ``own_unknown`` the branch and the current unknown (-1 if none) of each element.
    """

    kinds: str
    nodes: tuple[str, ...]
    branches: tuple[str, ...]
    terminals: tuple[tuple[int, int], ...]
    first_branch: tuple[int, ...]
    row: tuple[int, ...]
    own_unknown: tuple[int, ...]
    unknowns: int


def element_branches(element: Element) -> Branches:
    """Branches of an element, by name and nodes.

    Parameters
    ----------
    element : Element
        Any.

    Returns
    -------
    tuple of (name, plus, minus)
        One, or the two windings of a transformer.

    References
    ----------
    .. [1] IEC 60050-131:2002, 131-13 (branch, node).
    """
    if isinstance(element, IdealTransformer):
        return (
            (f"{element.name}.primary", element.primary_plus, element.primary_minus),
            (f"{element.name}.secondary", element.secondary_plus, element.secondary_minus),
        )
    return ((element.name, element.plus, element.minus),)


def lay_out(circuit: Circuit) -> Layout:
    """Give every node, branch and unknown its place.

    Parameters
    ----------
    circuit : Circuit
        Any.

    Returns
    -------
    Layout
        Nodes in the order of their names: the order in which elements are listed picks no reference.

    Raises
    ------
    ValueError
        If the circuit has no element, or two of its branches have one name.

    Notes
    -----
    Current unknowns come before potentials.  Elimination then takes its pivots from the current balances, which are
    plus or minus one, and sums them to those of whole islands: the nanosiemens that hold a floating bench are added to
    each other and not to the load current.

    References
    ----------
    .. [1] C.-W. Ho, A. E. Ruehli, P. A. Brennan, "The modified nodal approach to network analysis",
       IEEE Trans. Circuits Syst. 22(6), 1975, 504-509.
    """
    if not circuit.elements:
        raise ValueError("a circuit needs at least one element")
    shape = tuple((LETTERS[type(element)], element_branches(element)) for element in circuit.elements)
    return _laid_out(shape, circuit.earth)


@lru_cache(maxsize=LAYOUTS)
def _laid_out(shape: tuple[tuple[str, Branches], ...], earth: str) -> Layout:
    """Layout of what has these letters and branches."""
    branches = [branch for _, own in shape for branch in own]
    names = [name for name, _, _ in branches]
    twice = sorted({name for name in names if names.count(name) > 1})
    if twice:
        raise ValueError(f"two parts of the circuit have one name: {', '.join(twice)}")
    nodes = tuple(sorted({node for _, *ends in branches for node in ends}))
    live = [node for node in nodes if node != earth]
    first_branch, own_unknown, equations = [], [], 0
    for letter, own in shape:
        first_branch.append(names.index(own[0][0]))
        own_unknown.append(equations if letter in WITH_OWN_EQUATION else -1)
        equations += letter in WITH_OWN_EQUATION
    return Layout(
        kinds="".join(letter for letter, _ in shape),
        nodes=nodes,
        branches=tuple(names),
        terminals=tuple((nodes.index(plus), nodes.index(minus)) for _, plus, minus in branches),
        first_branch=tuple(first_branch),
        row=tuple(equations + live.index(node) if node in live else -1 for node in nodes),
        own_unknown=tuple(own_unknown),
        unknowns=equations + len(live),
    )


def branch_ends(layout: Layout, branch: int) -> list[tuple[int, int]]:
    """Unknowns of the nodes of a branch.

    Parameters
    ----------
    layout : Layout
        Places of the unknowns.
    branch : int
        Index of the branch.

    Returns
    -------
    list of (unknown, sign)
        One where the branch leaves a node and minus one where it arrives; earth has no unknown.

    References
    ----------
    .. [1] IEC 60050-131:2002, 131-13 (branch, node).
    """
    rows = (layout.row[node] for node in layout.terminals[branch])
    return [(row, sign) for row, sign in zip(rows, (1, -1), strict=True) if row >= 0]
