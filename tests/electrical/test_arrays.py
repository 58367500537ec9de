"""Many columns give what single columns give, to the last bit, for every function of the room."""

import importlib
import inspect
import pkgutil
import typing
from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import faultloop.electrical
from faultloop.electrical.measurement import Array, Interval

EDGES = [0.0, -0.0, 1.0, -1.0, 0.1, 1e-300, 1e300, np.inf, -np.inf, np.nan, 230.0, 1.37, 20.0, 70.0]
NUMBERS = st.sampled_from(EDGES) | st.floats(-1e6, 1e6)
SCALAR_FUNCTIONS = {"coverage_scale"}  # one probability of a whole request, no column
NETWORKS = "faultloop.electrical.circuit"  # these take whole networks: test_circuits, test_circuit_supplies hold them


def modules_of_columns() -> list[str]:
    """The room's modules whose functions take columns."""
    on_disk = pkgutil.iter_modules(faultloop.electrical.__path__, "faultloop.electrical.")
    return [module.name for module in on_disk if not module.name.startswith(NETWORKS)]


def public_functions() -> dict[str, Callable[..., Any]]:
    """Every public function defined in those modules."""
    found: dict[str, Callable[..., Any]] = {}
    for module in modules_of_columns():
        loaded = importlib.import_module(module)
        for name, thing in inspect.getmembers(loaded, inspect.isfunction):
            if thing.__module__ == module and not name.startswith("_"):
                found[name] = thing
    return found


FUNCTIONS = {name: f for name, f in public_functions().items() if name not in SCALAR_FUNCTIONS}


def columns_of(value: Any) -> tuple[Array, ...]:
    """The arrays in an argument or a result."""
    return (value.least, value.greatest, value.nominal) if isinstance(value, Interval) else (value,)


def one_column(value: Any, at: int) -> Any:
    """The same argument for one column only."""
    if isinstance(value, Interval):
        return Interval(*(column[at : at + 1] for column in columns_of(value)))
    return value[at : at + 1]


def draw_arguments(data: st.DataObject, function: Callable[..., Any], count: int) -> list[Any]:
    """Arguments by the annotations of the function."""
    hints = typing.get_type_hints(function)
    arguments: list[Any] = []
    for name in inspect.signature(function).parameters:
        width = 3 if hints[name] is Interval else 1
        drawn = [np.array(data.draw(st.lists(NUMBERS, min_size=count, max_size=count))) for _ in range(width)]
        arguments.append(Interval(*drawn) if width == 3 else drawn[0])
    return arguments


def test_every_module_has_functions_to_try() -> None:
    assert {function.__module__ for function in FUNCTIONS.values()} == set(modules_of_columns())
    assert {"stored_energy", "discharge_time", "transformer_impedance", "regulation"} <= set(FUNCTIONS)


@pytest.mark.parametrize("name", sorted(FUNCTIONS))
@settings(max_examples=60, deadline=None)
@given(data=st.data(), count=st.integers(1, 9))
def test_many_columns_equal_single_columns_to_the_last_bit(name: str, data: st.DataObject, count: int) -> None:
    arguments = draw_arguments(data, FUNCTIONS[name], count)
    with np.errstate(all="ignore"):
        together = columns_of(FUNCTIONS[name](*arguments))
        singly = [columns_of(FUNCTIONS[name](*(one_column(a, at) for a in arguments))) for at in range(count)]
    for which, column in enumerate(together):
        assert column.shape == (count,)
        assert column.dtype == np.float64
        apart = np.concatenate([parts[which] for parts in singly])
        both_nan = np.isnan(column) & np.isnan(apart)
        assert ((column.view(np.int64) == apart.view(np.int64)) | both_nan).all()


@pytest.mark.parametrize("name", sorted(FUNCTIONS))
def test_no_column_gives_no_column(name: str) -> None:
    hints = typing.get_type_hints(FUNCTIONS[name])
    empty = np.array([], dtype=np.float64)
    arguments = [
        Interval(empty, empty, empty) if hints[parameter] is Interval else empty
        for parameter in inspect.signature(FUNCTIONS[name]).parameters
    ]
    for column in columns_of(FUNCTIONS[name](*arguments)):
        assert column.shape == (0,)


@pytest.mark.parametrize("name", sorted(FUNCTIONS))
def test_arguments_are_left_as_they_were(name: str) -> None:
    hints = typing.get_type_hints(FUNCTIONS[name])
    arguments: list[Any] = []
    for parameter in inspect.signature(FUNCTIONS[name]).parameters:
        columns = [np.array([0.4, 1.5, np.nan, 3.0]) for _ in range(3)]
        arguments.append(Interval(*columns) if hints[parameter] is Interval else columns[0])
    before = [column.copy() for argument in arguments for column in columns_of(argument)]
    with np.errstate(all="ignore"):
        FUNCTIONS[name](*arguments)
    after = [column for argument in arguments for column in columns_of(argument)]
    for one, other in zip(before, after, strict=True):
        np.testing.assert_array_equal(one, other)
