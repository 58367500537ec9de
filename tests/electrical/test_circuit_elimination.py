"""The elimination chosen from the shape, beside the one that sees the values."""

import dataclasses
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from faultloop.electrical import circuits
from faultloop.electrical.circuit_dense import answered
from faultloop.electrical.circuit_elements import (
    Capacitor,
    CurrentSource,
    Element,
    IdealTransformer,
    Impedance,
    Resistor,
    VoltageSource,
)
from faultloop.electrical.circuit_solution import Solution, current_through, power_imbalance, voltage_between
from tests.benchmarks.circuits_speed import elements
from tests.electrical.networks import Rng, answer, changed, column, network, node_names, renamed, two

SEEDS = st.integers(0, 2**32 - 1)
many = settings(max_examples=80, deadline=None)
NONE = column(0.0)


@pytest.fixture
def pivoted(monkeypatch: pytest.MonkeyPatch) -> list[int]:
    """Networks that were sent to the elimination that sees the values."""
    seen: list[int] = []

    def watched(equations: Any, chosen: Any) -> Any:
        seen.extend(chosen.tolist())
        return answered(equations, chosen)

    monkeypatch.setattr(circuits, "answered", watched)
    return seen


def beside_pivoted(found: Solution, part: float) -> None:
    """Every known potential and current of what has an answer, beside the greatest of its network."""
    unknown = [defect.networks for defect in found.defects if defect.kind != "undetermined"]
    solved = np.flatnonzero(~np.logical_or.reduce(unknown)) if unknown else np.arange(len(found.potential_v))
    nodes = len(found.nodes)
    rows, _ = answered(found.equations, solved)
    for ours, theirs in ((found.potential_v[solved].T, rows[:nodes]), (found.current_a[solved].T, rows[nodes:])):
        np.testing.assert_array_equal(np.isnan(ours), np.isnan(theirs))
        greatest = np.nanmax(np.abs(theirs), axis=0, initial=0.0)
        assert (np.nan_to_num(np.abs(ours - theirs)) <= part * greatest).all()


def with_links(rng: Rng, parts: tuple[Element, ...], share: float) -> tuple[Element, ...]:
    """Some impedances as links, some open, others in each network; and a resistor open here and there."""

    def odd(field: str, value: Any) -> Any:
        return np.where(odds < share, 0.0, np.where((odds > 1.0 - share) & (field == "resistance_ohm"), np.inf, value))

    made = []
    for part in parts:
        odds = rng.uniform(size=len(part.resistance_ohm)) if isinstance(part, Impedance | Resistor) else 0.5
        if isinstance(part, Resistor):
            odds = np.maximum(odds, share)  # a resistor may be open, not a link
        made.append(changed(part, odd) if isinstance(part, Impedance | Resistor) else part)
    return tuple(made)


@many
@given(SEEDS, st.integers(2, 24), st.sampled_from([0.5, 1.5, 3.0]))
def test_the_two_eliminations_agree(seed: int, size: int, decades: float) -> None:
    """Up to six decades within 1e-10 of the greatest potential and current."""
    found = answer(*network(np.random.default_rng(seed), size, count=5, decades=decades))
    beside_pivoted(found, 1e-10)
    assert (power_imbalance(found) <= 1e-9).all()


@many
@given(SEEDS, st.integers(2, 24))
def test_the_two_eliminations_agree_over_nine_decades(seed: int, size: int) -> None:
    beside_pivoted(answer(*network(np.random.default_rng(seed), size, count=5, decades=4.5)), 1e-8)


@many
@given(SEEDS, st.integers(2, 16))
def test_the_two_eliminations_agree_on_links_and_floating_parts(seed: int, size: int) -> None:
    """Links, open elements and two transformers, and a part that floats beside them."""
    rng = np.random.default_rng(seed)
    parts = with_links(rng, network(rng, size, count=7), 0.1)
    names = ["earth", *node_names(parts)]
    wound = [
        IdealTransformer(f"wound{at}", *two(rng, names), *two(rng, names), column(*rng.uniform(0.2, 5.0, 7)))
        for at in range(2)
    ]
    loose = [dataclasses.replace(renamed(part, {"earth": "f00"}), name=f"f{part.name}") for part in network(rng, 2, 7)]
    loose = [renamed(part, {"n01": "f01"}) for part in loose]
    found = answer(*parts, *wound, *loose)
    assert any({"f00", "f01"} == set(island.nodes) for island in found.islands)
    beside_pivoted(found, 1e-9)


