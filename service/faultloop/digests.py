"""Canonical bytes, SHA-256 and the one rounding rule.

Floats may differ in the last place between platforms, so whatever is printed or digested is rounded
here and nowhere else; decisions are made on the unrounded values.
"""

import hashlib
import json
import math
from collections.abc import Iterable, Sequence
from typing import Any

import numpy as np
import orjson
from numpy.typing import NDArray

SIGNIFICANT_DIGITS = 6


def rounded(value: float) -> float | None:
    """Round to 6 significant digits; what is not finite has no number and becomes None."""
    if not math.isfinite(value):
        return None
    return float(f"{value:.6g}")


def rounded_all(values: Iterable[float]) -> list[float | None]:
    """Round a column by the same rule; written out, because answers print hundreds of numbers."""
    return [float(f"{value:.6g}") if value - value == 0.0 else None for value in values]


def rounded_column(values: NDArray[np.float64]) -> list[float | None]:
    """Round an array by the same rule, to the same last bit.

    A whole number of six digits over a power of ten up to 1e22 is the double nearest to that decimal; where the
    scaled value lies too near to a half to tell, or the power is not exact, the rule is applied as it is written.
    """
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        shift = SIGNIFICANT_DIGITS - 1 - np.floor(np.log10(np.abs(values)))
        power = 10.0 ** np.abs(shift)
        scaled = np.where(shift >= 0, values * power, values / power)
        whole = np.rint(scaled)
        near = np.where(values == 0.0, values, np.where(shift >= 0, whole / power, whole * power))
        told = (values == 0.0) | (np.abs(shift) <= 22) & (np.abs(np.abs(scaled - whole) - 0.5) > 1e-6)
    finite = np.isfinite(values)
    column: list[float | None] = near.tolist()
    for at in np.flatnonzero(~finite).tolist():
        column[at] = None
    known: dict[float, float | None] = {}  # limits such as 1.365625 repeat themselves
    for at, value in ((at, float(values[at])) for at in np.flatnonzero(~told & finite).tolist()):
        if value not in known:
            known[value] = rounded(value)
        column[at] = known[value]
    return column


def rounded_rows(rows: Sequence[NDArray[np.float64]]) -> list[list[float | None]]:
    """Round several arrays of one length at once by the same rule; an answer prints hundreds of numbers."""
    table = np.array(rows)
    flat, width = rounded_column(table.ravel()), table.shape[1]
    return [flat[begin : begin + width] for begin in range(0, len(flat), width)] if width else [[] for _ in rows]


def canonical_bytes(value: Any) -> bytes:
    """Give the one JSON text of a value: sorted keys, no spaces, UTF-8, no NaN."""
    data = orjson.dumps(value, option=orjson.OPT_SORT_KEYS)
    if b"null" in data:
        # What has no number would be written null without a word; the strict writer refuses it.
        json.dumps(value, allow_nan=False)
    return data


def json_bytes(value: Any) -> bytes:
    """Give the JSON text of an answer, in the order in which it was built; what is rounded is finite or absent."""
    return orjson.dumps(value)


def sha256(data: bytes) -> str:
    """Give the SHA-256 of bytes in hexadecimal."""
    return hashlib.sha256(data).hexdigest()


def digest(value: Any) -> str:
    """Give the SHA-256 of a value's canonical bytes."""
    return sha256(canonical_bytes(value))
