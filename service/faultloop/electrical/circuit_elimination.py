"""Networks of one kind solved together by the program of their elimination."""

from collections.abc import Callable, Sequence
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
from faultloop.electrical.circuit_tape import ONE, WATCHED, Program
from faultloop.electrical.measurement import Array

ENTRIES = 1 << 18  # of the rows at a time, 4 MB: so many networks that a call costs little, few enough for the cache
WHOLE = 8  # rows are filled up to a multiple of this: no network stands where its arithmetic is done otherwise
LOST = 1e3  # a sum that has lost more than three figures of what it was made of is not trusted
LACKING = 1e-13  # what a balance may lack, as volts or amperes beside those of the network
UNIT = np.ones(1)
Load = tuple[Callable[..., Any], int, str, Sequence[Array]]  # what is done, the row, its part, and the columns


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
    blocks = max(1, -(-count * program.rows // ENTRIES))
    width = max(WHOLE, -(-count // (blocks * WHOLE)) * WHOLE)
    rows = np.zeros((program.rows, width), np.complex128)
    rows[ONE] = 1.0
    constant, varying = _loads(program, laws)
    with np.errstate(all="ignore"):
        for action, at, part, ends in constant:
            action(*ends, getattr(rows[at], part))
        for start in range(0, whole, width):
            block = slice(start, min(start + width, whole))
            sound[block] = _run(program, varying, rows[:, : block.stop - start], found[:, block], block)
    return found[:, :count], sound[:count]


def _run(program: Program, loads: Sequence[Load], rows: Phasor, results: Phasor, block: slice) -> Mask:
    """Run a program for a block of networks, and tell which results can be trusted."""
    for action, at, part, ends in loads:
        row = rows[at] if at < len(rows) else results[at - len(rows)]
        some = [column if len(column) == 1 else column[block] for column in ends]
        length = max(len(column) for column in some)
        action(*some, getattr(row if length == 1 else row[:length], part))
    rows[WATCHED.start : WATCHED.stop] = 0.0
    places = [*rows, *results, *rows.view(np.float64), *results.view(np.float64)]
    for action, left, right, out in program.steps:
        action(places[left], places[right], places[out])
    loss, volts_lacking, volts, amperes_lacking, amperes = (rows[at].real + rows[at].imag for at in WATCHED)
    bound = LACKING * LACKING
    sound = (loss < LOST * LOST) & (volts_lacking <= bound * volts) & (amperes_lacking <= bound * amperes)
    return np.asarray(sound, np.bool_)


def _loads(program: Program, laws: Sequence[Law]) -> tuple[list[Load], list[Load]]:
    """What is to be done to fill the rows of values: once, and again for each block."""
    constant: list[Load] = []
    varying: list[Load] = []
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
