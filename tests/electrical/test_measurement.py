"""Uncertainty, coverage and conformance probability."""

from statistics import NormalDist

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from faultloop.electrical.measurement import (
    Array,
    combined,
    conformance_probability,
    coverage_scale,
    expanded_uncertainty,
)

SIDE = st.sampled_from([1.0, -1.0])
OHM = st.just(0.0) | st.floats(1e-6, 1e6)


def column(*values: float) -> Array:
    """A column of numbers."""
    return np.array(values, dtype=np.float64)


def probability(nominal: float, expanded: float, limit: float, sense: float) -> float:
    """Conformance probability of one reading."""
    columns = (column(nominal), column(expanded), column(limit), column(sense))
    return float(conformance_probability(*columns)[0])


def test_percent_and_digits_add_up_and_take_no_sign() -> None:
    # 5 % of 1.00 ohm and 0.03 ohm: 0.08 ohm, on paper.
    u = expanded_uncertainty(column(1.0, -1.0, np.nan), column(5, 5, 5), column(0.03, 0.03, 0.03))
    assert u[:2] == pytest.approx([0.08, 0.08])
    assert np.isnan(u[2])


@given(OHM, OHM)
def test_combined_lies_between_the_greater_and_the_sum(one: float, other: float) -> None:
    both = combined(column(one), column(other))[0]
    assert max(one, other) * (1 - 1e-12) <= both <= (one + other) * (1 + 1e-12)
    assert both == combined(column(other), column(one))[0]


def test_combined_of_three_and_four_is_five() -> None:
    assert combined(column(3.0), column(4.0))[0] == 5.0


@given(st.floats(0.01, 100), st.floats(0.001, 10), st.floats(0.01, 100), SIDE)
def test_probability_is_the_normal_distribution_s(nominal: float, u: float, limit: float, sense: float) -> None:
    below = NormalDist(nominal, u / 2).cdf(limit)
    expected = below if sense > 0 else 1 - below
    assert probability(nominal, u, limit, sense) == pytest.approx(expected, abs=1e-12)


@given(st.floats(0.01, 100), st.floats(0.01, 100), st.floats(0.001, 10), st.floats(0.01, 100), SIDE)
def test_probability_never_rises_towards_the_endangering_side(
    one: float, other: float, u: float, limit: float, sense: float
) -> None:
    better, worse = sorted((one, other), reverse=sense < 0)
    assert probability(better, u, limit, sense) >= probability(worse, u, limit, sense)


@given(st.floats(0.01, 100), st.floats(0.001, 10), st.floats(0.01, 100))
def test_the_two_sides_share_out_one(nominal: float, u: float, limit: float) -> None:
    assert probability(nominal, u, limit, 1) + probability(nominal, u, limit, -1) == pytest.approx(1.0)


@given(st.floats(0.01, 100), st.floats(0.01, 100), SIDE)
def test_an_exact_reading_either_keeps_its_limit_or_does_not(nominal: float, limit: float, sense: float) -> None:
    kept = nominal <= limit if sense > 0 else nominal >= limit
    assert probability(nominal, 0.0, limit, sense) == (1.0 if kept else 0.0)


@pytest.mark.parametrize("place", range(3))
def test_probability_of_what_is_unknown_is_unknown(place: int) -> None:
    given_values = [1.0, 0.1, 1.37]
    given_values[place] = np.nan
    assert np.isnan(probability(given_values[0], given_values[1], given_values[2], 1.0))


@given(st.floats(0.5, 0.9999))
def test_coverage_scale_is_the_ratio_of_normal_quantiles(coverage: float) -> None:
    normal = NormalDist()
    half = normal.cdf(coverage_scale(coverage) * normal.inv_cdf(0.975))
    assert 2 * half - 1 == pytest.approx(coverage, abs=1e-9)


@given(st.floats(0.5, 0.9999), st.floats(0.5, 0.9999))
def test_more_coverage_is_wider(one: float, other: float) -> None:
    assume(one < other)
    assert coverage_scale(one) <= coverage_scale(other)


def test_the_customary_coverage_changes_nothing() -> None:
    assert coverage_scale(0.95) == 1.0


@pytest.mark.parametrize("coverage", [0.0, 0.4999, 0.99991, 1.0, -1.0, np.nan, np.inf])
def test_coverage_outside_its_range_is_refused(coverage: float) -> None:
    with pytest.raises(ValueError, match="coverage must lie between"):
        coverage_scale(coverage)
