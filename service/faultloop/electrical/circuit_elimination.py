"""Networks of one kind solved together by the program of their elimination."""

from collections.abc import Sequence
from typing import Any

import numpy as np

from faultloop.electrical.circuit_elements import (
    NOUGHT,
    AdmittanceLaw,
    CurrentLaw,
    ImpedanceLaw,
    Law,
    Mask,
    Phasor,
)
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

ENTRIES = 1 << 18  # of the rows at a time, 4 MB: so many networks that a call costs little, and few enough for the cache
UNIT = np.ones(1)
Load = tuple[Any, int, str, list[Any]]  # what is done, the row, its part, and the columns it is done with
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
    blocks = max(1, -(-count * program.rows // ENTRIES))
    width = -(-count // (blocks * WHOLE)) * WHOLE
    whole = -(-count // WHOLE) * WHOLE
    found, sound = np.empty((program.results, whole), np.complex128), np.empty(whole, np.bool_)
    found[list(program.zeros)] = 0.0
    rows = np.zeros((program.rows, width), np.complex128)
    rows[ONE] = 1.0
    constant, varying = _loads(program, laws)
    for action, at, part, ends in constant:
        action(*ends, getattr(rows[at], part))
    with np.errstate(all="ignore"):
        for start in range(0, whole, max(width, 1)):
            block = slice(start, min(start + width, whole))
            used, results = rows[:, : block.stop - start], found[:, block]
            for action, at, part, ends in varying:
                row = rows[at] if at < program.rows else results[at - program.rows]
                some = (column if len(column) == 1 else column[block] for column in ends)
                action(*some, getattr(row[: min(block.stop, count) - start], part))
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


def _loads(program: Program, laws: Sequence[Law]) -> tuple[list[Load], list[Load]]:
    """What is to be done to fill the rows of values: once, and again for each block."""
    constant, varying = [], []
    for (element, name), at in program.loaded.items():
        for action, part, *columns in _parts(laws[element], name):
            once = at < program.rows and all(len(column) == 1 for column in columns)
            (constant if once else varying).append((action, at, part, columns))
    return constant, varying


def _parts(law: Law, name: str) -> Sequence[tuple[Any, ...]]:
    """What is done to fill a row: to which part of it, with which columns of a law."""
    if isinstance(law, AdmittanceLaw):
        return (np.divide, "real", UNIT, law.resistance), (np.multiply, "imag", law.siemens, law.nanofarads)
    if isinstance(law, ImpedanceLaw) and name == "impedance":
        return (np.positive, "real", law.resistance), (np.positive, "imag", law.reactance)
    if isinstance(law, ImpedanceLaw):
        return (np.positive, "real", law.emf.real), (np.positive, "imag", law.emf.imag)
    if isinstance(law, CurrentLaw):
        return (np.positive, "real", law.injected.real), (np.positive, "imag", law.injected.imag)
    return (np.positive, "real", law.ratio), (np.positive, "imag", NOUGHT)
