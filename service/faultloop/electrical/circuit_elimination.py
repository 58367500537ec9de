"""Networks of one kind solved together by the program of their elimination."""

from collections.abc import Sequence

import numpy as np

from faultloop.electrical.circuit_elements import AdmittanceLaw, CurrentLaw, ImpedanceLaw, Law, Mask, Phasor, RatioLaw
from faultloop.electrical.circuit_tape import ONE, WATCHED, ZERO, Program

BLOCK = 1024  # networks at a time, so that their rows stay in the cache
WHOLE = 8  # rows are filled up to a multiple of this: no network stands where its arithmetic is done otherwise
LOST = 1e3  # a pivot that has lost more than three figures of what it was made of is not trusted


def eliminated(program: Program, laws: Sequence[Law], count: int, results: int) -> tuple[Phasor, Mask]:
    """Results of a program for many networks.

    Parameters
    ----------
    program : Program
        Of their kind.
    laws : sequence of Law
        One an element, (n,) or (1,) coefficients.
    count : int
        n.
    results : int
        How many results the program gives.

    Returns
    -------
    (results, n) array of complex
        Potentials, then currents.
    (n,) array of bool
        Where they can be trusted.

    Notes
    -----
    Every operation is done entry by entry, so that a network's answer does not depend on its neighbours.

    References
    ----------
    .. [1] F. G. Gustavson, W. Liniger, R. Willoughby, "Symbolic generation of an optimal Crout algorithm for sparse
       systems of linear equations", J. ACM 17(1), 1970, 87-109.
    """
    whole = -(-count // WHOLE) * WHOLE
    found, sound = np.empty((results, whole), np.complex128), np.empty(whole, np.bool_)
    found[list(program.zeros)] = 0.0
    values = [(row, *_value(laws[element], name)) for (element, name), row in program.loaded.items()]
    width = min(BLOCK, whole)
    rows = np.zeros((program.rows, width), np.complex128)
    rows[ONE], rows[ZERO] = 1.0, 0.0
    with np.errstate(all="ignore"):
        for start in range(0, whole, BLOCK):
            stop = min(start + BLOCK, whole)
            used = rows[:, : stop - start]
            places = [*used, *used.view(np.float64), *found[:, start:stop]] if stop - start == width else [*(row for row in used), *(row.view(np.float64) for row in used), *found[:, start:stop]]
            chosen = slice(start, min(stop, count))
            for row, real, imag in values:
                _load(used[row, : chosen.stop - start], real, imag, chosen)
            used[WATCHED] = 0.0
            for action, left, right, out in program.steps:
                action(places[left], places[right], places[out])
            peak = used[WATCHED]
            sound[start:stop] = (peak.real < LOST * LOST) & (peak.imag < LOST * LOST)
    return found[:, :count], sound[:count]


def _value(law: Law, name: str):
    """Real and imaginary part of a value that a program loads; no imaginary part where the first is complex."""
    if isinstance(law, AdmittanceLaw):
        return law.real, law.imag
    if isinstance(law, CurrentLaw):
        return law.injected, None
    if isinstance(law, RatioLaw):
        return law.ratio, None
    return (law.emf, None) if name == "emf" else (law.resistance, law.reactance)


def _load(row: Phasor, real, imag, chosen: slice) -> None:
    """Put the values of some networks into a row."""
    if imag is None:
        row[:] = real if len(real) == 1 else real[chosen]
    else:
        row.real = real if len(real) == 1 else real[chosen]
        row.imag = imag if len(imag) == 1 else imag[chosen]
