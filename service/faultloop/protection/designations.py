"""Trade shorthand ("B32", "K20", "gG 63", "BS 88-2 gG 63", "BS 3036 30", "30 mA", "300 mA S") <-> device."""

import re
from dataclasses import dataclass
from functools import lru_cache
from typing import Literal, cast

from faultloop.protection.breakers import Characteristic, breaker_table
from faultloop.protection.fuses import fuse_families
from faultloop.protection.residual import residual_table

ResidualType = Literal["AC", "A", "F", "B"]
Delay = Literal["general", "selective", "time-delayed"]

_BREAKER = re.compile(r"(?:MCB |RCBO )?([BCDKZ])\s?(\d{1,4}(?:\.\d)?)(?: A)?", re.IGNORECASE | re.ASCII)
_MOTOR_FUSE = re.compile(r"(?:BS 88-2 )?aM ?\d{1,4}(?:\.\d)?(?: A)?", re.IGNORECASE | re.ASCII)
NO_MOTOR_FUSES = (
    "aM fuse-links are not held, because no gates of IEC 60269-2 were at hand; give the maker's points as a curve"
)
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

    @property
    def utilisation_category(self) -> str | None:
        """Utilisation category; older British fuses have none."""
        return fuse_families()[self.fuse_system].utilisation_category


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


@lru_cache(maxsize=1)
def _fuse_patterns() -> list[tuple[str, re.Pattern[str]]]:
    """How the fuses of each system are written; a name that ends in a figure needs a space before the rating."""
    patterns = []
    for system, family in fuse_families().items():
        for way in (family.designation, *family.also_written):
            name = re.escape(way).replace(r"\ ", " ?") + (" " if way[-1].isdigit() else " ?")
            patterns.append((system, re.compile(name + r"(\d{1,4}(?:\.\d)?)(?: A)?", re.IGNORECASE | re.ASCII)))
    return patterns


def _fuse(told: str) -> Fuse | None:
    for system, pattern in _fuse_patterns():
        if match := pattern.fullmatch(told):
            return Fuse(system, float(match[1]))
    return None


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
        return breaker_table(device.characteristic).ratings_a
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
        Trade shorthand, such as "B32", "gG 63", "BS 88-2 gG 63" or "BS 3036 30".

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
    device: OvercurrentDevice | None = _fuse(told)
    if match := _BREAKER.fullmatch(told):
        device = Breaker(cast(Characteristic, match[1].upper()), float(match[2]))
    if device is None:
        motor = f"{NO_MOTOR_FUSES}; " if _MOTOR_FUSE.fullmatch(told) else ""
        raise UnknownDesignation(
            motor + "expected a breaker such as B32, C16 or K20, or a fuse such as gG 63, BS 88-2 gG 63 or BS 3036 30"
        )
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
