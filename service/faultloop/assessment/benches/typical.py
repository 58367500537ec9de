"""What is taken where nothing is stated of a bench: intervals with their source, as data."""

from functools import lru_cache
from importlib import resources
from typing import Literal

from faultloop.rules.strict import Sheet, Sourced, read_sheet, read_table


class Typical(Sourced):
    """An interval that holds most of what is met, and what is usual in it [in its unit]."""

    least: float
    usual: float
    greatest: float
    unit: Literal["nF", "ohm", "%", "V", "A", "1"]


class TypicalTable(Sheet):
    """Everything that the file says."""

    filter_class_1: Typical
    filter_class_2: Typical
    interwinding: Typical
    cable: Typical
    signal_ground_to_case: Typical
    source_impedance: Typical
    short_circuit_voltage: Typical
    earth_loop: Typical
    protective_conductor: Typical
    differential_probe: Typical
    short_circuit_from: Typical
    joined_directly: Typical
    mains: Typical
    extra_low_dc: Typical
    residual_stays: Typical
    links: dict[str, Typical]


@lru_cache(maxsize=1)
def typical() -> TypicalTable:
    """Load the table that comes with the package."""
    file = resources.files("faultloop.assessment.benches") / "data" / "typical.toml"
    return read_sheet(TypicalTable, read_table(file), file.name)
