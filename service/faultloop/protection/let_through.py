"""Let-through energy: how much an overcurrent device lets pass in one quick interruption."""

import math
from functools import lru_cache
from importlib import resources
from typing import Literal

from faultloop.rules.strict import Sheet, Sourced, read_sheet, read_table, refuse_duplicates


class EnergyRow(Sourced):
    """Greatest let-through energy of an energy-limiting class."""

    energy_limiting_class: int
    characteristic: Literal["B", "C"]
    above_a: float
    to_a: float
    breaking_capacity_ka: float
    value: float
    unit: Literal["A2*s"]


class Combination(Sourced):
    """A device and a cable that guides print as a standard circuit."""

    characteristics: list[Literal["B", "C"]]
    to_a: float
    line_mm2: float
    protective_mm2: float
    current_to_ka: float


class LetThroughTable(Sheet):
    """Everything that the file of let-through energies says."""

    kind: Literal["let-through"]
    energy_limiting: list[EnergyRow]
    combination: list[Combination]


@lru_cache(maxsize=1)
def let_through_table() -> LetThroughTable:
    """Load the table of let-through energies that comes with the package."""
    file = resources.files("faultloop.protection") / "data" / "let_through.toml"
    table = read_sheet(LetThroughTable, read_table(file), file.name)
    marks = [
        (r.energy_limiting_class, r.characteristic, r.above_a, r.breaking_capacity_ka) for r in table.energy_limiting
    ]
    refuse_duplicates(file.name, "energy_limiting", list(marks))
    return table


@lru_cache(maxsize=1024)
def breaker_energy(
    energy_limiting_class: int, characteristic: str, rated_current_a: float, current_ka: float
) -> float | None:
    """Greatest let-through energy of a breaker at currents up to one of the table's columns.

    Parameters
    ----------
    energy_limiting_class : int
        Class marked on the device; only class 3 has limits held here.
    characteristic : str
        Instantaneous characteristic.
    rated_current_a : float
        Rated current [A].
    current_ka : float
        Greatest prospective current, or rated short-circuit capacity [kA]; between columns the next greater one.

    Returns
    -------
    float or None
        I²t [A²s]; None where the standard sets no limit.

    References
    ----------
    .. [1] EN 60898-1, Annex ZA; its columns are taken by prospective current, as tables of protective
       conductors for these devices do (common practice).
    """
    kind = (energy_limiting_class, characteristic)
    rows = [
        row
        for row in let_through_table().energy_limiting
        if (row.energy_limiting_class, row.characteristic) == kind
        and row.above_a < rated_current_a <= row.to_a
        and current_ka <= row.breaking_capacity_ka
    ]
    return min(rows, key=lambda row: row.breaking_capacity_ka).value if rows else None


def combined_to_ka(characteristic: str, rated_current_a: float, line_mm2: float, protective_mm2: float) -> float:
    """Prospective current to which a breaker and a copper cable are a standard combination.

    Parameters
    ----------
    characteristic : str
        Instantaneous characteristic.
    rated_current_a : float
        Rated current [A].
    line_mm2, protective_mm2 : float
        Areas of the conductors [mm²].

    Returns
    -------
    float
        Current [kA]; nan where no guide held here prints the combination.
    """
    areas = (line_mm2, protective_mm2)
    rows = [r for r in let_through_table().combination if (r.line_mm2, r.protective_mm2) == areas]
    held = [r.current_to_ka for r in rows if characteristic in r.characteristics and rated_current_a <= r.to_a]
    return max(held, default=math.nan)
