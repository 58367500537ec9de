"""What a sample does not rule out, against counting with fractions and against a figure worked by hand."""

from fractions import Fraction
from math import comb

import pytest
from hypothesis import given
from hypothesis import strategies as st

from faultloop.exchange.sampling import greatest_bad


def test_six_of_forty_fine_leaves_fourteen() -> None:
    # C(26, 6) / C(40, 6) = 230230 / 3838380 = 0.060; C(25, 6) / C(40, 6) = 177100 / 3838380 = 0.046
    assert greatest_bad(40, 6, 0) == 14


@pytest.mark.parametrize(("population", "tested", "bad", "told"), [(20, 1, 0, 19), (40, 40, 3, 3), (5, 0, 0, 5)])
def test_ends(population: int, tested: int, bad: int, told: int) -> None:
    assert greatest_bad(population, tested, bad) == told


def chance(population: int, tested: int, bad: int, all_bad: int) -> Fraction:
    """Probability of a sample with at most so many bad points."""
    ways = sum(comb(all_bad, x) * comb(population - all_bad, tested - x) for x in range(min(bad, tested) + 1))
    return Fraction(ways, comb(population, tested))


@given(st.data())
def test_it_is_the_largest_number_that_is_not_ruled_out(data: st.DataObject) -> None:
    population = data.draw(st.integers(1, 60))
    tested = data.draw(st.integers(0, population))
    bad = data.draw(st.integers(0, tested))
    told = greatest_bad(population, tested, bad)
    assert bad <= told <= population - tested + bad
    allowed = [d for d in range(bad, population - tested + bad + 1) if chance(population, tested, bad, d) * 20 >= 1]
    assert told == max(allowed)


@pytest.mark.parametrize("wrong", [(5, 6, 0), (5, 3, 4), (5, 3, -1)])
def test_numbers_that_do_not_belong_together_are_refused(wrong: tuple[int, int, int]) -> None:
    with pytest.raises(ValueError, match="expected"):
        greatest_bad(*wrong)


def test_a_large_population_takes_no_long_time() -> None:
    assert 20_000 < greatest_bad(100_000, 10_000, 2_000) < 21_000
