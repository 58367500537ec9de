"""Laws that every solution of a network obeys, and names for what has no solution."""

import dataclasses
import math
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from faultloop.electrical.circuit_elements import (
    Capacitor,
    CurrentSource,
    Element,
    IdealTransformer,
    Impedance,
    Inductor,
    Resistor,
    VoltageSource,
)
from faultloop.electrical.circuit_layout import Circuit
from faultloop.electrical.circuit_sensitivities import (
    current_sensitivities,
    magnitude_sensitivities,
    voltage_sensitivities,
)
from faultloop.electrical.circuit_solution import current_through, power, power_imbalance, voltage_between
from faultloop.electrical.circuits import solve
from tests.electrical.networks import FIFTY, answer, changed, column, network, node_names, renamed, spread_over

SEEDS = st.integers(0, 2**32 - 1)
SIZES = st.integers(2, 12)
SOURCE_FIELDS = {"emf_v", "current_a"}
many = settings(max_examples=60, deadline=None)


def close(one: Any, other: Any, part: float = 1e-9) -> None:
    """Equal within a part of the greatest magnitude."""
    one, other = np.asarray(one), np.asarray(other)
    assert np.isfinite(one).all()
    assert np.abs(one - other).max() <= part * max(np.abs(one).max(), np.abs(other).max())


def parts_of(phasors: Any) -> Any:
    """Real and imaginary parts, so that they are compared bit by bit, nan for nan."""
    return np.ascontiguousarray(np.atleast_1d(phasors)).view(np.float64)


def silent(part: Element) -> Element:
    """The element with its sources at zero."""
    return changed(part, lambda field, value: value * 0.0 if field in SOURCE_FIELDS else value)


@many
@given(SEEDS, SIZES)
def test_reciprocity(seed: int, size: int) -> None:
    rng = np.random.default_rng(seed)
    passive = network(rng, size, sources=False)
    here, there = rng.choice(node_names(passive), 2)
    forth = answer(*passive, CurrentSource("drive", here, "earth", column(1.0)))
    back = answer(*passive, CurrentSource("drive", there, "earth", column(1.0)))
    greatest = max(abs(forth.potential_v).max(), abs(back.potential_v).max())
    difference = voltage_between(forth, there, "earth") - voltage_between(back, here, "earth")
    assert abs(difference[0]) <= 1e-9 * greatest


@many
@given(SEEDS, SIZES)
def test_superposition(seed: int, size: int) -> None:
    parts = network(np.random.default_rng(seed), size)
    together = answer(*parts)
    driven = [at for at, part in enumerate(parts) if isinstance(part, VoltageSource | CurrentSource)]
    alone = [answer(*(part if at == only else silent(part) for at, part in enumerate(parts))) for only in driven]
    close(together.potential_v, sum(one.potential_v for one in alone))
    close(together.current_a, sum(one.current_a for one in alone))


@many
@given(SEEDS, SIZES)
def test_energy_balance(seed: int, size: int) -> None:
    found = answer(*network(np.random.default_rng(seed), size, count=5))
    assert (power_imbalance(found) <= 1e-9).all()
    taken = power(found).real
    for at, name in enumerate(found.branches):
        if name.startswith(("resistor", "impedance")):
            assert (taken[:, at] >= -1e-12 * abs(taken).max()).all()


@many
@given(SEEDS, SIZES)
def test_order_of_nodes_and_elements_does_not_matter(seed: int, size: int) -> None:
    rng = np.random.default_rng(seed)
    parts = network(rng, size)
    nodes = node_names(parts)
    names = dict(zip(nodes, rng.permutation([f"m{node}" for node in nodes]).tolist(), strict=True))
    order = rng.permutation(len(parts))
    one, other = answer(*parts), answer(*(renamed(parts[at], names) for at in order))
    close(
        *(np.stack([voltage_between(s, n, "earth") for n in ns]) for s, ns in ((one, nodes), (other, names.values())))
    )
    close(*(np.stack([current_through(found, branch) for branch in one.branches]) for found in (one, other)))


