"""Trade shorthand ("B32", "gG 63", "BS 88-2 gG 63", "30 mA", "300 mA S") <-> device."""

import re
from dataclasses import dataclass
from typing import Literal, cast

from faultloop.protection.breakers import breaker_table
from faultloop.protection.fuses import fuse_families
from faultloop.protection.residual import residual_table

Characteristic = Literal["B", "C", "D"]
ResidualType = Literal["AC", "A", "F", "B"]
Delay = Literal["general", "selective", "time-delayed"]

_BREAKER = re.compile(r"(?:MCB |RCBO )?([BCD])\s?(\d{1,4}(?:\.\d)?)(?: A)?", re.IGNORECASE | re.ASCII)
_FUSE = re.compile(r"(BS 88-2 )?gG ?(\d{1,4}(?:\.\d)?)(?: A)?", re.IGNORECASE | re.ASCII)
_RESIDUAL = re.compile(r"(\d{1,4}) ?mA(?: (AC|A|F|B))?(?: (S))?", re.IGNORECASE | re.ASCII)


class UnknownDesignation(ValueError):
    """A designation that names no device held here; the message says what was expected."""


@dataclass(frozen=True, slots=True)
class Breaker:
    """A miniature circuit-breaker, or the overcurrent part of a combined device."""

    characteristic: Characteristic
    rated_current_a: float

    @property
    def designation(self) -> str:
        """Trade shorthand."""
        return f"{self.characteristic}{self.rated_current_a:g}"


@dataclass(frozen=True, slots=True)
class Fuse:
    """A fuse-link of one system."""

    fuse_system: str
    rated_current_a: float

    @property
    def designation(self) -> str:
        """Trade shorthand."""
        return f"{fuse_families()[self.fuse_system].designation} {self.rated_current_a:g}"


@dataclass(frozen=True, slots=True)
class ResidualDevice:
    """A residual current device."""

    rated_ma: float
    residual_type: ResidualType | None = None
    delay: Delay = "general"

    @property
    def designation(self) -> str:
        """Trade shorthand."""
        kind = f" {self.residual_type}" if self.residual_type else ""
        mark = {"general": "", "selective": " S", "time-delayed": " time-delayed"}[self.delay]
        return f"{self.rated_ma:g} mA{kind}{mark}"


OvercurrentDevice = Breaker | Fuse


def known_ratings(device: OvercurrentDevice) -> list[float]:
    """Rated currents held for a device's family.

    Parameters
    ----------
    device : OvercurrentDevice
        A breaker or fuse of any rated current.

    Returns
    -------
    list of float
        Rated currents [A]; empty for an unknown fuse system.
    """
    if isinstance(device, Breaker):
        return breaker_table().ratings_a
    family = fuse_families().get(device.fuse_system)
    return [rating.rated_current_a for rating in family.rating] if family else []


def refuse_unknown(device: OvercurrentDevice) -> None:
    """Refuse a device whose rated current the family's table does not hold.

    Parameters
    ----------
    device : OvercurrentDevice
        A breaker or fuse.

    Raises
    ------
    UnknownDesignation
        If the rated current is not held; the message lists those that are.
    """
    ratings = known_ratings(device)
    if device.rated_current_a not in ratings:
        listed = ", ".join(f"{rating:g}" for rating in ratings)
        raise UnknownDesignation(f"no such rated current; this family is held for {listed} A")


def parse_overcurrent(text: str) -> OvercurrentDevice:
    """Read an overcurrent device's designation.

    Parameters
    ----------
    text : str
        Trade shorthand, such as "B32", "gG 63" or "BS 88-2 gG 63".

    Returns
    -------
    OvercurrentDevice
        The device.

    Raises
    ------
    UnknownDesignation
        If the text cannot be read or the rated current is not held; the message says what was expected.
    """
    told = " ".join(text.split())
    device: OvercurrentDevice
    if match := _BREAKER.fullmatch(told):
        device = Breaker(cast(Characteristic, match[1].upper()), float(match[2]))
    elif match := _FUSE.fullmatch(told):
        device = Fuse("bs-88-2" if match[1] else "iec-60269", float(match[2]))
    else:
        raise UnknownDesignation("expected a breaker such as B32, C16 or D10, or a fuse such as gG 63 or BS 88-2 gG 63")
    refuse_unknown(device)
    return device


def parse_residual(text: str) -> ResidualDevice:
    """Read a residual device's designation.

    Parameters
    ----------
    text : str
        Trade shorthand, such as "30 mA", "30 mA A" or "300 mA S".

    Returns
    -------
    ResidualDevice
        The device.

    Raises
    ------
    UnknownDesignation
        If the text cannot be read or the rating is not held; the message says what was expected.
    """
    match = _RESIDUAL.fullmatch(" ".join(text.split()))
    if not match or float(match[1]) not in residual_table().rated_residual_operating_currents_ma:
        listed = ", ".join(f"{ma:g}" for ma in residual_table().rated_residual_operating_currents_ma)
        raise UnknownDesignation(f"expected a residual device such as 30 mA, 30 mA A or 300 mA S; held for {listed} mA")
    kind = cast(ResidualType, match[2].upper()) if match[2] else None
    return ResidualDevice(float(match[1]), kind, "selective" if match[3] else "general")


def parse_device(text: str) -> OvercurrentDevice | ResidualDevice:
    """Read the designation of either kind of device.

    Parameters
    ----------
    text : str
        Trade shorthand.

    Returns
    -------
    OvercurrentDevice or ResidualDevice
        The device; a designation that holds "mA" is a residual device's.

    Raises
    ------
    UnknownDesignation
        If the text cannot be read; the message says what was expected.
    """
    if "ma" in text.lower():
        return parse_residual(text)
    return parse_overcurrent(text)
