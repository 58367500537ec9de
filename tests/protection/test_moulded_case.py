"""Moulded-case breakers: what the standard promises at the settings, and settings that cannot be."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from faultloop.protection.band import Band, compile_bands
from faultloop.protection.moulded_case import MouldedCase, Settings, moulded_case_band, refuse_settings

ROW = np.array([0])


def operating_current(band: Band, time_s: float) -> float:
    """Least current that guarantees a time."""
    return float(compile_bands([band]).operating_current(ROW, np.array([time_s]))[0])


@pytest.mark.parametrize(
    ("settings", "time", "current"),
    [
        # 1.3 Ir in two hours above 63 A and in one up to it; 1.2 times the magnetic settings.
        (Settings(200.0, instantaneous_a=2000.0), 0.4, 2400.0),
        (Settings(200.0, instantaneous_a=2000.0), 0.1, math.inf),
        (Settings(200.0, instantaneous_a=2000.0), 7200.0, 260.0),
        (Settings(200.0, instantaneous_a=2000.0), 3600.0, 2400.0),
        (Settings(50.0, instantaneous_a=500.0), 3600.0, 65.0),
        (Settings(200.0, 1000.0, 0.3, 2000.0), 0.4, 1200.0),
        (Settings(200.0, 1000.0, 0.3, 2000.0), 0.2, 2400.0),
        # A delay quicker than what the instantaneous release is tested for makes that one idle.
        (Settings(200.0, 1000.0, 0.1, 2000.0), 0.2, 1200.0),
        (Settings(200.0, 1000.0, 0.5), 0.4, math.inf),
        (Settings(200.0), 5.0, math.inf),
        # A short-circuit release right above the overload setting is the first step that there is.
        (Settings(200.0, instantaneous_a=210.0), 7200.0, 252.0),
    ],
)
def test_operating_currents_carry_the_tolerance(settings: Settings, time: float, current: float) -> None:
    assert operating_current(moulded_case_band(settings), time) == pytest.approx(current, rel=1e-12)


def test_it_holds_below_the_magnetic_tolerance() -> None:
    table = compile_bands([moulded_case_band(Settings(200.0, 1000.0, 0.3, 2000.0))])
    assert table.least_time(ROW, np.array([800.0]))[0] == 0.2
    assert table.least_time(ROW, np.array([801.0]))[0] == 0.0
    assert table.least_time(ROW, np.array([210.0]))[0] == 7200.0


def test_a_magnetic_release_below_the_overload_current_is_not_held_back_by_it() -> None:
    # Set to 210 A it may trip at once from 168 A, whatever the overload release holds.
    table = compile_bands([moulded_case_band(Settings(200.0, instantaneous_a=210.0))])
    assert table.least_time(ROW, np.array([168.0]))[0] == 7200.0
    assert table.least_time(ROW, np.array([169.0]))[0] == 0.0


@st.composite
def settings_that_fit(draw: st.DrawFn) -> Settings:
    """Settings of one breaker."""
    overload = draw(st.floats(100, 1000))
    short = draw(st.none() | st.floats(1.01, 10))
    instant = draw(st.none() | st.floats(1.01, 3))
    delayed = None if short is None else short * overload
    return Settings(
        overload, delayed, None if short is None else draw(st.floats(0.02, 1.0)),
        None if instant is None else instant * (delayed or overload),
    )  # fmt: skip


@given(settings_that_fit(), st.floats(0, 20_000))
def test_edges_never_contradict_each_other(settings: Settings, current: float) -> None:
    refuse_settings(1000.0, settings)
    table = compile_bands([moulded_case_band(settings)])
    at = np.array([current])
    assert table.least_time(ROW, at)[0] <= table.greatest_time(ROW, at)[0]
    assert table.greatest_time(ROW, np.array([settings.overload_a]))[0] == math.inf


@given(settings_that_fit(), st.floats(1.0, 3.0), st.floats(0.01, 7200))
def test_higher_settings_never_promise_more(settings: Settings, factor: float, time: float) -> None:
    def raised(value: float | None) -> float | None:
        return None if value is None else value * factor

    higher = Settings(
        settings.overload_a, raised(settings.short_time_a), settings.short_time_s, raised(settings.instantaneous_a)
    )
    assert operating_current(moulded_case_band(higher), time) >= operating_current(moulded_case_band(settings), time)


@pytest.mark.parametrize(
    ("settings", "words"),
    [
        (Settings(300.0, instantaneous_a=2000.0), "cannot be above the rated current"),
        (Settings(200.0, instantaneous_a=10.0), "not in multiples"),
        (Settings(200.0, 5.0, 0.3), "not in multiples"),
        (Settings(200.0, 1000.0), "both its current Isd and its greatest time"),
        (Settings(200.0, None, 0.3), "both its current Isd and its greatest time"),
        (Settings(200.0, 1000.0, 0.3, 1000.0), "Ii must be above Isd"),
    ],
)
def test_settings_that_cannot_be_are_refused(settings: Settings, words: str) -> None:
    with pytest.raises(ValueError, match=words):
        refuse_settings(250.0, settings)


def test_the_breaker_is_named_with_its_settings() -> None:
    told = MouldedCase(250.0, Settings(200.0, 1000.0, 0.3, 2000.0)).designation
    assert told == "MCCB 250 A (Ir 200 A, Isd 1000 A ≤ 0.3 s, Ii 2000 A)"


@pytest.mark.parametrize("overload", [0.8, 9.9])
def test_multiples_in_place_of_amperes_are_refused(overload: float) -> None:
    with pytest.raises(ValueError, match="in ampere, not in multiples"):
        refuse_settings(100.0, Settings(overload, instantaneous_a=10.0 * overload))