@many
@given(SEEDS, SIZES)
def test_thevenin(seed: int, size: int) -> None:
    rng = np.random.default_rng(seed)
    parts = network(rng, size)
    port = str(rng.choice(node_names(parts)))
    load = spread_over(rng, 1.0, 1e4, 1)
    shorted = answer(*parts, Impedance("link", port, "earth", column(0.0), column(0.0)))
    loaded = answer(*parts, Resistor("load", port, "earth", load))
    inward = answer(*(silent(part) for part in parts), CurrentSource("drive", port, "earth", column(1.0)))
    open_voltage = voltage_between(answer(*parts), port, "earth")
    inner = voltage_between(inward, port, "earth")
    scale = abs(shorted.current_a).max()
    assert abs(current_through(shorted, "link") - open_voltage / inner)[0] <= 1e-9 * scale
    assert abs(current_through(loaded, "load") - open_voltage / (inner + load))[0] <= 1e-9 * scale


@many
@given(SEEDS, SIZES, st.floats(0.01, 100.0))
def test_scaling(seed: int, size: int, factor: float) -> None:
    """All impedances larger by a factor leave voltages that voltages drive, and lower the currents by it."""
    larger = {"capacitance_nf": 1.0 / factor, "current_a": 1.0 / factor, "emf_v": 1.0, "ratio": 1.0}
    parts = network(np.random.default_rng(seed), size)
    scaled = [changed(part, lambda field, value: value * larger.get(field, factor)) for part in parts]
    one, other = answer(*parts), answer(*scaled)
    close(one.potential_v, other.potential_v)
    close(one.current_a, other.current_a * factor)
    doubled = [changed(part, lambda field, value: value * 2.0 if field in SOURCE_FIELDS else value) for part in parts]
    np.testing.assert_array_equal(answer(*doubled).potential_v, 2.0 * one.potential_v)


def some_odd(rng: np.random.Generator, part: Element) -> Element:
    """The element with some values open, ideal or unknown."""

    def odd(field: str, value: Any) -> Any:
        if field in SOURCE_FIELDS:
            return value
        choices = {
            "resistance_ohm": [0.0, np.inf, np.nan],
            "reactance_ohm": [0.0, np.inf],
            "capacitance_nf": [0.0, -1.0],
        }
        return np.where(rng.uniform(size=len(value)) < 0.1, rng.choice(choices.get(field, [1.0])), value)

    return changed(part, odd)


@many
@given(SEEDS, SIZES, st.integers(1, 9), st.booleans())
def test_many_networks_equal_single_ones_to_the_last_bit(seed: int, size: int, count: int, odd: bool) -> None:
    rng = np.random.default_rng(seed)
    parts = network(rng, size, count=count)
    if odd:
        parts = tuple(some_odd(rng, part) for part in parts)
    frequency = rng.choice([0.0, 50.0, 60.0, 400.0], count)
    together = solve(Circuit(parts, frequency))
    node, branch = str(rng.choice(together.nodes)), str(rng.choice(together.branches))
    slopes = (voltage_sensitivities(together, node, "earth"), current_sensitivities(together, branch))
    for at in range(count):
        chosen = [changed(part, lambda _, value, at=at: value[at : at + 1]) for part in parts]  # type: ignore[misc]
        single = solve(Circuit(tuple(chosen), frequency[at : at + 1]))
        alone = (voltage_sensitivities(single, node, "earth"), current_sensitivities(single, branch))
        pairs = [(together.potential_v[at], single.potential_v[0]), (together.current_a[at], single.current_a[0])]
        pairs += [(many[key][at], one[key][0]) for many, one in zip(slopes, alone, strict=True) for key in many]
        for one, other in pairs:
            np.testing.assert_array_equal(parts_of(one), parts_of(other))
        assert {(d.kind, d.nodes, d.elements) for d in together.defects if d.networks[at]} == {
            (d.kind, d.nodes, d.elements) for d in single.defects
        }
        assert {i.nodes for i in together.islands if i.networks[at]} == {i.nodes for i in single.islands}


