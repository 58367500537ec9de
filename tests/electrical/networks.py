"""Random networks to test on: every node has a path to earth through what is not ideal."""

import dataclasses
from collections.abc import Callable
from typing import Any

import numpy as np

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
from faultloop.electrical.circuit_layout import Circuit, element_branches
from faultloop.electrical.circuit_solution import Solution
from faultloop.electrical.circuits import solve
from faultloop.electrical.measurement import Array

Rng = np.random.Generator
PASSIVE = ("resistor", "resistor", "impedance", "capacitor", "inductor")
ACTIVE = ("voltage", "current")
FIFTY = np.array([50.0])


def column(*values: complex) -> Any:
    """Values as an array."""
    return np.array(values)


def spread_over(rng: Rng, least: float, greatest: float, count: int) -> Array:
    """Values even in their logarithm."""
    return np.exp(rng.uniform(np.log(least), np.log(greatest), count))


def phasor(rng: Rng, greatest: float, count: int) -> Any:
    """Phasors of any phase."""
    return rng.uniform(0.1, 1.0, count) * greatest * np.exp(2j * np.pi * rng.uniform(size=count))


def element(rng: Rng, kind: str, name: str, plus: str, minus: str, count: int, decades: float) -> Element:
    """One element of a kind; decades is how far its values reach on either side of the usual."""
    low, high = 10.0**-decades, 10.0**decades
    if kind == "resistor":
        return Resistor(name, plus, minus, spread_over(rng, 3.0, 1e2 * high, count))
    if kind == "capacitor":
        return Capacitor(name, plus, minus, spread_over(rng, 1e3 * low, 1e3 * high, count))
    if kind == "inductor":
        return Inductor(name, plus, minus, spread_over(rng, 1e-1 * low, 1e-1 * high, count))
    resistance = spread_over(rng, low, high, count)
    reactance = spread_over(rng, low, high, count)
    if kind == "impedance":
        return Impedance(name, plus, minus, resistance, reactance)
    if kind == "voltage":
        return VoltageSource(name, plus, minus, phasor(rng, 230.0, count), resistance, reactance)
    return CurrentSource(name, plus, minus, phasor(rng, 1.0, count))


def network(rng: Rng, nodes: int, count: int = 1, sources: bool = True, decades: float = 1.5) -> tuple[Element, ...]:
    """A tree of resistors and impedances on earth, as many elements again, sources, and at times a transformer."""
    names = ["earth", *(f"n{at:02}" for at in range(1, nodes))]
    parts: list[Element] = []

    def add(kind: str, plus: str, minus: str) -> None:
        parts.append(element(rng, kind, f"{kind}{len(parts)}", plus, minus, count, decades))

    for at in range(1, nodes):
        add(str(rng.choice(["resistor", "impedance"])), names[at], names[rng.integers(0, at)])
    for _ in range(nodes):
        add(str(rng.choice(PASSIVE)), *two(rng, names))
    if nodes > 3 and rng.uniform() < 0.5:
        ends = [*two(rng, names), *two(rng, names)]
        if set(ends[:2]) != set(ends[2:]):
            parts.append(IdealTransformer(f"transformer{len(parts)}", *ends, spread_over(rng, 0.1, 10.0, count)))
    if sources:
        for kind in rng.choice(ACTIVE, int(rng.integers(1, 4))):
            add(str(kind), *two(rng, names))
    return tuple(parts)


def two(rng: Rng, names: list[str]) -> list[str]:
    """Two different nodes."""
    return [names[at] for at in rng.choice(len(names), 2, replace=False)]


def node_names(elements: tuple[Element, ...]) -> list[str]:
    """Nodes of a network, earth left out."""
    ends = {node for part in elements for _, *nodes in element_branches(part) for node in nodes}
    return sorted(ends - {"earth"})


def answer(*elements: Element, frequency: Array = FIFTY) -> Solution:
    """Solve what is given at 50 Hz."""
    return solve(Circuit(elements, frequency))


def changed(part: Element, change: Callable[[str, Array], Array]) -> Element:
    """The element with its values changed, by name of field."""
    values = {
        field.name: change(field.name, getattr(part, field.name))
        for field in dataclasses.fields(part)
        if not isinstance(getattr(part, field.name), str)
    }
    return dataclasses.replace(part, **values)


def renamed(part: Element, names: dict[str, str]) -> Element:
    """The element between other nodes."""
    ends = {
        field.name: names.get(getattr(part, field.name), getattr(part, field.name))
        for field in dataclasses.fields(part)
        if field.name.endswith(("plus", "minus"))
    }
    return dataclasses.replace(part, **ends)
