"""The compiled devices: every device under every rule set, and no band that contradicts itself."""

import math
from typing import get_args

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from faultloop.protection.band import Band, compile_bands
from faultloop.protection.breakers import breaker_band, breaker_table, breaker_tables
from faultloop.protection.catalogue import catalogue, device_band, listed_devices, residual_multiple
from faultloop.protection.designations import Breaker, Delay, Fuse, OvercurrentDevice, ResidualDevice
from faultloop.protection.fuses import fuse_families
from faultloop.protection.residual import residual_band, residual_table
from faultloop.rules.loader import shipped

PICKS = st.sampled_from(sorted(catalogue().rows, key=lambda key: (key[0], key[1].designation)))
AMPERES = st.floats(0.1, 40_000)


def at(row: int) -> np.ndarray[tuple[int], np.dtype[np.intp]]:
    """One row."""
    return np.array([row], dtype=np.intp)


def test_every_device_stands_under_every_rule_set() -> None:
    assert set(catalogue().rows) == {(key, device) for key in shipped() for device in listed_devices()}
    assert sorted(catalogue().rows.values()) == list(range(len(catalogue().rows)))
    assert set(catalogue().bands) == set(catalogue().rows)


def test_every_rating_of_the_tables_is_listed_once() -> None:
    devices = listed_devices()
    assert len(set(devices)) == len(devices)
    breakers = [d for d in devices if isinstance(d, Breaker)]
    assert set(breaker_tables()) == set("BCDKZ")
    assert len(breakers) == sum(len(table.ratings_a) for table in breaker_tables().values())
    assert len(devices) - len(breakers) == sum(len(f.rating) for f in fuse_families().values())


@pytest.mark.parametrize("key", sorted(shipped()))
def test_rows_pick_the_band_of_their_device(key: str) -> None:
    table = catalogue().overcurrent
    for device in listed_devices():
        band, row = device_band(device, shipped()[key].rules), catalogue().rows[key, device]
        assert catalogue().bands[key, device] == band
        for current, time in band.slow:
            assert table.greatest_time(at(row), np.array([current]))[0] == time
            assert table.operating_current(at(row), np.array([time]))[0] == current
        for current, time in band.fast:
            assert table.least_time(at(row), np.array([current]))[0] == time


@given(PICKS, AMPERES)
def test_no_device_is_promised_quicker_than_it_can_operate(key: tuple[str, OvercurrentDevice], current: float) -> None:
    row, table = at(catalogue().rows[key]), catalogue().overcurrent
    assert table.least_time(row, np.array([current]))[0] <= table.greatest_time(row, np.array([current]))[0]


@given(PICKS, AMPERES)
def test_no_device_operates_at_its_rated_current(key: tuple[str, OvercurrentDevice], current: float) -> None:
    row, rated = at(catalogue().rows[key]), key[1].rated_current_a
    assert catalogue().overcurrent.greatest_time(row, np.array([min(current, rated)]))[0] == math.inf


@settings(deadline=None)
@given(st.sampled_from("BCD"), st.sampled_from(breaker_table().ratings_a), st.floats(0.5, 40))
def test_a_quicker_characteristic_is_never_slower(letter: str, rated: float, multiple: float) -> None:
    order = "BCD"[: "BCD".index(letter) + 1]
    table = compile_bands([breaker_band(c, rated) for c in order])  # type: ignore[arg-type]
    current = np.full(len(order), multiple * rated)
    times = table.greatest_time(np.arange(len(order)), current).tolist()
    assert times == sorted(times)


