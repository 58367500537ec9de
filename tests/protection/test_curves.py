"""The caller's own curve: its points and never more; disorder refused in plain words."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from faultloop.protection.band import Band, BandTable
from faultloop.protection.catalogue import catalogue
from faultloop.protection.curves import OwnCurve, own_band, refuse_disorder

Steps = list[tuple[float, float]]
GREATEST = [(48.0, 300.0), (160.0, 5.0), (320.0, 0.1)]
LEAST = [(40.0, 3600.0), (100.0, 4.0), (200.0, 0.01)]


@st.composite
def edges(draw: st.DrawFn) -> Steps:
    """Points above 32 A in order."""
    currents = sorted(draw(st.sets(st.floats(32.5, 5000), min_size=1, max_size=8)))
    times = sorted(draw(st.sets(st.floats(0.001, 7200), min_size=len(currents), max_size=len(currents))))
    return list(zip(currents, times[::-1], strict=True))


def row_of(band: Band) -> tuple[np.ndarray[tuple[int], np.dtype[np.intp]], BandTable]:
    """Row of a band put behind the catalogue's, and the table."""
    return np.array([len(catalogue().rows)]), catalogue().overcurrent.extended([band])


@given(edges(), st.floats(0, 10_000))
def test_nothing_is_promised_between_points(steps: Steps, current: float) -> None:
    row, table = row_of(own_band(32.0, steps))
    promised = table.greatest_time(row, np.array([current]))[0]
    assert promised == min((t for i, t in steps if i <= current), default=math.inf)


@given(edges(), st.floats(0.001, 7200))
def test_operating_current_is_that_of_a_point(steps: Steps, time: float) -> None:
    row, table = row_of(own_band(32.0, steps))
    current = table.operating_current(row, np.array([time]))[0]
    assert current == min((i for i, t in steps if t <= time), default=math.inf)


@given(edges(), st.integers(0, 7), st.floats(0, 10_000))
def test_fewer_points_never_promise_more(steps: Steps, left_out: int, current: float) -> None:
    fewer = [point for at, point in enumerate(steps) if at != left_out]
    if not fewer:
        return
    row, at = np.array([len(catalogue().rows), len(catalogue().rows) + 1]), np.array([current, current])
    table = catalogue().overcurrent.extended([own_band(32.0, steps), own_band(32.0, fewer)])
    whole, part = table.greatest_time(row, at).tolist()
    assert part >= whole


def test_bands_brought_along_leave_the_catalogue_as_it_is() -> None:
    many = [(7.0 + n, 90.0 - n) for n in range(64)]
    held, bands = catalogue().overcurrent, [own_band(32.0, GREATEST, LEAST), own_band(6.0, many)]
    table, rows = held.extended(bands), np.arange(len(catalogue().rows))
    for current in (5.0, 64.0, 221.0, 3000.0, math.nan):
        column = np.full(len(rows), current)
        assert np.array_equal(table.greatest_time(rows, column), held.greatest_time(rows, column), equal_nan=True)
        assert np.array_equal(table.least_time(rows, column), held.least_time(rows, column), equal_nan=True)
    for time in (0.01, 0.4, 5.0, math.nan):
        column = np.full(len(rows), time)
        assert np.array_equal(
            table.operating_current(rows, column), held.operating_current(rows, column), equal_nan=True
        )
    nothing = np.array([-1])
    assert table.greatest_time(nothing, np.array([1e6]))[0] == math.inf
    assert table.least_time(nothing, np.array([1e6]))[0] == math.inf
    assert table.operating_current(nothing, np.array([3600.0]))[0] == math.inf
    assert held.extended([]) is held


def test_both_edges_are_held() -> None:
    row, table = row_of(own_band(32.0, GREATEST, LEAST))
    for current, greatest, least in ((40.0, math.inf, 3600.0), (99.0, 300.0, 4.0), (321.0, 0.1, 0.0)):
        assert table.greatest_time(row, np.array([current]))[0] == greatest
        assert table.least_time(row, np.array([current]))[0] == least


@pytest.mark.parametrize(
    ("steps", "words"),
    [
        ([(100.0, 5.0), (100.0, 1.0)], "currents must rise from point to point; point 2 does not"),
        ([(50.0, 9.0), (100.0, 5.0), (90.0, 1.0)], "currents must rise from point to point; point 3 does not"),
        ([(100.0, 5.0), (200.0, 5.0)], "times must fall from point to point; point 2 does not"),
        ([(100.0, 5.0), (200.0, 6.0)], "times must fall from point to point; point 2 does not"),
    ],
)
def test_disorder_is_refused(steps: Steps, words: str) -> None:
    with pytest.raises(ValueError, match=words):
        refuse_disorder(steps)
    with pytest.raises(ValueError, match=words):
        own_band(1.0, steps)
    with pytest.raises(ValueError, match=words):
        own_band(1.0, [(300.0, 0.01)], steps)


@pytest.mark.parametrize("current", [0.5, 5.0, 32.0])
def test_multiples_in_place_of_amperes_are_refused(current: float) -> None:
    with pytest.raises(ValueError, match="not in multiples of the rated current"):
        own_band(32.0, [(current, 5.0), (320.0, 0.1)])


def test_edges_that_contradict_each_other_are_refused() -> None:
    with pytest.raises(ValueError, match="contradict each other"):
        own_band(32.0, [(100.0, 1.0)], [(150.0, 2.0)])
    with pytest.raises(ValueError, match="contradict each other"):
        own_band(32.0, [(100.0, 1.0)], [(100.0, 2.0)])
    assert own_band(32.0, [(100.0, 2.0)], [(100.0, 2.0)]).fast == ((100.0, 2.0),)


def test_the_curve_is_named_as_the_caller_s_own_with_its_source() -> None:
    told = OwnCurve(32.0, "data sheet 7, figure 2", own_band(32.0, GREATEST)).designation
    assert told.startswith("own curve 32 A")
    assert "data sheet 7, figure 2" in told