def test_arguments_are_left_as_they_were() -> None:
    parts = network(np.random.default_rng(8), 9, count=3)
    before = [changed(part, lambda _, value: value.copy()) for part in parts]
    found = answer(*parts)
    voltage_sensitivities(found, "n01", "earth")
    for one, other in zip(parts, before, strict=True):
        for field in dataclasses.fields(one):
            np.testing.assert_array_equal(getattr(one, field.name), getattr(other, field.name))


def test_blocks_do_not_show() -> None:
    """More networks than one block holds, beside the same ones in two halves."""
    parts = network(np.random.default_rng(4), 12, count=3000)
    whole = answer(*parts).potential_v
    halves = [
        answer(*(changed(p, lambda _, v, c=cut: v[c]) for p in parts)).potential_v
        for cut in (slice(1777), slice(1777, None))
    ]  # type: ignore[misc]
    np.testing.assert_array_equal(whole, np.concatenate(halves))


@many
@given(SEEDS, st.integers(2, 7))
def test_sensitivities_against_finite_differences(seed: int, size: int) -> None:
    rng = np.random.default_rng(seed)
    parts = network(rng, size)
    found = answer(*parts)
    node, branch = str(rng.choice(found.nodes)), str(rng.choice(found.branches))
    outputs = (
        (lambda s: voltage_between(s, node, "earth"), voltage_sensitivities(found, node, "earth"), found.potential_v),
        (lambda s: current_through(s, branch), current_sensitivities(found, branch), found.current_a),
    )
    step = 1e-3
    for at, part in enumerate(parts):
        for field in dataclasses.fields(part):
            if isinstance(value := getattr(part, field.name), str):
                continue
            moved = dataclasses.replace(part, **{field.name: value * (1.0 + step * column(1.0, -1.0, 2.0, -2.0))})
            nearby = answer(*parts[:at], moved, *parts[at + 1 :])
            for output, slopes, scale in outputs:
                up, down, far_up, far_down = output(nearby)
                difference = (8.0 * (up - down) - (far_up - far_down)) / (12.0 * step)  # of fourth order
                slope = (slopes[part.name, field.name] * value)[0]
                assert abs(difference - slope) <= 1e-6 * abs(slope) + 1e-9 * abs(scale).max()


def test_sensitivity_of_a_magnitude() -> None:
    """A divider: |U| = E·R2/(R1 + R2), and the derivatives as they are known."""
    found = answer(
        VoltageSource("e", "a", "earth", column(100j), column(0.0), column(0.0)),
        Resistor("r1", "a", "b", column(30.0)),
        Resistor("r2", "b", "earth", column(70.0)),
    )
    voltage = voltage_between(found, "b", "earth")
    slopes = magnitude_sensitivities(voltage, voltage_sensitivities(found, "b", "earth"))
    assert slopes["r1", "resistance_ohm"] == pytest.approx([-100.0 * 70.0 / 100.0**2])
    assert slopes["r2", "resistance_ohm"] == pytest.approx([100.0 * 30.0 / 100.0**2])
    none = magnitude_sensitivities(voltage * 0.0, voltage_sensitivities(found, "b", "earth"))
    assert np.isnan(none["r1", "resistance_ohm"]).all()


