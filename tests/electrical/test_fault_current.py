"""Prospective currents and the loop at operating temperature."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from faultloop.electrical.body import severity_ratio, touch_voltage
from faultloop.electrical.fault_current import heated_loop, prospective_current
from faultloop.electrical.measurement import Array, Interval

OHM = st.floats(0.01, 100)


def column(*values: float) -> Array:
    """A column of numbers."""
    return np.array(values, dtype=np.float64)


def around(nominal: float, u: float) -> Interval:
    """A loop with an uncertainty to both sides."""
    return Interval(column(max(nominal - u, 0.0)), column(nominal + u), column(nominal))


def test_current_at_the_ends_of_what_a_loop_can_be() -> None:
    current = prospective_current(column(1, 1, 1, 1), column(230, 230, 230, 230), column(0, np.inf, np.nan, 2.3))
    assert current[0] == np.inf
    assert current[1] == 0.0
    assert np.isnan(current[2])
    assert current[3] == pytest.approx(100.0)


@given(OHM, OHM)
def test_a_higher_loop_never_carries_more_current(one: float, other: float) -> None:
    low, high = sorted((one, other))
    more, less = prospective_current(column(0.95, 0.95), column(230, 230), column(low, high))
    assert more >= less


def test_split_heats_only_the_installation() -> None:
    hot = heated_loop(around(0.9, 0.0), column(np.nan), column(0.6), column(0.0), column(1.2))
    assert hot.nominal[0] == pytest.approx(0.6 + 0.3 * 1.2)


def test_known_r1_r2_decides_what_is_heated() -> None:
    hot = heated_loop(around(0.9, 0.0), column(0.2), column(0.6), column(0.0), column(1.2))
    assert hot.nominal[0] == pytest.approx(0.9 + 0.2 * 0.2)


def test_never_more_than_the_loop_itself_is_heated() -> None:
    # A dead R1 + R2 above the loop, and an external part above the loop: neither heats what is not there.
    above = heated_loop(around(0.9, 0.0), column(2.0), column(np.nan), column(np.nan), column(1.2))
    assert above.nominal[0] == pytest.approx(0.9 * 1.2)
    below = heated_loop(around(0.9, 0.0), column(np.nan), column(1.5), column(0.0), column(1.2))
    assert below.nominal[0] == 0.9


def test_unknown_parts_heat_the_whole_reading() -> None:
    hot = heated_loop(around(0.9, 0.1), column(np.nan), column(np.nan), column(np.nan), column(1.2))
    assert hot.nominal[0] == pytest.approx(0.9 * 1.2)
    assert hot.greatest[0] == pytest.approx(1.0 * 1.2)


@given(OHM, OHM, st.floats(0, 5), st.floats(1, 1.6))
def test_knowing_the_external_part_never_raises_the_hot_loop(z: float, ze: float, u: float, factor: float) -> None:
    unknown = heated_loop(around(z, u), column(np.nan), column(np.nan), column(np.nan), column(factor))
    known = heated_loop(around(z, u), column(np.nan), column(ze), column(0.0), column(factor))
    assert known.nominal[0] <= unknown.nominal[0] * (1 + 1e-12)


@given(OHM, st.one_of(st.just(np.nan), OHM), st.one_of(st.just(np.nan), OHM), st.floats(0, 5), st.floats(1, 1.6))
def test_hot_loop_is_ordered_and_never_below_the_cold_one(
    z: float, r12: float, ze: float, u: float, factor: float
) -> None:
    ze_u = np.nan if np.isnan(ze) else 0.05
    cold = around(z, u)
    hot = heated_loop(cold, column(r12), column(ze), column(ze_u), column(factor))
    assert hot.least[0] <= hot.nominal[0] * (1 + 1e-12)
    assert hot.nominal[0] <= hot.greatest[0]
    assert hot.nominal[0] >= cold.nominal[0]
    assert hot.greatest[0] >= cold.greatest[0] * (1 - 1e-12)
    assert hot.least[0] >= cold.least[0]


@given(OHM, st.floats(0, 5))
def test_without_heating_the_loop_stays_as_read(z: float, u: float) -> None:
    cold = around(z, u)
    hot = heated_loop(cold, column(np.nan), column(np.nan), column(np.nan), column(1.0))
    assert hot.nominal[0] == cold.nominal[0]
    assert hot.greatest[0] == pytest.approx(cold.greatest[0], rel=1e-12)
    assert hot.least[0] == pytest.approx(cold.least[0], rel=1e-12, abs=1e-12)


@given(OHM, OHM)
def test_touch_voltage_is_a_share_and_never_more_than_the_whole(path: float, loop: float) -> None:
    touch = touch_voltage(column(230), column(path), column(loop))[0]
    assert 0.0 <= touch <= 230.0
    if path <= loop:
        assert touch == pytest.approx(230.0 * path / loop)
    else:
        assert touch == 230.0


def test_an_open_loop_leaves_the_whole_voltage_on_exposed_parts() -> None:
    assert touch_voltage(column(230, 230), column(np.inf, 0.3), column(np.inf, np.inf)).tolist() == [230.0, 230.0]


def test_severity_clamps_short_and_endless_times() -> None:
    short = severity_ratio(column(50, 50), column(1000, 1000), column(0.001, 0.03))
    endless = severity_ratio(column(50, 50), column(1000, 1000), column(np.inf, 3.0))
    assert short[0] == short[1]
    assert endless[0] == endless[1]
    assert np.isnan(severity_ratio(column(np.nan), column(1000), column(1.0)))[0]


@given(st.floats(1, 400), st.floats(0.03, 3), st.floats(0.03, 3))
def test_severity_never_falls_with_time(volts: float, one: float, other: float) -> None:
    short, long = sorted((one, other))
    low, high = severity_ratio(column(volts, volts), column(1000, 1000), column(short, long))
    assert low <= high
