"""Points: the columns of one, or of a million, measured points."""

from collections.abc import Sequence
from dataclasses import dataclass, field, fields

import numpy as np
from numpy.typing import NDArray

from faultloop.electrical.measurement import Array

Ints = NDArray[np.int64]
Flags = NDArray[np.bool_]


class Codes:
    """Small whole numbers by name: plain ints, because numpy takes an enum's members many times slower."""

    @classmethod
    def codes(cls) -> dict[str, int]:
        """Every code by its word."""
        return {name.lower().replace("_", "-"): code for name, code in vars(cls).items() if name.isupper()}

    @classmethod
    def word(cls, code: int) -> str:
        """The word of a code."""
        return next(word for word, known in cls.codes().items() if known == code)


class Reading(Codes):
    """Rows of the table of readings."""

    LOOP = 0
    EXTERNAL = 1
    LINE_NEUTRAL = 2
    LINE_PLUS_PROTECTIVE = 3
    PROTECTIVE = 4
    ELECTRODE = 5
    TIME_1 = 6
    TIME_2 = 7
    TIME_5 = 8
    ORIGIN_LINE_NEUTRAL = 9
    TIME_HALF = 10
    INSULATION = 11


class Bound(Codes):
    """How a reading's value is meant."""

    MISSING = 0
    EXACT = 1
    ABOVE = 2
    BELOW = 3


class Method(Codes):
    """How a reading was taken."""

    UNSTATED = 0
    NO_TRIP = 1
    HIGH_CURRENT = 2
    DEAD = 3
    CALCULATED = 4
    DECLARED = 5


class Number(Codes):
    """Rows of the table of numbers; nan where unknown."""

    VOLTAGE = 0
    RATED_CURRENT = 1
    DEVICE_RATED_CURRENT = 2
    RESIDUAL_MA = 3
    RESIDUAL_GREATEST_MA = 4
    RESIDUAL_LEAST_MA = 5
    LINE_MM2 = 6
    NEUTRAL_MM2 = 7
    PROTECTIVE_MM2 = 8
    LINE_OHM_PER_KM = 9
    PROTECTIVE_OHM_PER_KM = 10
    LENGTH_M = 11
    SERVICE_C = 12
    TEST_C = 13
    ADIABATIC_K = 14
    BREAKING_CAPACITY_KA = 15
    BOARD_CURRENT_KA = 16
    CARRYING_CAPACITY_A = 17
    COVERAGE_SCALE = 18
    RESIDUAL_QUICK_MA = 19
    DECLARED_CURRENT_KA = 20
    ASSEMBLY_RATING_KA = 21


class Choice(Codes):
    """Rows of the table of choices: small whole numbers that pick a row or a case."""

    DEVICE = 0
    RESIDUAL = 1
    RULES = 2
    TEMPERATURE_POLICY = 3
    DECISION = 4
    EARTHING = 5
    CURRENT = 6
    ROLE = 7
    FEEDS = 8
    USERS = 9
    DESIGNATED = 10
    RING = 11
    INFERABLE = 12
    POLARITY = 13
    MEANS_OF_EARTHING = 14
    LOADS_CONNECTED = 15
    MULTIPOLE = 16


class Earthing(Codes):
    """Earthing of the supply."""

    UNKNOWN = 0
    TN_S = 1
    TN_C_S = 2
    TN_C = 3
    TT = 4
    IT = 5
    SEPARATED = 6


class Role(Codes):
    """Role of the circuit."""

    UNKNOWN = 0
    FINAL = 1
    DISTRIBUTION = 2


class Feeds(Codes):
    """What the circuit feeds."""

    UNKNOWN = 0
    SOCKET_OUTLETS = 1
    FIXED_EQUIPMENT = 2
    MOBILE_OUTDOORS = 3


class Users(Codes):
    """Who uses the outlet."""

    ORDINARY = 0
    INSTRUCTED = 1
    SKILLED = 2


class TemperaturePolicy(Codes):
    """How a cold reading is set against a hot limit."""

    SPLIT = 0
    TWO_THIRDS = 1
    FOUR_FIFTHS = 2
    NONE = 3


class Decision(Codes):
    """Whether the endangering end or the nominal value decides."""

    GUARDED = 0
    SIMPLE = 1


class Polarity(Codes):
    """Polarity as tested."""

    UNKNOWN = 0
    CORRECT = 1
    REVERSED = 2


class MeansOfEarthing(Codes):
    """What is known of the means of earthing at the origin."""

    UNKNOWN = 0
    PROVEN = 1
    DOUBTFUL = 2
    LOST = 3


class Current(Codes):
    """Kind of current."""

    AC = 0
    DC = 1


READINGS, NUMBERS, CHOICES = len(Reading.codes()), len(Number.codes()), len(Choice.codes())


@dataclass(slots=True)
class Row:
    """One point in words already turned to numbers; unknown is nan, missing or 0 as its table says."""

    value: list[float] = field(default_factory=lambda: [np.nan] * READINGS)
    percent: list[float] = field(default_factory=lambda: [np.nan] * READINGS)
    constant: list[float] = field(default_factory=lambda: [np.nan] * READINGS)
    bound: list[int] = field(default_factory=lambda: [0] * READINGS)
    method: list[int] = field(default_factory=lambda: [0] * READINGS)
    numbers: list[float] = field(default_factory=lambda: [np.nan] * NUMBERS)
    choices: list[int] = field(default_factory=lambda: [0] * CHOICES)


@dataclass(frozen=True, slots=True)
class Points:
    """Columns of n points: readings (R, n), numbers (N, n) and choices (C, n)."""

    value: Array
    percent: Array
    constant: Array
    bound: Ints
    method: Ints
    numbers: Array
    choices: Ints

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
        return Points(**{column.name: np.take(getattr(self, column.name), at, axis=1) for column in fields(self)})


def from_rows(rows: Sequence[Row]) -> Points:
    """Lay rows out as columns."""

    def floats(lists: list[list[float]]) -> Array:
        return np.ascontiguousarray(np.array(lists, dtype=np.float64).T)

    def whole(lists: list[list[int]]) -> Ints:
        return np.ascontiguousarray(np.array(lists, dtype=np.int64).T)

    return Points(
        value=floats([row.value for row in rows]),
        percent=floats([row.percent for row in rows]),
        constant=floats([row.constant for row in rows]),
        bound=whole([row.bound for row in rows]),
        method=whole([row.method for row in rows]),
        numbers=floats([row.numbers for row in rows]),
        choices=whole([row.choices for row in rows]),
    )