@many
@given(SEEDS, st.integers(2, 6), st.integers(2, 6))
def test_a_floating_part_is_named_and_counted_from_itself(seed: int, size: int, other: int) -> None:
    rng = np.random.default_rng(seed)
    tied = network(rng, size)
    loose = tuple(
        dataclasses.replace(
            renamed(p, {"earth": "f00", **{f"n{i:02}": f"f{i:02}" for i in range(9)}}), name=f"f{p.name}"
        )
        for p in network(rng, other)
    )
    found = answer(*tied, *loose)
    (island,) = found.islands
    assert set(island.nodes) == {"f00", *node_names(loose)}
    assert island.reference == "f00"
    assert np.isnan(voltage_between(found, "f01", "n01")).all()
    assert np.isnan(voltage_between(found, "f01", "earth")).all()
    apart = answer(*(renamed(p, {"f00": "earth"}) for p in loose))
    ends = node_names(loose)
    inside = np.stack([voltage_between(found, node, "f00") for node in ends])
    close(inside, np.stack([voltage_between(apart, node if node != "f00" else "earth", "earth") for node in ends]))
    assert not found.defects
    assert (power_imbalance(found) <= 1e-9).all()


def test_a_part_floats_in_those_networks_only_where_its_link_is_open() -> None:
    found = answer(
        VoltageSource("bench", "p1", "p2", column(230.0), column(1.0), column(0.0)),
        Resistor("load", "p1", "p2", column(100.0)),
        Resistor("insulation", "p2", "earth", column(1e6, np.inf)),
        Capacitor("cable", "p1", "earth", column(0.0)),
        Resistor("meter", "earth", "frame", column(1.0)),
    )
    (island,) = found.islands
    assert island.nodes == ("p1", "p2")
    assert island.networks.tolist() == [False, True]
    assert np.isnan(voltage_between(found, "p1", "earth")).tolist() == [False, True]
    assert abs(voltage_between(found, "p1", "p2")) == pytest.approx([230.0 * 100 / 101] * 2)


def test_without_earth_among_the_nodes_all_floats() -> None:
    found = answer(Resistor("r", "a", "b", column(5.0)), CurrentSource("i", "a", "b", column(2.0)))
    assert found.islands[0].nodes == ("a", "b")
    assert found.potential_v.tolist() == [[0.0, pytest.approx(-10.0)]]
    assert voltage_between(found, "a", "b") == pytest.approx([10.0])


def only_defect(*parts: Element) -> tuple[str, tuple[str, ...], tuple[str, ...], list[bool]]:
    """The one thing that is wrong."""
    (defect,) = answer(*parts).defects
    return defect.kind, defect.nodes, defect.elements, defect.networks.tolist()


def ideal(name: str, plus: str, minus: str, *emf: complex) -> VoltageSource:
    """A source without internal impedance."""
    return VoltageSource(name, plus, minus, column(*emf) + 0j, column(0.0), column(0.0))


def link(name: str, plus: str, minus: str) -> Impedance:
    """No impedance at all."""
    return Impedance(name, plus, minus, column(0.0), column(0.0))


LOAD = Resistor("load", "a", "earth", column(10.0))


def test_ideal_sources_that_contradict_each_other_are_named() -> None:
    parts = (ideal("one", "a", "earth", 230.0, 230.0), ideal("two", "a", "earth", 230.0, 110.0), LOAD)
    found = answer(*parts)
    conflict, shared = found.defects
    assert (conflict.kind, conflict.elements, conflict.networks.tolist()) == (
        "conflicting-sources",
        ("one", "two"),
        [False, True],
    )
    assert (shared.kind, shared.elements) == ("undetermined", ("one", "two"))
    assert current_through(found, "load")[0] == pytest.approx(23.0)
    assert np.isnan(found.current_a[0, :2]).all()
    assert np.isnan(found.current_a[1]).all()


def test_a_link_over_an_ideal_source_is_a_conflict() -> None:
    found = answer(ideal("mains", "a", "earth", 230.0), link("clip", "a", "earth"), LOAD)
    assert {(d.kind, d.elements) for d in found.defects} == {
        ("conflicting-sources", ("mains", "clip")),
        ("undetermined", ("mains", "clip")),
    }


