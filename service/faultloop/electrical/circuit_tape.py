"""Arithmetic written down once and done for many networks: operations on rows, one entry of a row a network."""

from collections.abc import Callable, Iterable, Iterator, Mapping
from dataclasses import dataclass, field
from typing import Any

import numpy as np

MULTIPLY, ADD, SUBTRACT, DIVIDE = np.multiply, np.add, np.subtract, np.divide
# Rows that every tape has; after one and zero, those that sum the squares of what is watched.
ONE, ZERO, LOSS, VOLTS_LACKING, VOLTS, AMPERES_LACKING, AMPERES = range(7)
WATCHED = range(LOSS, AMPERES + 1)
Value = tuple[int, int] | None  # sign and number of a row; None is zero in every network
Step = tuple[Callable[..., Any], int, int, int]  # what is done, the rows it is done to, the row that takes the result


@dataclass(frozen=True, slots=True, eq=False)
class Program:
    """Steps on ``rows`` rows of complex numbers, and on ``results`` more.

    ``loaded`` are the rows that hold a value of an element until it is needed no more; those among the first ``rows``
    hold it all along.  Row ``rows + results + k`` is row k as pairs of real numbers.  ``zeros`` are the results that
    are zero in every network.
    """

    rows: int
    results: int
    loaded: Mapping[tuple[int, str], int]
    steps: tuple[Step, ...]
    zeros: tuple[int, ...]


