"""Currents to earth on separated and IT supplies beside the simulator ngspice, whose netlists are written by hand."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, fields
from typing import Any

import numpy as np
import pytest

from faultloop.electrical.circuit_elements import Capacitor, Element, Resistor, VoltageSource
from faultloop.electrical.circuit_layout import Circuit
from faultloop.electrical.circuit_models import touch_current_network
from faultloop.electrical.circuit_solution import voltage_between
from faultloop.electrical.circuit_supplies import (
    InsulatedSupply,
    SeparatedCircuit,
    current_to_earth,
    single_contact_currents,
)
from faultloop.electrical.circuits import solve
from faultloop.electrical.measurement import Array
from tests.electrical.networks import spread_over
from tests.reference.ngspice import Answers, simulated

AGREE = 1e-6
HERTZ = (50.0, 60.0)
SEPARATED, INSULATED, METERED = 60, 60, 16
Numbers = dict[str, Array]


@dataclass(frozen=True)
class Drawn:
    """Supplies of one kind by name of column, and what stands between the touched or faulty conductor and earth."""

    columns: Numbers
    path_ohm: Array

    @property
    def count(self) -> int:
        """How many."""
        return len(self.path_ohm)

    def one(self, at: int) -> dict[str, float]:
        """One supply by name."""
        return {name: float(values[at]) for name, values in self.columns.items()}


def separated(rng: np.random.Generator, count: int) -> Drawn:
    """Separated supplies from nearly nothing at earth to whole benches of filters and poor insulation."""
    named = {
        "secondary_v": rng.uniform(12.0, 500.0, count),
        "primary_v": rng.uniform(100.0, 500.0, count),
        "source_ohm": spread_over(rng, 0.01, 100.0, count),
        "frequency_hz": rng.choice(HERTZ, count),
        "l1_earth_nf": spread_over(rng, 1e-3, 2e3, count),
        "l2_earth_nf": spread_over(rng, 1e-3, 2e3, count),
        "interwinding_nf": np.where(rng.random(count) < 0.25, 0.0, spread_over(rng, 1e-3, 10.0, count)),
        "l1_earth_ohm": np.where(rng.random(count) < 0.25, np.inf, spread_over(rng, 1e4, 1e10, count)),
        "l2_earth_ohm": np.where(rng.random(count) < 0.25, np.inf, spread_over(rng, 1e4, 1e10, count)),
    }
    return Drawn(named, spread_over(rng, 200.0, 1e5, count))


def insulated(rng: np.random.Generator, count: int) -> Drawn:
    """IT supplies of one and of three lines, with and without a neutral, from a dead electrode to a poor one."""
    lines, neutral = rng.choice([1.0, 3.0], count), rng.random(count) < 0.5
    named = {
        "voltage_v": rng.uniform(100.0, 400.0, count),
        "lines": lines,
        "frequency_hz": rng.choice(HERTZ, count),
        "line_earth_nf": spread_over(rng, 1.0, 1e5, count),
        # Of one line the other conductor is what drives the current.
        "neutral_earth_nf": np.where(neutral | (lines == 1.0), spread_over(rng, 1.0, 1e5, count), 0.0),
    }
    path = spread_over(rng, 0.1, 1e4, count)
    path[:2] = 0.1, 1e4
    return Drawn(named, path)


def source_and_earth(name: str, given: dict[str, float], sign: float = 1.0) -> Iterator[str]:
    """Lines of a separated supply: poles `name`1 and `name`2, what holds each to earth, and the primary."""
    henries = given["source_ohm"] / (2.0 * np.pi * given["frequency_hz"])
    yield f"v{name}s {name}e {name}2 dc 0 ac {given['secondary_v']!r} 0"
    yield f"l{name}s {name}e {name}1 {henries!r}"
    yield f"v{name}p {name}p 0 dc 0 ac {given['primary_v']!r} {0 if sign > 0 else 180}"
    yield f"c{name}a {name}p {name}1 {given['interwinding_nf'] / 2.0 * 1e-9!r}"
    yield f"c{name}b 0 {name}2 {given['interwinding_nf'] / 2.0 * 1e-9!r}"
    for pole in "12":
        yield f"c{name}{pole} {name}{pole} 0 {given[f'l{pole}_earth_nf'] * 1e-9!r}"
        if np.isfinite(given[f"l{pole}_earth_ohm"]):
            yield f"r{name}{pole} {name}{pole} 0 {given[f'l{pole}_earth_ohm']!r}"


def contacts(drawn: Drawn) -> Iterator[str]:
    """Four netlists a supply: either pole touched, either polarity of the windings."""
    for at in range(drawn.count):
        for pole in "12":
            for word, sign in (("p", 1.0), ("n", -1.0)):
                name = f"s{at}{word}{pole}x"
                yield from source_and_earth(name, drawn.one(at), sign)
                yield f"r{name}body {name}{pole} 0 {float(drawn.path_ohm[at])!r}"


def faults(drawn: Drawn) -> Iterator[str]:
    """A netlist a supply: lines in a star, its middle held by the neutral's capacitance alone."""
    for at in range(drawn.count):
        name, given = f"i{at}x", drawn.one(at)
        for line in range(int(given["lines"])):
            yield f"v{name}{line} {name}{line} {name}n dc 0 ac {given['voltage_v']!r} {-120 * line}"
            yield f"c{name}{line} {name}{line} 0 {given['line_earth_nf'] * 1e-9!r}"
        if given["neutral_earth_nf"]:
            yield f"c{name}n {name}n 0 {given['neutral_earth_nf'] * 1e-9!r}"
        yield f"r{name} {name}0 0 {float(drawn.path_ohm[at])!r}"


