"""Networks of one kind solved together by the program of their elimination."""

from collections.abc import Sequence
from typing import Any

import numpy as np

from faultloop.electrical.circuit_elements import AdmittanceLaw, CurrentLaw, ImpedanceLaw, Law, Mask, Phasor, RatioLaw
from faultloop.electrical.circuit_tape import (
    AMPERES,
    AMPERES_LACKING,
    LOSS,
    ONE,
    VOLTS,
    VOLTS_LACKING,
    WATCHED,
    Program,
)

BLOCK = 2560  # networks at a time, so that their rows stay in the cache
UNIT = np.ones(1)
WHOLE = 8  # rows are filled up to a multiple of this: no network stands where its arithmetic is done otherwise
LOST = 1e3  # a pivot that has lost more than three figures of what it was made of is not trusted
LACKING = 1e-13  # what a balance may lack, as volts or amperes beside those of the network


def eliminated(program: Program, laws: Sequence[Law], count: int) -> tuple[Phasor, Mask]:
    """Results of a program for many networks.

    Parameters
    ----------
    program : Program
        Of their kind.
    laws : sequence of Law
        One an element, (n,) or (1,) coefficients.
    count : int
        n.

    Returns
    -------
    (results, n) array of complex
        Potentials, then currents.
    (n,) array of bool
        Where they can be trusted: nothing has lost more than three figures, and what the balances lack is less than a
        part of 1e-13, as volts beside those of the network or as amperes beside its currents.

    Notes
    -----
    Every operation is done entry by entry, so that a network's answer does not depend on its neighbours.

    References
    ----------
    .. [1] F. G. Gustavson, W. Liniger, R. Willoughby, "Symbolic generation of an optimal Crout algorithm for sparse
       systems of linear equations", J. ACM 17(1), 1970, 87-109.
    .. [2] IEEE 754-2019, 5.4.1 (arithmetic operations: the result depends on the operands alone).
    """
    whole = -(-count // WHOLE) * WHOLE
    found, sound = np.empty((program.results, whole), np.complex128), np.empty(whole, np.bool_)
    found[list(program.zeros)] = 0.0
    width = min(BLOCK, whole)
    rows = np.zeros((program.rows, width), np.complex128)
    rows[ONE] = 1.0
    columns = _loaded(rows, program, laws)
    with np.errstate(all="ignore"):
        for start in range(0, whole, BLOCK):
            block = slice(start, min(start + BLOCK, whole))
            used, results = rows[:, : block.stop - start], found[:, block]
            for action, part, *ends in columns:
                action(*(column if len(column) == 1 else column[block] for column in ends), part[: min(block.stop, count) - start])
            used[WATCHED.start : WATCHED.stop] = 0.0
            places = [*used, *results, *used.view(np.float64), *results.view(np.float64)]
            for action, left, right, out in program.steps:
                action(places[left], places[right], places[out])
            sound[block] = _sound(used)
    return found[:, :count], sound[:count]


def _sound(rows: Phasor) -> Mask:
    """Where what was watched is small."""
    totals = {at: rows[at].real + rows[at].imag for at in WATCHED}
    sound = totals[LOSS] < LOST * LOST
    sound &= totals[VOLTS_LACKING] <= LACKING * LACKING * totals[VOLTS]
    return sound & (totals[AMPERES_LACKING] <= LACKING * LACKING * totals[AMPERES])


def _loaded(rows: Phasor, program: Program, laws: Sequence[Law]) -> list[tuple[Any, ...]]:
    """Put what holds for all networks into its rows; the rest, as what is to be done block by block."""
    rest = []
    for (element, name), at in program.loaded.items():
        for action, part, *columns in _parts(rows[at], laws[element], name):
            if all(len(column) == 1 for column in columns):
                action(*columns, part)
            else:
                rest.append((action, part, *columns))
    return rest


def _parts(row: Phasor, law: Law, name: str) -> Sequence[tuple[Any, ...]]:
    """What is done to fill a row, where to, and the columns of a law to do it with."""
    if isinstance(law, AdmittanceLaw):
        return (np.divide, row.real, UNIT, law.resistance), (np.multiply, row.imag, law.siemens, law.nanofarads)
    if isinstance(law, CurrentLaw):
        return ((np.positive, row, law.injected),)
    if isinstance(law, RatioLaw):
        return ((np.positive, row, law.ratio),)
    if name == "emf":
        return ((np.positive, row, law.emf),)
    return (np.positive, row.real, law.resistance), (np.positive, row.imag, law.reactance)