def test_links_in_a_loop_share_a_current_in_no_known_way() -> None:
    parts = (
        VoltageSource("mains", "a", "earth", column(230.0), column(1.0), column(0.0)),
        link("one", "a", "b"),
        link("two", "a", "b"),
        Resistor("load", "b", "earth", column(22.0)),
    )
    assert only_defect(*parts) == ("undetermined", (), ("one", "two"), [True])
    found = answer(*parts)
    assert current_through(found, "load") == pytest.approx([10.0])
    assert np.isnan(current_through(found, "one")).all()


def test_a_link_from_a_node_to_itself_carries_what_nobody_knows() -> None:
    for node in ("a", "earth"):
        assert only_defect(link("loop", node, node), LOAD) == ("undetermined", (), ("loop",), [True])
    assert only_defect(link("loop", "earth", "earth")) == ("undetermined", (), ("loop",), [True])


def test_a_current_source_without_a_way_back_is_named() -> None:
    drive = CurrentSource("drive", "b", "earth", column(1.0, 0.0))
    part = Resistor("r", "b", "c", column(5.0))
    assert only_defect(drive, part, LOAD) == ("conflicting-sources", ("b", "c"), ("drive",), [True, False])
    assert np.isnan(answer(drive, part, LOAD).potential_v[0, :2]).all()


def test_what_hangs_on_a_winding_alone_is_undetermined() -> None:
    """The primary carries nothing, the secondary hangs on one end: no voltage is fixed, no current is in doubt."""
    parts = (IdealTransformer("t", "a", "earth", "b", "earth", column(2.0)), Resistor("r", "c", "earth", column(1.0)))
    assert only_defect(*parts) == ("undetermined", ("a", "b"), (), [True])
    found = answer(*parts)
    assert np.isnan(voltage_between(found, "b", "earth")).all()
    assert not found.current_a.any()


def test_transformers_side_by_side() -> None:
    """Of equal ratio they share in no known way; of unequal ratio they contradict a source."""
    parts = (
        ideal("mains", "a", "earth", 230.0),
        IdealTransformer("t1", "a", "earth", "b", "earth", column(2.0, 2.0)),
        IdealTransformer("t2", "a", "earth", "b", "earth", column(2.0, 1.0)),
        Resistor("load2", "b", "earth", column(10.0)),
    )
    found = answer(*parts)
    told = {(d.kind, d.elements, tuple(d.networks.tolist())) for d in found.defects}
    assert ("undetermined", ("t1", "t2"), (True, False)) in told
    assert ("conflicting-sources", ("mains", "t1", "t2"), (False, True)) in told
    assert voltage_between(found, "b", "earth")[0] == pytest.approx(115.0)


def test_resonance_without_loss_is_named() -> None:
    parts = (
        Impedance("coil", "a", "earth", column(0.0), column(2.0, 2.0)),
        Impedance("bank", "a", "earth", column(0.0), column(-2.0, -4.0)),
        CurrentSource("drive", "a", "earth", column(1.0)),
    )
    kind, _, _, networks = only_defect(*parts)
    assert (kind, networks) == ("singular", [True, False])
    assert abs(voltage_between(answer(*parts), "a", "earth")[1]) == pytest.approx(4.0)


@pytest.mark.parametrize(
    "part",
    [
        Resistor("odd", "a", "earth", column(5.0, 0.0)),
        Resistor("odd", "a", "earth", column(5.0, math.nan)),
        Capacitor("odd", "a", "earth", column(5.0, -1.0)),
        Capacitor("odd", "a", "earth", column(5.0, math.inf)),
        Inductor("odd", "a", "earth", column(5.0, -1.0)),
        Impedance("odd", "a", "earth", column(5.0, -1.0), column(0.0)),
        Impedance("odd", "a", "earth", column(5.0), column(0.0, math.nan)),
        VoltageSource("odd", "a", "earth", column(5.0, math.nan), column(1.0), column(0.0)),
        CurrentSource("odd", "a", "earth", column(5.0, math.inf)),
        IdealTransformer("odd", "a", "earth", "b", "earth", column(5.0, 0.0)),
    ],
)
def test_a_value_that_cannot_be_leaves_its_network_unknown_and_no_other(part: Element) -> None:
    rest = (
        VoltageSource("e", "a", "earth", column(10.0), column(1.0), column(0.0)),
        Resistor("r", "b", "a", column(2.0)),
    )
    found = answer(*rest, part)
    (defect,) = found.defects
    assert (defect.kind, defect.elements, defect.networks.tolist()) == ("impossible-value", ("odd",), [False, True])
    assert np.isfinite(found.current_a[0]).all()
    assert np.isnan(found.current_a[1]).all()
    assert np.isnan(power_imbalance(found)).tolist() == [False, True]


