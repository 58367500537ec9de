"""Band: the least and greatest operating time that a standard guarantees at a current."""

from collections.abc import Sequence
from dataclasses import dataclass, fields
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from faultloop.electrical.measurement import Array

NEVER = np.inf


@dataclass(frozen=True, slots=True)
class Band:
    """Guaranteed operating times of one device as steps.

    Attributes
    ----------
    slow : tuple of (current_a, time_s)
        At this current or above the device operates within the time; currents rise, times fall.
    fast : tuple of (current_a, time_s)
        At this current or below the device does not operate within the time; currents rise, times fall.
    """

    slow: tuple[tuple[float, float], ...]
    fast: tuple[tuple[float, float], ...] = ()

    def __post_init__(self) -> None:
        for name, steps in (("slow", self.slow), ("fast", self.fast)):
            for (i1, t1), (i2, t2) in pairwise(steps):
                if not (i1 < i2 and t1 > t2):
                    raise ValueError(f"{name} edge must rise in current and fall in time at {i2:g} A")

    def with_point(self, current_a: float, time_s: float) -> "Band":
        """Give the band with a published point in place of its own at that time.

        Parameters
        ----------
        current_a : float
            Current of the published point [A].
        time_s : float
            Time within which the device then operates [s].

        Returns
        -------
        Band
            A band whose slow edge holds the point; points that it makes idle (a greater current for no
            shorter time) are dropped, so that the edge stays a falling step.
        """
        kept = [(i, t) for i, t in self.slow if t != time_s]
        kept = [(i, t) for i, t in kept if not (i <= current_a and t < time_s)]
        kept = [(i, t) for i, t in kept if not (i >= current_a and t > time_s)]
        return Band(tuple(sorted([*kept, (current_a, time_s)])), self.fast)


@dataclass(frozen=True, slots=True)
class BandTable:
    """Many bands compiled to arrays, so that a device is picked by its row."""

    slow_current: Array
    slow_time: Array
    fast_current: Array
    fast_time: Array

    def greatest_time(self, row: NDArray[np.intp], current_a: Array) -> Array:
        """Greatest guaranteed operating time at a current.

        Parameters
        ----------
        row : (n,) array of int
            Device rows.
        current_a : (..., n) array
            Prospective current, r.m.s. [A]; leading axes are further currents of the same devices.

        Returns
        -------
        (..., n) array
            Time [s] of the last tested point at or below the current (the standard promises nothing
            between its points); inf below the first point; nan where the current is unknown.
        """
        passed = (current_a[..., None] >= self.slow_current[row]).sum(axis=-1)
        time = self.slow_time[row, passed]
        return np.where(np.isnan(current_a), np.nan, time)

    def tested_current(self, row: NDArray[np.intp], current_a: Array) -> Array:
        """Greatest tested current at or below a current.

        Parameters
        ----------
        row : (n,) array of int
            Device rows.
        current_a : (..., n) array
            Prospective current, r.m.s. [A]; leading axes are further currents of the same devices.

        Returns
        -------
        (..., n) array
            Current [A] of the point whose time `greatest_time` gives; nan below the first one.
        """
        passed = (current_a[..., None] >= self.slow_current[row]).sum(axis=-1)
        current = self.slow_current[row, np.maximum(passed - 1, 0)]
        return np.where(passed > 0, current, np.nan)

    def least_time(self, row: NDArray[np.intp], current_a: Array) -> Array:
        """Least operating time at a current: the device does not operate sooner.

        Parameters
        ----------
        row : (n,) array of int
            Device rows.
        current_a : (..., n) array
            Prospective current, r.m.s. [A]; leading axes are further currents of the same devices.

        Returns
        -------
        (..., n) array
            Time [s] of the first tested point at or above the current; 0 above the last point; nan where
            the current is unknown.
        """
        passed = (current_a[..., None] > self.fast_current[row]).sum(axis=-1)
        time = self.fast_time[row, passed]
        return np.where(np.isnan(current_a), np.nan, time)

    def operating_current(self, row: NDArray[np.intp], time_s: Array) -> Array:
        """Least current for which operation within a time is guaranteed: the band's inverse.

        Parameters
        ----------
        row : (n,) array of int
            Device rows.
        time_s : (n,) array
            Required disconnection time [s].

        Returns
        -------
        (n,) array
            I_a [A]; inf where no current guarantees the time; nan where the time is unknown.
        """
        slower = (self.slow_time[row, 1:] > time_s[:, None]).sum(axis=1)
        current = self.slow_current[row, slower]
        return np.where(np.isnan(time_s), np.nan, np.where(np.isnan(current), np.inf, current))

    def extended(self, bands: Sequence[Band]) -> "BandTable":
        """Give a table with further bands behind its own.

        Parameters
        ----------
        bands : sequence of Band
            Bands that came with what is to be judged; currents in the table's unit, times in second.

        Returns
        -------
        BandTable
            The rows of this table in their places, then one row a band, and again a last one for no device.
        """
        if not bands:
            return self
        more, parts = compile_bands(bands), []
        for field in fields(self):
            first, second = getattr(self, field.name)[:-1], getattr(more, field.name)
            width = max(first.shape[1], second.shape[1])
            padding = np.nan if field.name.endswith("current") else 0.0
            padded = [np.pad(a, ((0, 0), (0, width - a.shape[1])), constant_values=padding) for a in (first, second)]
            parts.append(np.concatenate(padded))
        return BandTable(*parts)


def compile_bands(bands: Sequence[Band]) -> BandTable:
    """Lay bands out as arrays, row by row.

    Parameters
    ----------
    bands : sequence of Band
        At least one band; all currents in one unit, all times in second.

    Returns
    -------
    BandTable
        One row a band and a last one for no device, which never operates.  Padding is nan in currents
        (nothing compares with it) and 0 in times (no time is slower).
    """
    count = len(bands) + 1
    width = max(len(band.slow) for band in bands) + 1
    fast_width = max(len(band.fast) for band in bands) + 1
    slow_current = np.full((count, width), np.nan)
    slow_time = np.zeros((count, width + 1))
    slow_time[:, 0] = NEVER
    fast_current = np.full((count, fast_width), np.nan)
    fast_time = np.zeros((count, fast_width + 1))
    fast_time[-1] = NEVER
    for row, band in enumerate(bands):
        for at, (current, time) in enumerate(band.slow):
            slow_current[row, at], slow_time[row, at + 1] = current, time
        for at, (current, time) in enumerate(band.fast):
            fast_current[row, at], fast_time[row, at] = current, time
    return BandTable(slow_current, slow_time, fast_current, fast_time)


def faster(first: Array, second: Array) -> Array:
    """Time of two devices of which either interrupts.

    Parameters
    ----------
    first, second : (n,) array
        Operating times [s]; nan where unknown, inf where a device never operates.

    Returns
    -------
    (n,) array
        The shorter time; an unknown one is no help, and two unknown ones stay nan.
    """
    return np.fmin(first, second)
