"""Conductor tables: resistance per length, service temperature and adiabatic factor k."""

from functools import lru_cache
from importlib import resources
from typing import Literal

from faultloop.rules.strict import Sheet, Sourced, read_sheet, read_table, refuse_duplicates

Material = Literal["copper", "aluminium"]
Insulation = Literal["pvc", "xlpe", "epr", "rubber", "mineral"]


class ResistanceRow(Sourced):
    """Greatest resistance at 20 °C of one rigid conductor."""

    material: Material
    area_mm2: float
    value: float
    unit: Literal["ohm/km"]


class TemperatureRow(Sourced):
    """Greatest service temperature of one insulation."""

    insulation: Insulation
    value: float
    unit: Literal["degC"]


class AdiabaticRow(Sourced):
    """Adiabatic factor of a conductor in a cable."""

    material: Material
    insulation: Insulation
    above_mm2: float = 0.0
    to_mm2: float | None = None
    value: float
    unit: Literal["A*s^0.5/mm2"]

    def holds(self, material: str, insulation: str, area_mm2: float) -> bool:
        """Whether the row is for this conductor."""
        inside = self.above_mm2 < area_mm2 and (self.to_mm2 is None or area_mm2 <= self.to_mm2)
        return inside and (self.material, self.insulation) == (material, insulation)


class ProtectiveSizeRow(Sourced):
    """Least protective conductor by the size of the line conductor: a share of it (unit 1), or an area."""

    above_mm2: float
    to_mm2: float | None = None
    value: float
    unit: Literal["1", "mm2"]

    def least(self, line_mm2: float) -> float:
        """Least protective conductor of the same metal [mm²]."""
        return self.value * line_mm2 if self.unit == "1" else self.value


class LoadingRow(Sourced):
    """Greatest rated current of a device per area of its line conductor."""

    material: Material
    value: float
    unit: Literal["A/mm2"]


class ConductorTables(Sheet):
    """Everything that the file of conductors says."""

    resistance: list[ResistanceRow]
    service_temperature: list[TemperatureRow]
    adiabatic: list[AdiabaticRow]
    protective_size: list[ProtectiveSizeRow]
    loading: list[LoadingRow]


@lru_cache(maxsize=1)
def conductor_tables() -> ConductorTables:
    """Load the conductor tables that come with the package."""
    file = resources.files("faultloop.rules") / "data" / "conductors.toml"
    tables = read_sheet(ConductorTables, read_table(file), file.name)
    refuse_duplicates(file.name, "resistance", [(r.material, r.area_mm2) for r in tables.resistance])
    refuse_duplicates(file.name, "service_temperature", [(r.insulation,) for r in tables.service_temperature])
    refuse_duplicates(file.name, "adiabatic", [(r.material, r.insulation, r.above_mm2) for r in tables.adiabatic])
    return tables


@lru_cache(maxsize=4096)
def ohm_per_km(material: str, area_mm2: float) -> float | None:
    """Resistance per length at 20 °C of a standard size; None for any other."""
    rows = conductor_tables().resistance
    return next((r.value for r in rows if (r.material, r.area_mm2) == (material, area_mm2)), None)


@lru_cache(maxsize=64)
def service_temperature(insulation: str) -> float | None:
    """Greatest service temperature of an insulation [°C]; None where the table has none."""
    return next((r.value for r in conductor_tables().service_temperature if r.insulation == insulation), None)


@lru_cache(maxsize=4096)
def adiabatic_k(material: str, insulation: str, area_mm2: float) -> float | None:
    """Adiabatic factor k of a core in a cable [A·s^½/mm²]; None where the table has none."""
    rows = conductor_tables().adiabatic
    return next((r.value for r in rows if r.holds(material, insulation, area_mm2)), None)


@lru_cache(maxsize=4096)
def protective_size(line_mm2: float, line_k: float, protective_k: float) -> float:
    """Least protective conductor by the table of sizes.

    Parameters
    ----------
    line_mm2 : float
        Area of the line conductor [mm²].
    line_k, protective_k : float
        Adiabatic factors of the two [A·s^½/mm²]; alike for the same metal and insulation.

    Returns
    -------
    float
        S_p = S(table)·k1/k2 [mm²].

    References
    ----------
    .. [1] IEC 60364-5-54:2011, 543.1.1 and Table 54.2.
    """
    rows = conductor_tables().protective_size
    row = next(r for r in rows if r.above_mm2 < line_mm2 and (r.to_mm2 is None or line_mm2 <= r.to_mm2))
    return row.least(line_mm2) * line_k / protective_k


@lru_cache(maxsize=8)
def greatest_loading(material: str) -> float:
    """Greatest rated current of a device per area of its line conductor [A/mm²]; 0 where the table has none."""
    return next((row.value for row in conductor_tables().loading if row.material == material), 0.0)