def test_industrial_breakers_take_the_widest_band_of_their_sources() -> None:
    table = catalogue().overcurrent
    for letter, rated, hold, trip in (("K", 20.0, 160.0, 280.0), ("Z", 10.0, 20.0, 30.0)):
        row = at(catalogue().rows["iec-60364:2017", Breaker(letter, rated)])  # type: ignore[arg-type]
        assert table.operating_current(row, np.array([0.4]))[0] == trip
        # The industrial standard tests instantaneous tripping for 0.2 s, so nothing quicker is promised.
        assert table.operating_current(row, np.array([0.1]))[0] == math.inf
        assert table.greatest_time(row, np.array([math.nextafter(trip, 0.0)]))[0] == 3600.0
        assert table.greatest_time(row, np.array([1.3 * rated]))[0] == 3600.0
        assert table.greatest_time(row, np.array([math.nextafter(1.3 * rated, 0.0)]))[0] == math.inf
        assert table.least_time(row, np.array([hold]))[0] == 0.2
        assert table.least_time(row, np.array([math.nextafter(hold, math.inf)]))[0] == 0.0


@pytest.mark.parametrize("rated", [3.0, 13.0])
def test_plug_fuses_stay_within_the_windows_of_their_standard(rated: float) -> None:
    windows = {3.0: [(9.0, 0.02, 80.0), (20.0, 0.0, 0.1), (30.0, 0.0, 0.03)],
               13.0: [(30.0, 1.0, 400.0), (50.0, 0.1, 20.0), (100.0, 0.01, 0.2)]}  # fmt: skip
    row, table = at(catalogue().rows["bs-7671:2018", Fuse("bs-1362", rated)]), catalogue().overcurrent
    for current, least, greatest in windows[rated]:
        assert table.least_time(row, np.array([current]))[0] == least
        assert table.greatest_time(row, np.array([current]))[0] == greatest


@pytest.mark.parametrize("key", sorted(shipped()))
def test_currents_that_a_rule_set_prints_stand_in_its_rows(key: str) -> None:
    table, devices = catalogue().overcurrent, listed_devices()
    for printed in shipped()[key].rules.operating_current:
        for device in devices:
            own = device.characteristic if printed.unit == "x In" and isinstance(device, Breaker) else ""
            if not {own, device.designation} & set(printed.devices):
                continue
            expected = printed.value * device.rated_current_a if printed.unit == "x In" else printed.value
            row = at(catalogue().rows[key, device])
            assert table.operating_current(row, np.array([printed.time_s]))[0] == expected


def test_a_breaker_is_held_for_its_table_only() -> None:
    table = catalogue().overcurrent
    row = at(catalogue().rows["iec-60364:2017", Breaker("B", 32.0)])
    assert table.operating_current(row, np.array([0.09]))[0] == math.inf
    assert table.greatest_time(row, np.array([40.0]))[0] == math.inf


@pytest.mark.parametrize("delay", get_args(Delay))
def test_residual_rows_hold_the_standard_s_bands(delay: str) -> None:
    row, table = at(catalogue().residual_rows[delay]), catalogue().residual
    if delay == "time-delayed":
        assert residual_multiple(delay, 3600.0) == math.inf
        assert table.greatest_time(row, np.array([500.0]))[0] == math.inf
        return
    band: Band = residual_band(delay)  # type: ignore[arg-type]
    for multiple, time in band.slow:
        assert table.greatest_time(row, np.array([multiple]))[0] == time
        assert residual_multiple(delay, time) == multiple
    assert table.greatest_time(row, np.array([math.nextafter(1.0, 0.0)]))[0] == math.inf
    assert residual_multiple(delay, 0.0) == math.inf


def test_a_general_device_promises_no_delay_and_a_selective_one_does() -> None:
    table = catalogue().residual
    current = np.array([1.0])
    assert table.least_time(at(catalogue().residual_rows["general"]), current)[0] == 0.0
    assert table.least_time(at(catalogue().residual_rows["selective"]), current)[0] > 0.0


def test_rated_residual_currents_rise() -> None:
    rated = residual_table().rated_residual_operating_currents_ma
    assert rated == sorted(set(rated))
    assert ResidualDevice(30.0).rated_ma in rated


def test_catalogue_is_compiled_once_and_has_a_digest() -> None:
    assert catalogue() is catalogue()
    assert len(catalogue().digest) == 64
