"""Many wirings at once against the solver of networks of one shape, which goes another way."""

from typing import Any

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from faultloop.electrical import circuit_wirings
from faultloop.electrical.circuit_elements import Element, Impedance, VoltageSource
from faultloop.electrical.circuit_layout import Circuit
from faultloop.electrical.circuit_solution import current_through, voltage_between
from faultloop.electrical.circuit_wirings import Branches, contact, contact_with_earth, nearest_path, solve_wirings
from faultloop.electrical.circuits import solve

NODES, OMEGA = 6, 2.0 * np.pi * 50.0
# With nodes alone as unknowns 0.1 ohm beside 0.1 nF leaves seven figures of the source's voltage: 16 less the 8.5
# decades between the two, and one for sums.
LEFT = 1e-7
branch = st.tuples(
    st.integers(0, NODES - 1),
    st.integers(0, NODES - 1),
    st.sampled_from(["resistor", "capacitor", "source"]),
    st.floats(0.0, 1.0),
).filter(lambda told: told[0] != told[1])
networks = st.lists(st.lists(branch, min_size=1, max_size=9), min_size=1, max_size=4)


def admittance(kind: str, share: float) -> complex:
    """Between 0.1 Ω and 1 MΩ, or 0.1 nF and 100 nF."""
    return OMEGA * 1e-10 * 10 ** (3 * share) * 1j if kind == "capacitor" else complex(10 ** (1 - 7 * share))


def branches(told: list[list[Any]]) -> Branches:
    rows = [(at, *one) for at, network in enumerate(told) for one in network]
    return Branches(
        np.array([row[0] for row in rows]),
        np.array([row[1] for row in rows]),
        np.array([row[2] for row in rows]),
        np.array([admittance(row[3], row[4]) for row in rows]),
        np.array([230.0 if row[3] == "source" else 0.0 for row in rows], np.complex128),
    )


def name(node: int) -> str:
    return "earth" if node == 0 else f"n{node}"


def elements(told: list[Any], joined: tuple[int, int] | None) -> tuple[Element, ...]:
    nought, found = np.zeros(1), []
    for at, (plus, minus, kind, share) in enumerate(told):
        z = 1.0 / admittance(kind, share)
        ends, ohm = (name(plus), name(minus)), (np.array([z.real]), np.array([z.imag]))
        if kind == "source":
            found.append(VoltageSource(f"b{at}", *ends, np.array([230.0 + 0j]), *ohm))
        else:
            found.append(Impedance(f"b{at}", *ends, *ohm))
    if joined is not None:
        found.append(Impedance("body", name(joined[0]), name(joined[1]), np.array([1000.0]), nought))
    return tuple(found)


@given(told=networks, one=st.integers(0, NODES - 1), other=st.integers(0, NODES - 1))
def test_same_as_the_solver_of_one_shape(told: list[list[Any]], one: int, other: int) -> None:
    wired = solve_wirings(len(told), NODES, branches(told), len(told))
    pair = (np.full((len(told), 1), one), np.full((len(told), 1), other))
    voltage, current = contact(wired, *pair, 1000.0)
    for at, network in enumerate(told):
        solution = solve(Circuit(elements(network, None), np.array([50.0])))
        if not {name(one), name(other)} <= set(solution.nodes):
            continue
        expected = voltage_between(solution, name(one), name(other))[0]
        if one == other:
            continue
        np.testing.assert_allclose(voltage[at, 0], expected, rtol=1e-6, atol=LEFT * 230.0)
        body = current_through(solve(Circuit(elements(network, (one, other)), np.array([50.0]))), "body")[0]
        flowing = 0.0 if np.isnan(body) else body
        np.testing.assert_allclose(current[at, 0], flowing, rtol=1e-6, atol=LEFT * 230.0 / 1000.0)


@given(told=networks)
def test_one_alone_is_the_same_as_among_others(told: list[list[Any]]) -> None:
    together = solve_wirings(len(told), NODES, branches(told), len(told))
    for at, network in enumerate(told):
        alone = solve_wirings(1, NODES, branches([network]), 1)
        assert (alone.potential_v[0] == together.potential_v[at]).all()
        assert (alone.transfer_ohm[0] == together.transfer_ohm[at]).all()


@given(told=networks)
def test_a_path_leads_to_earth_and_is_as_long_as_it_says(told: list[list[Any]]) -> None:
    parts = branches(told)
    weight = 1.0 / np.abs(parts.admittance)
    distance, following = nearest_path(len(told), NODES, parts, weight)
    for at in range(len(told)):
        for node in range(1, NODES):
            if np.isinf(distance[at, node]):
                continue
            here, length = node, 0.0
            for _ in range(NODES):
                after = int(following[at, here])
                between = (parts.network == at) & (
                    ((parts.plus == here) & (parts.minus == after)) | ((parts.minus == here) & (parts.plus == after))
                )
                length, here = length + weight[between].min(), after
                if here == 0:
                    break
            assert here == 0
            assert length == pytest.approx(distance[at, node])


@given(told=networks)
def test_a_contact_with_earth_is_a_contact(told: list[list[Any]]) -> None:
    wired = solve_wirings(len(told), NODES, branches(told), len(told))
    nodes = np.tile(np.arange(NODES), (len(told), 1))
    _, current = contact(wired, nodes, np.zeros_like(nodes), 1000.0)
    np.testing.assert_allclose(contact_with_earth(wired, nodes, 1000.0), current, rtol=1e-12, atol=1e-15)


@given(told=networks)
def test_blocks_make_no_difference(told: list[list[Any]]) -> None:
    parts = branches(told)
    weight, found = 1.0 / np.abs(parts.admittance), []
    for entries in (1, 1 << 17):
        with pytest.MonkeyPatch.context() as patch:
            patch.setattr(circuit_wirings, "BLOCK_ENTRIES", entries)
            wired = solve_wirings(len(told), NODES, parts, 2)
            found.append((wired.potential_v, wired.own_ohm, wired.transfer_ohm))
            found[-1] += nearest_path(len(told), NODES, parts, weight)
    for one, other in zip(*found, strict=True):
        assert (one == other).all()