def meters(drawn: Drawn) -> Iterator[str]:
    """A netlist a supply: the network of IEC 60990, figure 4, from the first pole to earth."""
    for at in range(drawn.count):
        name = f"m{at}x"
        yield from source_and_earth(name, drawn.one(at))
        yield f"r{name}s {name}1 {name}b 1500"
        yield f"c{name}s {name}1 {name}b 0.22u"
        yield f"r{name}b {name}b 0 500"
        yield f"r{name}f {name}b {name}w 10k"
        yield f"c{name}f {name}w 0 0.022u"


RNG = np.random.default_rng(20261202)
BENCHES, ISLANDS, UNDER_METER = separated(RNG, SEPARATED), insulated(RNG, INSULATED), separated(RNG, METERED)


@pytest.fixture(scope="module")
def simulator(tmp_path_factory: pytest.TempPathFactory) -> dict[float, Answers]:
    """All netlists in one run at both frequencies; a supply is read at its own."""
    lines: Sequence[str] = [*contacts(BENCHES), *faults(ISLANDS), *meters(UNDER_METER)]
    answers = simulated(lines, HERTZ, tmp_path_factory.mktemp("ngspice"))
    return dict(zip(HERTZ, answers, strict=True))


def volts(simulator: dict[float, Answers], drawn: Drawn, at: int, node: str) -> float:
    """Voltage of a node to earth at the frequency of its supply."""
    return float(abs(simulator[float(drawn.columns["frequency_hz"][at])][f"v({node})"]))


def test_contacts_with_separated_poles(simulator: dict[float, Answers]) -> None:
    ours = single_contact_currents(SeparatedCircuit(**BENCHES.columns), BENCHES.path_ohm)
    for pole, mine in zip("12", ours, strict=True):
        theirs = [
            max(volts(simulator, BENCHES, at, f"s{at}{word}{pole}x{pole}") for word in "pn") / BENCHES.path_ohm[at]
            for at in range(SEPARATED)
        ]
        np.testing.assert_allclose(mine, theirs, rtol=AGREE)


def test_first_faults_of_insulated_supplies(simulator: dict[float, Answers]) -> None:
    ours = current_to_earth(InsulatedSupply(**ISLANDS.columns), ISLANDS.path_ohm)
    theirs = [volts(simulator, ISLANDS, at, f"i{at}x0") / ISLANDS.path_ohm[at] for at in range(INSULATED)]
    np.testing.assert_allclose(ours, theirs, rtol=AGREE)


def test_the_touch_current_network_on_a_separated_pole(simulator: dict[float, Answers]) -> None:
    given: Any = UNDER_METER.columns
    none = np.zeros(METERED)
    elements: tuple[Element, ...] = (
        VoltageSource("secondary", "L1", "L2", given["secondary_v"] + 0j, none, given["source_ohm"]),
        VoltageSource("primary", "line", "earth", given["primary_v"] + 0j, none, none),
        Capacitor("first_ends", "line", "L1", given["interwinding_nf"] / 2.0),
        Capacitor("second_ends", "earth", "L2", given["interwinding_nf"] / 2.0),
        Capacitor("c1", "L1", "earth", given["l1_earth_nf"]),
        Capacitor("c2", "L2", "earth", given["l2_earth_nf"]),
        Resistor("r1", "L1", "earth", given["l1_earth_ohm"]),
        Resistor("r2", "L2", "earth", given["l2_earth_ohm"]),
        *touch_current_network("meter", "L1", "earth", filtered=True),
    )
    solution = solve(Circuit(elements, given["frequency_hz"]))
    for node, theirs in (("meter.body", "b"), ("meter.filtered", "w")):
        mine = np.abs(voltage_between(solution, node, "earth")) / 500.0
        read = [volts(simulator, UNDER_METER, at, f"m{at}x{theirs}") / 500.0 for at in range(METERED)]
        np.testing.assert_allclose(mine, read, rtol=AGREE)


def test_what_was_simulated_spans_what_there_is() -> None:
    assert {field.name for field in fields(SeparatedCircuit)} == set(BENCHES.columns)
    assert {field.name for field in fields(InsulatedSupply)} == set(ISLANDS.columns)
    for drawn in (BENCHES, ISLANDS):
        assert set(drawn.columns["frequency_hz"]) == set(HERTZ)
    assert set(ISLANDS.columns["lines"]) == {1.0, 3.0}
    assert 0.0 < np.mean(ISLANDS.columns["neutral_earth_nf"] == 0.0) < 1.0
    assert 0.0 < np.mean(BENCHES.columns["interwinding_nf"] == 0.0) < 1.0
    assert (ISLANDS.path_ohm.min(), ISLANDS.path_ohm.max()) == (0.1, 1e4)
