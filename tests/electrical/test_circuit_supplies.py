"""Many supplies give what one supply gives, to the last bit, and what is unknown of one stays unknown for it alone."""

import dataclasses
from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from faultloop.electrical.circuit_supplies import (
    InsulatedSupply,
    SeparatedCircuit,
    current_to_earth,
    single_contact_currents,
)
from faultloop.electrical.measurement import Array

Supply = type[SeparatedCircuit] | type[InsulatedSupply]
EDGES = [0.0, 1.0, 3.0, 50.0, 230.0, 1e-9, 1e9, np.inf, np.nan]
NUMBERS = st.sampled_from(EDGES) | st.floats(0.0, 1e6)
LINES = st.sampled_from([1.0, 2.0, 3.0, np.nan])
KINDS: dict[str, tuple[Supply, Callable[..., Any]]] = {
    "separated": (SeparatedCircuit, single_contact_currents),
    "insulated": (InsulatedSupply, current_to_earth),
}
GOOD = {
    "separated": (230.0, 400.0, 1.0, 50.0, 5.0, 7.0, 1.0, 1e7, 2e7, 1000.0),
    "insulated": (230.0, 3.0, 50.0, 60.0, 10.0, 50.0),
}


def names(kind: str) -> list[str]:
    """Columns of a supply, and the way to earth behind them."""
    return [field.name for field in dataclasses.fields(KINDS[kind][0])] + ["path_ohm"]


def currents(kind: str, columns: list[Array]) -> list[Array]:
    """Currents of a supply by its columns, one array a conductor."""
    make, function = KINDS[kind]
    with np.errstate(all="ignore"):
        found = function(make(*columns[:-1]), columns[-1])
    return list(found) if isinstance(found, tuple) else [found]


def same(one: Array, other: Array) -> bool:
    """Equal to the last bit, what is unknown included."""
    both = np.isnan(one) & np.isnan(other)
    return bool(((one.view(np.int64) == other.view(np.int64)) | both).all())


@pytest.mark.parametrize("kind", sorted(KINDS))
@settings(max_examples=150, deadline=None)
@given(data=st.data(), count=st.integers(1, 9))
def test_many_supplies_equal_single_supplies_to_the_last_bit(kind: str, data: st.DataObject, count: int) -> None:
    drawn = {name: LINES if name == "lines" else NUMBERS for name in names(kind)}
    columns = [np.array(data.draw(st.lists(one, min_size=count, max_size=count))) for one in drawn.values()]
    together = currents(kind, columns)
    singly = [currents(kind, [column[at : at + 1] for column in columns]) for at in range(count)]
    for which, column in enumerate(together):
        assert column.shape == (count,)
        assert column.dtype == np.float64
        assert same(column, np.concatenate([parts[which] for parts in singly]))


@pytest.mark.parametrize("kind", sorted(KINDS))
def test_every_column_counts_and_leaves_its_neighbours_alone(kind: str) -> None:
    good = [np.array([value] * 3) for value in GOOD[kind]]
    whole = currents(kind, good)
    assert all(np.isfinite(column).all() and (column > 0.0).all() for column in whole)
    for which, name in enumerate(names(kind)):
        unknown = [column.copy() for column in good]
        unknown[which][1] = np.nan
        for before, after in zip(whole, currents(kind, unknown), strict=True):
            assert np.isnan(after[1]), name
            assert same(after[[0, 2]], before[[0, 2]]), name
        other = [column.copy() for column in good]
        other[which] *= 1.0 / 3.0 if name == "lines" else 1.5
        assert any((one != two).all() for one, two in zip(whole, currents(kind, other), strict=True)), name


@pytest.mark.parametrize("kind", sorted(KINDS))
def test_one_value_stands_for_a_column(kind: str) -> None:
    columns = [np.array([value]) for value in GOOD[kind]]
    path = np.array([10.0, 1000.0, 1e5])
    spread = currents(kind, [*(np.full(3, column[0]) for column in columns[:-1]), path])
    for one, other in zip(currents(kind, [*columns[:-1], path]), spread, strict=True):
        assert same(one, other)


@pytest.mark.parametrize("kind", sorted(KINDS))
def test_no_supply_gives_no_current(kind: str) -> None:
    empty = np.array([], dtype=np.float64)
    assert [column.shape for column in currents(kind, [empty for _ in GOOD[kind]])] == [(0,)] * (
        2 if kind == "separated" else 1
    )


@pytest.mark.parametrize("kind", sorted(KINDS))
def test_arguments_are_left_as_they_were(kind: str) -> None:
    columns = [np.array([value, np.nan, value]) for value in GOOD[kind]]
    before = [column.copy() for column in columns]
    currents(kind, columns)
    for one, other in zip(before, columns, strict=True):
        np.testing.assert_array_equal(one, other)
