"""Numbers of a bench's answer: intervals as bodies, and as sentences have them."""

from typing import Any

from faultloop.digests import rounded

Body = dict[str, Any]
LEAST_TOLD, LEAST_TOLD_V = 1e-6, 1e-3  # amperes, milliamperes and volts below these are rounding


def ends_body(least: float, greatest: float, scale: float = 1.0) -> Body:
    """Least and greatest of what is known at both ends."""
    return {"least": _told(least * scale, LEAST_TOLD), "greatest": _told(greatest * scale, LEAST_TOLD)}


def volts_body(least: float, greatest: float) -> Body:
    """Least and greatest of a voltage."""
    return {"least": _told(least, LEAST_TOLD_V), "greatest": _told(greatest, LEAST_TOLD_V)}


def _told(value: float, least: float) -> float | None:
    """A number as printed; what is left of sums that cancel is no number."""
    return 0.0 if abs(value) < least else rounded(value)


def short(value: float) -> str:
    """A number for a sentence."""
    return f"{value:.3g}" if abs(value) < 1e4 else f"{value:.3g}".replace("e+0", "e").replace("e+", "e")


def ohms(value: float) -> str:
    """A resistance with the unit that keeps its number small."""
    for least, unit in ((1e9, "GΩ"), (1e6, "MΩ"), (1e3, "kΩ")):
        if value >= least * (1.0 - 5e-4):
            return f"{value / least:.3g} {unit}"
    return f"{value:.3g} Ω"
