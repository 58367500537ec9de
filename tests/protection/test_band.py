"""Band: steps, their inverse, their edges; the compiled table against the steps in plain words."""

import itertools
import math

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from faultloop.electrical.measurement import Array
from faultloop.protection.band import Band, BandTable, compile_bands, faster

Steps = tuple[tuple[float, float], ...]
CURRENTS = st.sampled_from([0.5, 1, 2, 3, 5, 8, 10, 20, 32, 50, 100, 221, 1000])
TIMES = st.sampled_from([0.04, 0.1, 0.2, 0.4, 1, 5, 10, 60, 3600])
SOME_CURRENT = CURRENTS | st.floats(0, 2000) | st.just(math.inf)
SOME_TIME = TIMES | st.floats(0, 7200)


@st.composite
def steps(draw: st.DrawFn) -> Steps:
    """Currents that rise with times that fall."""
    currents = sorted(draw(st.sets(CURRENTS, max_size=6)))
    times = sorted(draw(st.sets(TIMES, min_size=len(currents), max_size=len(currents))), reverse=True)
    return tuple(zip(currents, times, strict=True))


BANDS = st.lists(st.builds(Band, steps(), steps()), min_size=1, max_size=5)


def rows(*indices: int) -> np.ndarray[tuple[int], np.dtype[np.intp]]:
    """Rows of a table."""
    return np.array(indices, dtype=np.intp)


def column(*values: float) -> Array:
    """A column of numbers."""
    return np.array(values, dtype=np.float64)


def slow_in_words(band: Band, current: float) -> float:
    """Shortest time of the points at or below the current."""
    return min((t for i, t in band.slow if i <= current), default=math.inf)


def fast_in_words(band: Band, current: float) -> float:
    """Longest time of the points at or above the current."""
    return max((t for i, t in band.fast if i >= current), default=0.0)


def inverse_in_words(band: Band, time: float) -> float:
    """Least current of the points that are at least that quick."""
    return min((i for i, t in band.slow if t <= time), default=math.inf)


@given(BANDS, st.data())
def test_table_says_what_the_steps_say(bands: list[Band], data: st.DataObject) -> None:
    table = compile_bands(bands)
    row = data.draw(st.integers(0, len(bands) - 1))
    current, time = data.draw(SOME_CURRENT), data.draw(SOME_TIME)
    assert table.greatest_time(rows(row), column(current))[0] == slow_in_words(bands[row], current)
    assert table.least_time(rows(row), column(current))[0] == fast_in_words(bands[row], current)
    assert table.operating_current(rows(row), column(time))[0] == inverse_in_words(bands[row], time)


@given(BANDS, st.data())
def test_inverse_gives_a_current_that_is_quick_enough_and_nothing_below_it(
    bands: list[Band], data: st.DataObject
) -> None:
    table = compile_bands(bands)
    row = data.draw(st.integers(0, len(bands) - 1))
    time = data.draw(SOME_TIME)
    current = table.operating_current(rows(row), column(time))
    if np.isfinite(current[0]):
        assert table.greatest_time(rows(row), current)[0] <= time
        assert table.greatest_time(rows(row), np.nextafter(current, 0.0))[0] > time
    else:
        assert table.greatest_time(rows(row), column(math.inf))[0] > time


@given(BANDS, SOME_CURRENT, SOME_CURRENT)
def test_more_current_is_never_slower(bands: list[Band], one: float, other: float) -> None:
    table, (less, more) = compile_bands(bands), sorted((one, other))
    for row in range(len(bands)):
        for edge in (table.greatest_time, table.least_time):
            slower, quicker = edge(rows(row, row), column(less, more))
            assert slower >= quicker


@given(BANDS, SOME_TIME, SOME_TIME)
def test_more_time_never_asks_for_more_current(bands: list[Band], one: float, other: float) -> None:
    table, (short, long) = compile_bands(bands), sorted((one, other))
    for row in range(len(bands)):
        high, low = table.operating_current(rows(row, row), column(short, long))
        assert high >= low


def asked(table: BandTable, row: np.ndarray[tuple[int], np.dtype[np.intp]], value: Array) -> list[Array]:
    """The three questions to a table."""
    return [table.greatest_time(row, value), table.least_time(row, value), table.operating_current(row, value)]


@settings(deadline=None)
@given(BANDS, st.data(), st.integers(1, 12))
def test_many_columns_equal_single_columns(bands: list[Band], data: st.DataObject, count: int) -> None:
    table = compile_bands(bands)
    # -1 is the row of no device, as an unknown device is mapped.
    row = np.array(data.draw(st.lists(st.integers(-1, len(bands) - 1), min_size=count, max_size=count)))
    drawn = data.draw(st.lists(SOME_CURRENT | st.just(math.nan), min_size=count, max_size=count))
    value = np.array(drawn, dtype=np.float64)
    singly = [asked(table, row[at : at + 1], value[at : at + 1]) for at in range(count)]
    for which, together in enumerate(asked(table, row, value)):
        assert together.shape == (count,)
        np.testing.assert_array_equal(together, np.concatenate([parts[which] for parts in singly]))