def test_nothing_is_said_of_a_network_with_an_unknown_value() -> None:
    """An unknown resistance is not an open one: neither floating nor conflict is claimed."""
    found = answer(
        Resistor("insulation", "a", "earth", column(math.nan)),
        CurrentSource("drive", "a", "earth", column(1.0)),
        ideal("e", "b", "earth", 5.0),
        ideal("unknown", "b", "earth", math.nan),
    )
    assert {(d.kind, d.elements) for d in found.defects} == {
        ("impossible-value", ("insulation",)),
        ("impossible-value", ("unknown",)),
    }
    assert not found.islands


def test_an_unknown_frequency_leaves_its_network_unknown() -> None:
    found = solve(Circuit((LOAD, ideal("e", "a", "earth", 20.0)), column(50.0, math.nan)))
    assert np.isnan(current_through(found, "load")).tolist() == [False, True]


def test_direct_current_opens_capacitors_and_shorts_inductors() -> None:
    found = answer(
        ideal("e", "a", "earth", 12.0),
        Inductor("coil", "a", "b", column(1.0)),
        Resistor("r", "b", "earth", column(6.0)),
        Capacitor("c", "b", "far", column(100.0)),
        frequency=column(0.0),
    )
    assert current_through(found, "coil") == pytest.approx([2.0])
    assert found.islands[0].nodes == ("far",)


def test_milliohms_beside_gigaohms_cost_no_figures() -> None:
    """A floating bench of milliohms, held by gigaohms: each pole's voltage is the divider's, to twelve figures."""
    found = answer(
        VoltageSource("bench", "p1", "p2", column(230.0), column(0.05), column(0.0)),
        Impedance("lead", "p1", "far", column(1e-3), column(0.0)),
        Impedance("load", "far", "p2", column(10.0), column(0.0)),
        Resistor("one", "far", "earth", column(2e9)),
        Resistor("other", "p2", "earth", column(1e9)),
    )
    load = 10.0 * 3e9 / (10.0 + 3e9)  # the insulation lies beside it
    across = 230.0 * load / (load + 0.051)
    assert voltage_between(found, "far", "earth").real == pytest.approx([across * 2.0 / 3.0], rel=1e-12)


def test_clear_errors() -> None:
    with pytest.raises(ValueError, match="at least one element"):
        solve(Circuit((), FIFTY))
    with pytest.raises(ValueError, match="one name: load"):
        answer(LOAD, LOAD)
    with pytest.raises(ValueError, match=r"column of one length.*load"):
        solve(Circuit((LOAD, ideal("e", "a", "earth", 1.0, 2.0)), column(50.0, 50.0, 50.0)))
    with pytest.raises(ValueError, match="no node called elsewhere"):
        voltage_between(answer(LOAD), "a", "elsewhere")
    with pytest.raises(ValueError, match="no branch called lode"):
        current_through(answer(LOAD), "lode")


def test_no_network_gives_no_network() -> None:
    found = answer(Resistor("r", "a", "earth", np.array([])), ideal("e", "a", "earth", 1.0))
    assert found.potential_v.shape == (0, 2)
    assert found.current_a.shape == (0, 2)
    assert voltage_sensitivities(found, "a", "earth")["r", "resistance_ohm"].shape == (0,)