@dataclass(slots=True)
class Tape:
    """Operations as they are written down, each to a row of its own; signs are carried beside, and cost nothing."""

    steps: list[Step] = field(default_factory=list)
    loaded: dict[tuple[int, str], int] = field(default_factory=dict)
    results: dict[int, int] = field(default_factory=dict)
    zeros: list[int] = field(default_factory=list)
    count: int = WATCHED.stop

    def load(self, element: int, name: str) -> Value:
        """Take a value of an element.

        Parameters
        ----------
        element : int
            Its index.
        name : str
            Of the value.

        Returns
        -------
        Value
            The same whenever it is asked for.

        References
        ----------
        .. [1] IEEE 754-2019, 5.4.1 (arithmetic operations).
        """
        if (element, name) not in self.loaded:
            self.loaded[element, name] = self._new()
        return 1, self.loaded[element, name]

    def times(self, one: Value, other: Value) -> Value:
        """Multiply.

        Parameters
        ----------
        one, other : Value
            Factors.

        Returns
        -------
        Value
            Their product.

        References
        ----------
        .. [1] IEEE 754-2019, 5.4.1 (arithmetic operations).
        """
        if one is None or other is None:
            return None
        sign = one[0] * other[0]
        if ONE in (one[1], other[1]):
            return sign, one[1] + other[1]
        return sign, self._write(MULTIPLY, one[1], other[1])

    def plus(self, one: Value, other: Value) -> Value:
        """Add.

        Parameters
        ----------
        one, other : Value
            Terms.

        Returns
        -------
        Value
            Their sum; none where they are the same with opposite signs.

        References
        ----------
        .. [1] IEEE 754-2019, 5.4.1 (arithmetic operations).
        """
        if one is None or other is None:
            return other if one is None else one
        if one[0] == other[0]:
            return one[0], self._write(ADD, one[1], other[1])
        return None if one[1] == other[1] else (one[0], self._write(SUBTRACT, one[1], other[1]))

    def minus(self, one: Value, other: Value) -> Value:
        """Subtract.

        Parameters
        ----------
        one, other : Value
            Terms.

        Returns
        -------
        Value
            The first less the second.

        References
        ----------
        .. [1] IEEE 754-2019, 5.4.1 (arithmetic operations).
        """
        return self.plus(one, negative(other))

    def total(self, terms: Iterable[Value]) -> Value:
        """Add up.

        Parameters
        ----------
        terms : iterable of Value
            Terms, in this order.

        Returns
        -------
        Value
            Their sum.

        References
        ----------
        .. [1] IEEE 754-2019, 5.4.1 (arithmetic operations).
        """
        found: Value = None
        for term in terms:
            found = self.plus(found, term)
        return found

    def inverse(self, value: Value) -> Value:
        """Reciprocal.

        Parameters
        ----------
        value : Value
            Any but none.

        Returns
        -------
        Value
            One over it.

        References
        ----------
        .. [1] IEEE 754-2019, 5.4.1 (arithmetic operations).
        """
        assert value is not None
        return value if value[1] == ONE else (value[0], self._write(DIVIDE, ONE, value[1]))

    def watch(self, value: Value, total: int) -> None:
        """Add the squares of the real and imaginary part of a value to a total.

        Parameters
        ----------
        value : Value
            Any.
        total : int
            One of WATCHED.

        References
        ----------
        .. [1] IEEE 754-2019, 5.4.1 (arithmetic operations).
        """
        if value is not None and value[1] != ONE:
            self.steps.append((ADD, value[1], total, total))

    def result(self, at: int, value: Value) -> Value:
        """Give a value out.

        Parameters
        ----------
        at : int
            Which result it is.
        value : Value
            Any.

        Returns
        -------
        Value
            The same with its sign taken up.

        References
        ----------
        .. [1] IEEE 754-2019, 5.4.1 (arithmetic operations).
        """
        if value is None:
            self.zeros.append(at)
            return None
        made = self.steps[-1][3] if self.steps else ONE
        row = value[1] if value[0] > 0 and value[1] == made and made not in self.results else None
        if row is None:
            row = self._write(ADD if value[0] > 0 else SUBTRACT, ZERO, value[1])
        self.results[row] = at
        return 1, row

    def program(self) -> Program:
        """Bring the rows down to few, each used again when its value is needed no more.

        Returns
        -------
        Program
            Ready to run.

        References
        ----------
        .. [1] M. Poletto, V. Sarkar, "Linear scan register allocation", ACM TOPLAS 21(5), 1999, 895-913.
        """
        last = {row: at for at, (_, *ends, _) in enumerate(self.steps) for row in ends}
        place = {row: -1 - at for row, at in self.results.items()}  # below zero until the number of rows is known
        loaded = set(self.loaded.values())
        for at, (_, *ends, out) in enumerate(self.steps):
            for row in ends:  # a value waits where the result will stand that it is needed for last
                if out in self.results and row in loaded and row not in place and last[row] == at:
                    place[row] = place[out]
                    break
        kept = [row for row in (*range(WATCHED.stop), *self.loaded.values()) if row not in place]
        place |= {row: at for at, row in enumerate(kept)}
        free: list[int] = []
        rows = len(kept)
        steps: list[Step] = []
        for at, (action, left, right, out) in enumerate(self.steps):
            step = (action, place[left], place[right])
            free += [place[row] for row in {left, right} if place[row] >= len(kept) and last[row] == at]
            if out not in place:
                place[out] = free.pop() if free else rows
                rows = max(rows, place[out] + 1)
            steps.append((*step, place[out]))
        results = len(self.results) + len(self.zeros)
        where = {name: place[row] if place[row] >= 0 else rows - place[row] for name, row in self.loaded.items()}
        return Program(rows + 1, results, where, tuple(_settled(steps, rows, results)), tuple(self.zeros))

    def _new(self) -> int:
        """A row that is not used yet."""
        self.count += 1
        return self.count - 1

    def _write(self, action: Callable[..., Any], left: int, right: int) -> int:
        """Write a step down; its result is a new row."""
        out = self._new()
        self.steps.append((action, left, right, out))
        return out


def _settled(steps: Iterable[Step], scratch: int, results: int) -> Iterator[Step]:
    """Steps with the places of results, and squares where something is watched."""
    first = scratch + 1
    reals = first + results
    for action, *ends in steps:
        left, right, out = (row if row >= 0 else first - 1 - row for row in ends)
        if out in WATCHED:
            yield MULTIPLY, reals + left, reals + left, reals + scratch
            yield ADD, reals + scratch, reals + out, reals + out
        else:
            yield action, left, right, out


def negative(value: Value) -> Value:
    """Turn the sign.

    Parameters
    ----------
    value : Value
        Any.

    Returns
    -------
    Value
        Its negative, at no cost.

    References
    ----------
    .. [1] IEEE 754-2019, 5.4.1 (arithmetic operations).
    """
    return None if value is None else (-value[0], value[1])