@given(BANDS, st.lists(SOME_CURRENT, min_size=1, max_size=4))
def test_several_currents_of_a_device_are_asked_at_once(bands: list[Band], currents: list[float]) -> None:
    table, row = compile_bands(bands), np.arange(len(bands))
    several = np.repeat(np.array(currents, dtype=np.float64)[:, None], len(bands), axis=1)
    for question in (table.greatest_time, table.least_time):
        together = question(row, several)
        assert together.shape == several.shape
        for answer, current in zip(together, several, strict=True):
            np.testing.assert_array_equal(answer, question(row, current))


@given(BANDS, SOME_CURRENT, SOME_TIME)
def test_neighbours_in_the_table_do_not_matter(bands: list[Band], current: float, time: float) -> None:
    together = compile_bands(bands)
    for row, band in enumerate(bands):
        alone = compile_bands([band])
        for one, other in zip(
            asked(together, rows(row), column(current)), asked(alone, rows(0), column(current)), strict=True
        ):
            np.testing.assert_array_equal(one, other)
        assert together.operating_current(rows(row), column(time)) == alone.operating_current(rows(0), column(time))


@given(BANDS)
def test_no_device_never_operates(bands: list[Band]) -> None:
    table = compile_bands(bands)
    for current in (0.0, 100.0, math.inf):
        assert table.greatest_time(rows(-1), column(current))[0] == math.inf
        assert table.least_time(rows(-1), column(current))[0] == math.inf
    for time in (0.0, 5.0, 1e9):
        assert table.operating_current(rows(-1), column(time))[0] == math.inf


@given(BANDS)
def test_what_is_unknown_stays_unknown(bands: list[Band]) -> None:
    for row in range(-1, len(bands)):
        for answer in asked(compile_bands(bands), rows(row), column(math.nan)):
            assert np.isnan(answer[0])


def test_no_band_is_no_device() -> None:
    table = compile_bands([Band(())])
    assert table.greatest_time(rows(0), column(math.inf))[0] == math.inf
    assert table.operating_current(rows(0), column(3600.0))[0] == math.inf


@pytest.mark.parametrize(
    ("slow", "fast", "edge"),
    [
        (((10.0, 5.0), (10.0, 1.0)), (), "slow"),
        (((20.0, 5.0), (10.0, 1.0)), (), "slow"),
        (((10.0, 1.0), (20.0, 5.0)), (), "slow"),
        (((10.0, 1.0), (20.0, 1.0)), (), "slow"),
        ((), ((10.0, 1.0), (20.0, 5.0)), "fast"),
        (((10.0, math.nan), (20.0, 5.0)), (), "slow"),
    ],
)
def test_edges_that_do_not_fall_are_refused(slow: Steps, fast: Steps, edge: str) -> None:
    with pytest.raises(ValueError, match=f"{edge} edge must rise in current and fall in time at"):
        Band(slow, fast)


@given(st.builds(Band, steps(), steps()), CURRENTS, TIMES)
def test_a_published_point_stands_at_its_time(band: Band, current: float, time: float) -> None:
    with_point = band.with_point(current, time)
    assert (current, time) in with_point.slow
    assert inverse_in_words(with_point, time) == current
    assert with_point.fast == band.fast
    for (i1, t1), (i2, t2) in itertools.pairwise(with_point.slow):
        assert i1 < i2
        assert t1 > t2


@given(st.builds(Band, steps()), CURRENTS, TIMES, TIMES)
def test_a_published_point_promises_nothing_quicker_than_itself(
    band: Band, current: float, time: float, other: float
) -> None:
    assume(other < time)
    assert inverse_in_words(band.with_point(current, time), other) >= inverse_in_words(band, other)


@given(st.builds(Band, steps()), CURRENTS, TIMES)
def test_a_published_point_can_be_given_twice(band: Band, current: float, time: float) -> None:
    once = band.with_point(current, time)
    assert once.with_point(current, time) == once


def test_of_two_devices_the_faster_one_interrupts_and_an_unknown_one_is_no_help() -> None:
    first = column(0.1, 5.0, math.nan, math.inf, math.nan)
    second = column(0.4, 0.04, 0.3, math.inf, math.nan)
    np.testing.assert_array_equal(faster(first, second), column(0.1, 0.04, 0.3, math.inf, math.nan))
    np.testing.assert_array_equal(faster(second, first), faster(first, second))