@many
@given(SEEDS, st.integers(2, 16), st.integers(1, 41), st.booleans())
def test_a_network_has_the_same_bits_alone_and_at_any_place(seed: int, size: int, count: int, mixed: bool) -> None:
    """One network repeated, with others before and behind it, in batches of odd and even length."""
    rng = np.random.default_rng(seed)
    parts = network(rng, size, count=count)
    parts = with_links(rng, parts, 0.05) if mixed else parts
    together = answer(*parts)
    at = int(rng.integers(count))
    alone = answer(*(changed(part, lambda _, value: value[at : at + 1]) for part in parts))
    order = np.concatenate([rng.permutation(count), np.full(int(rng.integers(1, 20)), at), rng.permutation(count)])
    shuffled = answer(*(changed(part, lambda _, value: value[order]) for part in parts))
    for place, found in [(at, together), *((int(one), shuffled) for one in np.flatnonzero(order == at))]:
        for ours, single in ((found.potential_v, alone.potential_v), (found.current_a, alone.current_a)):
            np.testing.assert_array_equal(
                np.ascontiguousarray(ours[place]).view(np.int64), np.ascontiguousarray(single[0]).view(np.int64)
            )


def test_one_network_has_the_same_bits_all_along_a_batch_of_many_blocks() -> None:
    """4,001 and 9,999 times the same network of 20 nodes."""
    parts = elements(3)
    single = answer(*(changed(part, lambda _, value: value[-1:]) for part in parts))
    for count in (4001, 9999):
        found = answer(*(changed(part, lambda _, value, n=count: np.repeat(value[-1:], n)) for part in parts))  # type: ignore[misc]
        np.testing.assert_array_equal(found.potential_v, np.repeat(single.potential_v, count, axis=0))
        np.testing.assert_array_equal(found.current_a, np.repeat(single.current_a, count, axis=0))


def tank(*reactance: float) -> tuple[Element, ...]:
    """A coil beside a bank of 1 ohm at the far end of a resistor: in resonance nothing flows."""
    return (
        VoltageSource("mains", "line", "earth", column(230.0 + 0j), column(1.0), NONE),
        Resistor("feed", "line", "tank", column(1e5)),
        Capacitor("bank", "tank", "earth", column(1e9 / (2.0 * np.pi * 50.0))),
        Impedance("coil", "tank", "earth", NONE, column(*reactance)),
    )


def test_what_cancels_in_the_order_of_the_shape_goes_the_other_way(pivoted: list[int]) -> None:
    """The coil with the bank at its node is the cheapest pivot, and near resonance there is nothing left of it."""
    found = answer(*tank(3.0, 1.0 + 1e-9, 0.5, 1.0 - 1e-12))
    assert pivoted == [1, 3]
    for at, reactance in enumerate((3.0, 1.0 + 1e-9, 0.5, 1.0 - 1e-12)):
        admittance = 1.0j - 1.0j / reactance
        expected = 230.0 / (1.0 + 100_001.0 * admittance)
        assert voltage_between(found, "tank", "earth")[at] == pytest.approx(expected, rel=1e-9)


def test_a_balance_that_lacks_too_much_goes_the_other_way(pivoted: list[int]) -> None:
    """A loop of resistors held by teraohms: its potentials from earth hang on what its balances lack."""
    found = answer(
        CurrentSource("drive", "a", "b", column(1.0)),
        Resistor("load", "a", "b", column(3.3)),
        Resistor("other", "b", "c", column(7.7)),
        Resistor("third", "c", "a", column(9.1)),
        Resistor("insulation", "c", "earth", column(1e3, 1e13)),
    )
    assert pivoted == [1]
    across = 1.0 / (1.0 / 3.3 + 1.0 / 16.8)
    assert voltage_between(found, "a", "b") == pytest.approx([across] * 2, rel=1e-6)
    assert abs(current_through(found, "insulation"))[0] < 1e-12


def test_a_shape_that_shows_no_order_goes_the_other_way(pivoted: list[int]) -> None:
    """Windings of unequal ratio side by side: no voltage, i1 + i2 = J and 2·i1 + 3·i2 = 0."""
    found = answer(
        CurrentSource("drive", "a", "earth", column(1.0, 5.0)),
        IdealTransformer("one", "a", "earth", "b", "earth", column(2.0)),
        IdealTransformer("other", "a", "earth", "b", "earth", column(3.0)),
    )
    assert pivoted == [0, 1]
    assert current_through(found, "one.primary") == pytest.approx([3.0, 15.0])
    assert current_through(found, "other.primary") == pytest.approx([-2.0, -10.0])
    assert not found.potential_v.any()


def test_usual_networks_stay_with_the_order_of_the_shape(pivoted: list[int]) -> None:
    """The networks whose speed is measured, and milliohms beside gigaohms."""
    answer(*elements(500))
    answer(
        VoltageSource("bench", "p1", "p2", column(230.0 + 0j), column(0.05), NONE),
        Impedance("lead", "p1", "far", column(1e-3), NONE),
        Impedance("load", "far", "p2", column(10.0), NONE),
        Resistor("one", "far", "earth", column(2e9)),
        Resistor("other", "p2", "earth", column(1e9)),
    )
    assert not pivoted
