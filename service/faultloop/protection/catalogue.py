"""All devices compiled to one table of bands for each rule set, so that a device is a row."""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from faultloop.digests import digest
from faultloop.protection.band import Band, BandTable, compile_bands
from faultloop.protection.breakers import breaker_band, breaker_table, breaker_tables
from faultloop.protection.curves import OwnCurve
from faultloop.protection.designations import Breaker, Fuse, OvercurrentDevice, ResidualDevice
from faultloop.protection.fuses import fuse_band, fuse_families
from faultloop.protection.let_through import let_through_table
from faultloop.protection.moulded_case import MouldedCase
from faultloop.protection.residual import residual_band, residual_table
from faultloop.rules.loader import LoadedRules, shipped
from faultloop.rules.sheets import RuleSet

# Devices that a request describes by points or settings, and that bring their band along.
Described = OwnCurve | MouldedCase


@dataclass(frozen=True, slots=True)
class Catalogue:
    """Compiled devices: overcurrent rows by rule set and device, residual rows by delay."""

    overcurrent: BandTable
    residual: BandTable
    rows: dict[tuple[str, OvercurrentDevice], int]
    bands: dict[tuple[str, OvercurrentDevice], Band]
    residual_rows: dict[str, int]
    residual_bands: dict[str, Band]
    digest: str


def listed_devices() -> list[OvercurrentDevice]:
    """Every overcurrent device held here, family by family."""
    breakers: list[OvercurrentDevice] = [
        Breaker(letter, rated) for letter, table in breaker_tables().items() for rated in table.ratings_a
    ]
    fuses: list[OvercurrentDevice] = [
        Fuse(f.fuse_system, r.rated_current_a) for f in fuse_families().values() for r in f.rating
    ]
    return breakers + fuses


def device_band(device: OvercurrentDevice, rules: RuleSet | None = None) -> Band:
    """Band of a device under a rule set.

    Parameters
    ----------
    device : OvercurrentDevice
        A device held here.
    rules : RuleSet, optional
        Rule set whose own printed currents stand in place of the standard's at their times.

    Returns
    -------
    Band
        Currents [A] and times [s].

    Raises
    ------
    StopIteration, KeyError
        For a device that is not held here.
    """
    band = _standard_band(device)
    for row in rules.operating_current if rules else ():
        if device.designation in row.devices:
            band = band.with_point(row.value, row.time_s)
        elif isinstance(device, Breaker) and device.characteristic in row.devices:
            band = band.with_point(row.value * device.rated_current_a, row.time_s)
    return band


@lru_cache(maxsize=128)
def bands_under(loaded: LoadedRules) -> dict[OvercurrentDevice, Band]:
    """Band of every device held here under one rule set.

    Parameters
    ----------
    loaded : LoadedRules
        A rule set, shipped or a caller's own.

    Returns
    -------
    dict of OvercurrentDevice to Band
        In the order of `listed_devices`.
    """
    return {device: device_band(device, loaded.rules) for device in listed_devices()}


def _standard_band(device: OvercurrentDevice) -> Band:
    if isinstance(device, Breaker):
        return breaker_band(device.characteristic, device.rated_current_a)
    ratings = fuse_families()[device.fuse_system].rating
    return fuse_band(next(r for r in ratings if r.rated_current_a == device.rated_current_a))


@lru_cache(maxsize=1)
def catalogue() -> Catalogue:
    """Compile every device under every shipped rule set; the last row of each table is no device."""
    bands = {
        (key, device): band for key, loaded in shipped().items() for device, band in bands_under(loaded).items()
    }
    # A time-delayed device has no band in the standards.
    residual = {"general": residual_band("general"), "selective": residual_band("selective"), "time-delayed": Band(())}
    breakers = {table.standard: table for table in breaker_tables().values()}
    told = [*breakers.values(), *fuse_families().values(), residual_table(), let_through_table()]
    return Catalogue(
        overcurrent=compile_bands(list(bands.values())),
        residual=compile_bands(list(residual.values())),
        rows={key: row for row, key in enumerate(bands)},
        bands=bands,
        residual_rows={delay: row for row, delay in enumerate(residual)},
        residual_bands=residual,
        digest=digest([sheet.model_dump(mode="json") for sheet in told]),
    )


def guaranteed(device: OvercurrentDevice | ResidualDevice | Described, rules: RuleSet) -> tuple[Band, float]:
    """Band of any device, with what its currents are counted in.

    Parameters
    ----------
    device : OvercurrentDevice, ResidualDevice, OwnCurve or MouldedCase
        Any device, held here or described.
    rules : RuleSet
        Rule set under which it is looked at.

    Returns
    -------
    band : Band
        The steps; without any where no standard held here gives times.
    scale : float
        Ampere for one unit of the band's currents [A]: 1, or the rated residual operating current.
    """
    if isinstance(device, ResidualDevice):
        return catalogue().residual_bands[device.delay], device.rated_ma / 1000.0
    if isinstance(device, Described):
        return device.band, 1.0
    return (device_band(device, rules) if device in listed_devices() else Band(())), 1.0


def device_standard(device: OvercurrentDevice | ResidualDevice) -> str:
    """Standard that a device is held by.

    Parameters
    ----------
    device : OvercurrentDevice or ResidualDevice
        A device of a family held here.

    Returns
    -------
    str
        Designation of the standard.
    """
    if isinstance(device, ResidualDevice):
        return residual_table().standard
    if isinstance(device, Breaker):
        return breaker_table(device.characteristic).standard
    return fuse_families()[device.fuse_system].standard


def residual_multiple(delay: str, time_s: float) -> float:
    """Least multiple of IΔn at which a residual device is sure to operate within a time.

    Parameters
    ----------
    delay : {"general", "selective", "time-delayed"}
        Delay of the device.
    time_s : float
        Required time [s].

    Returns
    -------
    float
        Multiple of the rated residual operating current [1]; inf where none guarantees the time.
    """
    row = np.array([catalogue().residual_rows[delay]])
    return float(catalogue().residual.operating_current(row, np.array([time_s]))[0])
