"""Miniature circuit-breakers by IEC 60898-1 (and the overcurrent part of IEC 61009-1)."""

from functools import lru_cache
from importlib import resources
from typing import Literal

from faultloop.protection.band import Band
from faultloop.rules.strict import Parameter, Sheet, Text, read_sheet, read_table


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
    B: Magnetic
    C: Magnetic
    D: Magnetic


class BreakerTable(Sheet):
    """Everything that the file of breakers says."""

    kind: Literal["miniature-circuit-breaker"]
    standard: Text
    ratings_a: list[float]
    conventional: Conventional
    thermal: Thermal
    instantaneous: Instantaneous


@lru_cache(maxsize=1)
def breaker_table() -> BreakerTable:
    """Load the table of breakers that comes with the package."""
    file = resources.files("faultloop.protection") / "data" / "breakers.toml"
    return read_sheet(BreakerTable, read_table(file), file.name)


def breaker_band(characteristic: Literal["B", "C", "D"], rated_current_a: float) -> Band:
    """Guaranteed band of a breaker.

    Parameters
    ----------
    characteristic : {"B", "C", "D"}
        Instantaneous characteristic.
    rated_current_a : float
        Rated current [A].

    Returns
    -------
    Band
        Steps at the tested currents: conventional (1.13 and 1.45 In), thermal (2.55 In) and
        instantaneous (3 and 5, 5 and 10, 10 and 20 In); currents in ampere, times in second.

    References
    ----------
    .. [1] IEC 60898-1:2015, Tables 2 and 7.
    """
    table = breaker_table()
    rated, conventional, thermal = rated_current_a, table.conventional, table.thermal
    magnetic: Magnetic = getattr(table.instantaneous, characteristic)
    hours = conventional.time_to_63_a if rated <= 63 else conventional.time_above_63_a
    greatest = thermal.greatest_time_to_32_a if rated <= 32 else thermal.greatest_time_above_32_a
    instant = table.instantaneous.time.value
    return Band(
        slow=(
            (conventional.tripping.value * rated, hours.value * 3600.0),
            (thermal.multiple.value * rated, greatest.value),
            (magnetic.trip.value * rated, instant),
        ),
        fast=(
            (conventional.non_tripping.value * rated, hours.value * 3600.0),
            (thermal.multiple.value * rated, thermal.least_time.value),
            (magnetic.hold.value * rated, instant),
        ),
    )
