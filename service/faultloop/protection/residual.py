"""Residual current devices by IEC 61008-1 and IEC 61009-1, sinusoidal residual current."""

from functools import lru_cache
from importlib import resources
from typing import Literal

from faultloop.protection.band import Band
from faultloop.rules.strict import Parameter, Sheet, Text, read_sheet, read_table


class Step(Sheet):
    """Times at one multiple of the rated residual operating current."""

    multiple: float
    greatest: Parameter
    least: Parameter | None = None


class ResidualTable(Sheet):
    """Everything that the file of residual devices says."""

    kind: Literal["residual-current-device"]
    standard: Text
    rated_residual_operating_currents_ma: list[float]
    general: list[Step]
    selective: list[Step]


@lru_cache(maxsize=1)
def residual_table() -> ResidualTable:
    """Load the table of residual devices that comes with the package."""
    file = resources.files("faultloop.protection") / "data" / "residual.toml"
    return read_sheet(ResidualTable, read_table(file), file.name)


def residual_band(delay: Literal["general", "selective"]) -> Band:
    """Guaranteed band of a residual device, in multiples of its rated residual operating current.

    Parameters
    ----------
    delay : {"general", "selective"}
        Without delay, or type S.  A time-delayed device has no band in these standards.

    Returns
    -------
    Band
        Steps at 1, 2 and 5 IΔn (currents as multiples [1], times in second); the fast edge of a
        selective device holds its non-actuating times.

    References
    ----------
    .. [1] IEC 61008-1:2010, Table 1.
    """
    steps: list[Step] = getattr(residual_table(), delay)
    slow = tuple((step.multiple, step.greatest.value) for step in steps)
    fast = tuple((step.multiple, step.least.value) for step in steps if step.least is not None)
    return Band(slow, fast)
