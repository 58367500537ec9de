"""Miniature circuit-breakers by IEC 60898-1 (and the overcurrent part of IEC 61009-1), and K and Z by IEC 60947-2."""

from functools import lru_cache
from importlib import resources
from typing import Literal

from faultloop.protection.band import Band
from faultloop.rules.strict import Parameter, Sheet, Text, read_sheet, read_table

Characteristic = Literal["B", "C", "D", "K", "Z"]
FILES = ("breakers.toml", "breakers_industrial.toml")


class Conventional(Sheet):
    """Conventional currents and times."""

    non_tripping: Parameter
    tripping: Parameter
    time_to_63_a: Parameter
    time_above_63_a: Parameter


class Thermal(Sheet):
    """The thermal test point."""

    multiple: Parameter
    least_time: Parameter
    greatest_time_to_32_a: Parameter
    greatest_time_above_32_a: Parameter


class Magnetic(Sheet):
    """Multiples at which a characteristic holds and trips at once."""

    hold: Parameter
    trip: Parameter


class Instantaneous(Sheet):
    """Instantaneous tripping of the characteristics."""

    time: Parameter
    B: Magnetic | None = None
    C: Magnetic | None = None
    D: Magnetic | None = None
    K: Magnetic | None = None
    Z: Magnetic | None = None

    def held(self) -> dict[Characteristic, Magnetic]:
        """The characteristics of this file."""
        told: dict[Characteristic, Magnetic | None] = {"B": self.B, "C": self.C, "D": self.D, "K": self.K, "Z": self.Z}
        return {letter: magnetic for letter, magnetic in told.items() if magnetic is not None}


class BreakerTable(Sheet):
    """Everything that one file of breakers says; the industrial standard has no thermal test point."""

    kind: Literal["miniature-circuit-breaker"]
    standard: Text
    ratings_a: list[float]
    magnetic_tolerance: Parameter | None = None
    conventional: Conventional
    thermal: Thermal | None = None
    instantaneous: Instantaneous


@lru_cache(maxsize=1)
def breaker_tables() -> dict[Characteristic, BreakerTable]:
    """Load the tables of breakers that come with the package, by characteristic."""
    folder = resources.files("faultloop.protection") / "data"
    tables = [read_sheet(BreakerTable, read_table(folder / name), name) for name in FILES]
    return {letter: table for table in tables for letter in table.instantaneous.held()}


def breaker_table(characteristic: Characteristic = "B") -> BreakerTable:
    """Give the table that holds a characteristic.

    Parameters
    ----------
    characteristic : {"B", "C", "D", "K", "Z"}
        Instantaneous characteristic.

    Returns
    -------
    BreakerTable
        What its file says; the currents in it are multiples of the rated current.
    """
    return breaker_tables()[characteristic]


def breaker_band(characteristic: Characteristic, rated_current_a: float) -> Band:
    """Guaranteed band of a breaker.

    Parameters
    ----------
    characteristic : {"B", "C", "D", "K", "Z"}
        Instantaneous characteristic.
    rated_current_a : float
        Rated current [A].

    Returns
    -------
    Band
        Steps at the tested currents: conventional (1.13 and 1.45 In; 1.05 and 1.30 for K and Z), thermal
        (2.55 In; none for K and Z) and instantaneous (B 3 and 5, C 5 and 10, D 10 and 20, K 8 and 14, Z 2
        and 3 In); currents in ampere, times in second.

    References
    ----------
    .. [1] IEC 60898-1:2015, Tables 2 and 7.
    .. [2] IEC 60947-2:2006, Table 6 and 8.3.3.1.2.
    """
    table = breaker_table(characteristic)
    rated, conventional, instant = rated_current_a, table.conventional, table.instantaneous.time.value
    magnetic = table.instantaneous.held()[characteristic]
    hours = conventional.time_to_63_a if rated <= 63 else conventional.time_above_63_a
    slow, fast = _thermal(table.thermal, rated) if table.thermal else ((), ())
    return Band(
        slow=(
            (conventional.tripping.value * rated, hours.value * 3600.0),
            *slow,
            (magnetic.trip.value * rated, instant),
        ),
        fast=(
            (conventional.non_tripping.value * rated, hours.value * 3600.0),
            *fast,
            (magnetic.hold.value * rated, instant),
        ),
    )


def _thermal(thermal: Thermal, rated: float) -> tuple[tuple[tuple[float, float]], tuple[tuple[float, float]]]:
    """Thermal point of both edges."""
    greatest = thermal.greatest_time_to_32_a if rated <= 32 else thermal.greatest_time_above_32_a
    current = thermal.multiple.value * rated
    return ((current, greatest.value),), ((current, thermal.least_time.value),)
