"""Conductors: temperature, length and adiabatic heating."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from faultloop.electrical.conductors import adiabatic_area, resistance, temperature_factor, withstand_time

CELSIUS = st.floats(-40, 250)
POSITIVE = st.floats(1e-3, 1e5)


def column(*values: float) -> np.ndarray[tuple[int], np.dtype[np.float64]]:
    """A column of numbers."""
    return np.array(values, dtype=np.float64)


@given(CELSIUS, CELSIUS)
def test_a_warm_test_is_never_credited_with_cooling(operating: float, test: float) -> None:
    factor = temperature_factor(column(operating), column(test), column(0.004))[0]
    assert factor >= 1.0
    if operating <= test:
        assert factor == 1.0


@given(CELSIUS, CELSIUS, CELSIUS)
def test_a_hotter_conductor_never_has_a_smaller_factor(one: float, other: float, test: float) -> None:
    cool, hot = sorted((one, other))
    low, high = temperature_factor(column(cool, hot), column(test, test), column(0.004, 0.004))
    assert low <= high


def test_resistance_counts_metres_of_a_kilometre() -> None:
    # 22 m of 7.41 ohm/km, worked out on paper: 0.163 02 ohm.
    assert resistance(column(7.41), column(22.0))[0] == pytest.approx(0.16302, rel=1e-12)


def test_resistance_is_unknown_where_length_or_size_is() -> None:
    assert np.isnan(resistance(column(np.nan, 7.41), column(22.0, np.nan))).all()


@given(st.sampled_from([76.0, 94.0, 115.0, 143.0]), st.floats(0.5, 630), st.floats(1, 50_000))
def test_area_and_time_are_each_others_inverse(k: float, area: float, current: float) -> None:
    time = withstand_time(column(k), column(area), column(current))
    assert adiabatic_area(column(k), column(current), time)[0] == pytest.approx(area, rel=1e-12)


@given(POSITIVE, POSITIVE)
def test_more_current_is_never_borne_longer(one: float, other: float) -> None:
    less, more = sorted((one, other))
    longer, shorter = withstand_time(column(115, 115), column(2.5, 2.5), column(less, more))
    assert longer >= shorter


def test_withstand_without_current_is_endless_and_unknown_stays_unknown() -> None:
    time = withstand_time(column(115, np.nan, 115), column(2.5, 2.5, np.nan), column(0.0, 100.0, 100.0))
    assert time[0] == np.inf
    assert np.isnan(time[1:]).all()
