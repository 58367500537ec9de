"""Axes: whole decades, values where their logarithm puts them, words in the trade's prefixes."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from faultloop.reports.scale import Axis, ampere, decades, second


@pytest.mark.parametrize(
    ("value", "told"),
    [(0.006, "6 mA"), (0.15, "150 mA"), (1, "1 A"), (36.16, "36.16 A"), (999.94, "999.9 A"), (1284.26, "1.284 kA"),
     (25000, "25 kA"), (0, "0 A")],
)  # fmt: skip
def test_currents_in_words(value: float, told: str) -> None:
    assert ampere(value) == told.replace(" ", "\u00a0")


@pytest.mark.parametrize(
    ("value", "told"), [(0.04, "40 ms"), (0.4, "400 ms"), (5, "5 s"), (3600, "3600 s"), (0, "0 s")]
)
def test_times_in_words(value: float, told: str) -> None:
    assert second(value) == told.replace(" ", "\u00a0")


@given(st.lists(st.floats(1e-6, 1e9), max_size=6))
def test_decades_hold_all_values_with_room(values: list[float]) -> None:
    low, high = decades(values)
    assert high - low >= 2
    assert all(10.0**low < value < 10.0**high for value in values)


def test_what_has_no_logarithm_takes_no_part() -> None:
    assert decades([0.0, math.inf, 3.0]) == decades([3.0])
    assert decades([]) == decades([0.0])


@given(st.floats(1e-9, 1e9), st.floats(1e-9, 1e9))
def test_greater_values_never_lie_before_smaller_ones(one: float, two: float) -> None:
    axis = Axis(-2, 4, 80, 600, ampere, 50)
    assert axis.at(min(one, two)) <= axis.at(max(one, two))
    assert 80 <= axis.at(one) <= 680


def test_a_decade_is_a_sixth_of_six() -> None:
    axis = Axis(-2, 4, 80, 600, ampere, 50)
    assert [axis.at(10.0**n) for n in range(-2, 5)] == [80, 180, 280, 380, 480, 580, 680]
    assert axis.at(2) == pytest.approx(280 + 100 * math.log10(2), abs=0.01)


@given(st.lists(st.floats(0.0), max_size=5))
def test_no_value_whatever_breaks_an_axis(values: list[float]) -> None:
    low, high = decades(values)
    axis = Axis(low, high, 0.0, 600.0, ampere, 40.0)
    assert list(axis.lines())
    assert list(axis.ticks())
    assert all(0.0 <= axis.at(value) <= 600.0 for value in values)
