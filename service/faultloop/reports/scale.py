"""Logarithmic axes in whole decades: where a value lies, its grid lines and its labels."""

import math
from collections.abc import Callable, Iterable, Iterator
from dataclasses import dataclass

NO_BREAK = "\u00a0"
# What an axis is stretched for; whatever lies beyond, a current of a slip of the pen, is put on its end.
LEAST_DRAWN, GREATEST_DRAWN = 1e-7, 1e10


def quantity(value: float, small: tuple[float, str], plain: str, large: tuple[float, str] | None = None) -> str:
    """A value to four significant digits in the prefix that the trade reads it in."""
    factor, unit = small if value < 1 else (1.0, plain)
    if large is not None and value >= large[0]:
        factor, unit = 1 / large[0], large[1]
    return f"{float(f'{value * factor:.4g}'):g}{NO_BREAK}{unit}"


def ampere(value: float) -> str:
    """A current in mA, A or kA."""
    return quantity(value, (1000.0, "mA"), "A", (1000.0, "kA")) if value else f"0{NO_BREAK}A"


def second(value: float) -> str:
    """A time in ms or s."""
    return quantity(value, (1000.0, "ms"), "s") if value else f"0{NO_BREAK}s"


@dataclass(frozen=True, slots=True)
class Axis:
    """One axis: from 10^low to 10^high, laid on a length that begins at `start` (and may run backwards)."""

    low: int
    high: int
    start: float
    length: float
    label: Callable[[float], str]
    room: float

    @property
    def least(self) -> float:
        """Value at the beginning."""
        return 10.0**self.low

    @property
    def greatest(self) -> float:
        """Value at the end."""
        return 10.0**self.high

    def at(self, value: float) -> float:
        """Place of a value; what lies beyond an end is put on it."""
        inside = min(max(value, self.least), self.greatest)
        share = (math.log10(inside) - self.low) / (self.high - self.low)
        return round(self.start + share * self.length, 2)

    def lines(self) -> Iterator[tuple[float, bool]]:
        """Values of the grid lines, and whether each begins a decade."""
        for decade in range(self.low, self.high):
            yield from ((digit * 10.0**decade, digit == 1) for digit in range(1, 10))
        yield self.greatest, True

    def ticks(self) -> Iterator[tuple[float, str]]:
        """Values that are labelled: every decade, and 2 and 5 between where there is room for the words."""
        decade_length = abs(self.length) / (self.high - self.low)
        digits = (1, 2, 5) if decade_length * math.log10(2) >= self.room else (1,)
        for decade in range(self.low, self.high):
            yield from ((digit * 10.0**decade, self.label(digit * 10.0**decade)) for digit in digits)
        yield self.greatest, self.label(self.greatest)


def decades(values: Iterable[float], least_count: int = 2) -> tuple[int, int]:
    """Whole decades that hold all values with some room at either end."""
    known = [math.log10(value) for value in values if LEAST_DRAWN <= value <= GREATEST_DRAWN]
    if not known:
        return 0, 4
    low, high = math.floor(min(known) - 0.05), math.ceil(max(known) + 0.05)
    while high - low < least_count:
        high += 1
    return low, high
