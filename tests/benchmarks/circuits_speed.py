"""10,000 networks of 20 nodes in one batch, beside Python loops that solve them one by one.  Run as a module.

Two loops: over the room's own `solve`, and over the leanest thing that can be written by hand (one plain matrix filled
element by element, one `numpy.linalg.solve`, no currents, no islands, no names).
"""

import time
from collections.abc import Callable
from typing import Any

import numpy as np

from faultloop.electrical.circuit_elements import Capacitor, CurrentSource, Element, Resistor, VoltageSource
from faultloop.electrical.circuit_layout import Circuit
from faultloop.electrical.circuits import solve

NETWORKS, NODES, LOOPED, REPEATS = 10_000, 20, 500, 15
OMEGA = 2.0 * np.pi * 50.0
FREQUENCY = np.array([50.0])


def elements(count: int) -> tuple[Element, ...]:
    """A source, a ladder of 19 resistors, 20 capacitors between any nodes, a current source; earth is the twentieth."""
    rng = np.random.default_rng(1)
    names = [*(f"n{at:02}" for at in range(NODES - 1)), "earth"]
    nought = np.zeros(1)
    parts: list[Element] = [VoltageSource("e", names[0], "earth", np.array([230.0 + 0j]), nought + 0.5, nought)]
    parts += [Resistor(f"r{at}", names[at], names[at + 1], rng.uniform(1.0, 10.0, count)) for at in range(NODES - 1)]
    for at in range(NODES):
        one, other = rng.choice(NODES, 2, replace=False)
        parts.append(Capacitor(f"c{at}", names[one], names[other], rng.uniform(1.0, 1000.0, count)))
    parts.append(CurrentSource("i", names[7], names[3], np.array([0.1 + 0j])))
    return tuple(parts)


def one_of(parts: tuple[Element, ...], at: int) -> Circuit:
    """One network as a circuit of its own."""
    chosen: list[Element] = []
    for part in parts:
        if isinstance(part, Resistor):
            chosen.append(Resistor(part.name, part.plus, part.minus, part.resistance_ohm[at : at + 1]))
        elif isinstance(part, Capacitor):
            chosen.append(Capacitor(part.name, part.plus, part.minus, part.capacitance_nf[at : at + 1]))
        else:
            chosen.append(part)
    return Circuit(tuple(chosen), FREQUENCY)


def by_hand(plan: list[tuple[str, int, int, Any]], at: int) -> Any:
    """Potentials of one network by a matrix filled in place; earth's row and column are dropped."""
    matrix, side = np.zeros((NODES, NODES), complex), np.zeros(NODES, complex)
    for kind, plus, minus, values in plan:
        if kind == "current":
            side[plus] += values
            side[minus] -= values
            continue
        admittance = 1.0 / values[at] if kind == "resistor" else 1j * OMEGA * values[at] * 1e-9
        matrix[plus, plus] += admittance
        matrix[minus, minus] += admittance
        matrix[plus, minus] -= admittance
        matrix[minus, plus] -= admittance
    return np.linalg.solve(matrix[:-1, :-1], side[:-1])


def plan_of(parts: tuple[Element, ...]) -> list[tuple[str, int, int, Any]]:
    """Elements as the loop by hand wants them: numbers of nodes, the voltage source by its Norton equivalent."""

    def number(node: str) -> int:
        return NODES - 1 if node == "earth" else int(node[1:])

    plan: list[tuple[str, int, int, Any]] = []
    for part in parts:
        ends = (number(part.plus), number(part.minus)) if not hasattr(part, "ratio") else (0, 0)
        if isinstance(part, Resistor):
            plan.append(("resistor", *ends, part.resistance_ohm))
        elif isinstance(part, Capacitor):
            plan.append(("capacitor", *ends, part.capacitance_nf))
        elif isinstance(part, CurrentSource):
            plan.append(("current", *ends, complex(part.current_a[0])))
        elif isinstance(part, VoltageSource):
            plan.append(("resistor", *ends, np.full(NETWORKS, part.resistance_ohm[0])))
            plan.append(("current", *ends, complex(part.emf_v[0] / part.resistance_ohm[0])))
    return plan


def per_network(run: Callable[[], Any], networks: int) -> float:
    """Least time of several runs, in microseconds a network."""
    times = []
    for _ in range(REPEATS):
        start = time.perf_counter()
        run()
        times.append(time.perf_counter() - start)
    return min(times) / networks * 1e6


def main() -> None:
    """Measure and print."""
    parts = elements(NETWORKS)
    plan = plan_of(parts)
    together = solve(Circuit(parts, FREQUENCY))
    live = [at for at, node in enumerate(together.nodes) if node != "earth"]
    for at in range(0, NETWORKS, NETWORKS // 10):
        np.testing.assert_allclose(by_hand(plan, at), together.potential_v[at, live], rtol=1e-9)
    batch = per_network(lambda: solve(Circuit(parts, FREQUENCY)), NETWORKS)
    own = per_network(lambda: [solve(one_of(parts, at)) for at in range(LOOPED)], LOOPED)
    lean = per_network(lambda: [by_hand(plan, at) for at in range(LOOPED)], LOOPED)
    print(f"one batch of {NETWORKS} networks of {NODES} nodes: {batch:8.2f} µs a network")
    print(f"loop over solve():                       {own:8.2f} µs, {own / batch:6.1f} times as long")
    print(f"loop by hand over numpy.linalg.solve:    {lean:8.2f} µs, {lean / batch:6.1f} times as long")


if __name__ == "__main__":
    main()
