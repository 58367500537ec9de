"""Points: the columns of one, or of a million, measured points."""

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

from faultloop.assessment.codes import Choice, Number, Reading
from faultloop.electrical.measurement import Array
from faultloop.protection.band import Band, BandTable
from faultloop.protection.catalogue import catalogue

Ints = NDArray[np.int64]
Flags = NDArray[np.bool_]

# Row of a compiled table of devices that stands for no device: its last.
NO_DEVICE = -1
READINGS, NUMBERS, CHOICES = len(Reading.codes()), len(Number.codes()), len(Choice.codes())


@dataclass(slots=True)
class Row:
    """One point in words already turned to numbers; unknown is nan, missing or 0 as its table says.

    An overcurrent device is a row of the compiled table, or the band that the request brings along.
    """

    value: list[float] = field(default_factory=lambda: [np.nan] * READINGS)
    percent: list[float] = field(default_factory=lambda: [np.nan] * READINGS)
    constant: list[float] = field(default_factory=lambda: [np.nan] * READINGS)
    bound: list[int] = field(default_factory=lambda: [0] * READINGS)
    method: list[int] = field(default_factory=lambda: [0] * READINGS)
    numbers: list[float] = field(default_factory=lambda: [np.nan] * NUMBERS)
    choices: list[int] = field(default_factory=lambda: [0] * CHOICES)
    device: int | Band = NO_DEVICE
    upstream: list[int | Band] = field(default_factory=list)


_COLUMNS = ("value", "percent", "constant", "bound", "method", "numbers", "choices", "upstream")


@dataclass(frozen=True, slots=True)
class Points:
    """Columns of n points: readings (R, n), numbers (N, n) and choices (C, n).

    `overcurrent` is the table that devices are rows of: the catalogue's, with bands that requests brought
    along behind it.  `upstream` (U, n) are the rows of further devices in series, as many as any point has.
    """

    value: Array
    percent: Array
    constant: Array
    bound: Ints
    method: Ints
    numbers: Array
    choices: Ints
    overcurrent: BandTable
    upstream: Ints

    @property
    def count(self) -> int:
        """Number of points."""
        return int(self.value.shape[1])

    def number(self, which: int) -> Array:
        """One row of numbers, (n,)."""
        column: Array = self.numbers[which]
        return column

    def choice(self, which: int) -> Ints:
        """One row of choices, (n,)."""
        column: Ints = self.choices[which]
        return column

    @property
    def coverage(self) -> Array:
        """Scale of the uncertainties to the coverage asked for, (n,)."""
        return self.number(Number.COVERAGE_SCALE)

    def picked(self, at: Ints) -> "Points":
        """The points of these positions, repeated where a position is."""
        columns = {name: np.take(getattr(self, name), at, axis=1) for name in _COLUMNS}
        return Points(**columns, overcurrent=self.overcurrent)


def from_rows(rows: Sequence[Row]) -> Points:
    """Lay rows out as columns."""

    def floats(lists: list[list[float]]) -> Array:
        return np.ascontiguousarray(np.array(lists, dtype=np.float64).T)

    def whole(lists: list[list[int]]) -> Ints:
        return np.ascontiguousarray(np.array(lists, dtype=np.int64).T)

    overcurrent, devices = _devices(rows)
    choices = whole([row.choices for row in rows])
    choices[Choice.DEVICE] = devices[0]
    return Points(
        value=floats([row.value for row in rows]),
        percent=floats([row.percent for row in rows]),
        constant=floats([row.constant for row in rows]),
        bound=whole([row.bound for row in rows]),
        method=whole([row.method for row in rows]),
        numbers=floats([row.numbers for row in rows]),
        choices=choices,
        overcurrent=overcurrent,
        upstream=devices[1:],
    )


def _devices(rows: Sequence[Row]) -> tuple[BandTable, Ints]:
    """The table with the bands that rows bring along, and the table's row of each device, (1 + U, n)."""
    held = catalogue()
    bands: list[Band] = []

    def picked(device: int | Band) -> int:
        if isinstance(device, int):
            return device
        bands.append(device)
        return len(held.rows) + len(bands) - 1

    most = max((len(row.upstream) for row in rows), default=0)
    series = [[*map(picked, (row.device, *row.upstream)), *[NO_DEVICE] * (most - len(row.upstream))] for row in rows]
    devices: Ints = np.ascontiguousarray(np.array(series, dtype=np.int64).T)
    return held.overcurrent.extended(bands), devices
