"""Worked figures of separated and IT supplies, each by an outlet or by the functions behind its answer."""

import math
from collections.abc import Iterator
from typing import Any

import numpy as np

from faultloop.electrical.body import discharge_time, stored_energy
from faultloop.electrical.circuit_elements import Capacitor, Element, Resistor, VoltageSource
from faultloop.electrical.circuit_layout import Circuit
from faultloop.electrical.circuit_models import touch_current_network
from faultloop.electrical.circuit_solution import current_through, power
from faultloop.electrical.circuit_supplies import (
    InsulatedSupply,
    SeparatedCircuit,
    current_to_earth,
    single_contact_currents,
)
from faultloop.electrical.circuits import solve
from faultloop.electrical.fault_current import prospective_current
from tests.reference.examples import one
from tests.reference.published import Comparison
from tests.reference.separation import MILLI, charged, figure, of, turns
from tests.reference.unearthed import bench, exact, finding, item, quantity

MICRO = 1e6


def bodies() -> Iterator[Comparison]:
    """Resistance of a body by voltage and current."""
    for name in ("SS-BI-hand-hand", "SS-BI-hand-feet"):
        given = of(name)["inputs"]
        yield figure(
            name, "U/I", lambda g=given: one(prospective_current, 1.0, g["voltage_v"], g["current_ma"] / MILLI)
        )


def networks() -> Iterator[Comparison]:
    """The network for touch current, and currents of plain circuits, by the nodal solution."""
    elements: dict[str, Any] = {
        part.name.split(".")[1]: part for part in touch_current_network("m", "touch", "earth", filtered=True)
    }
    for name, which in (("SS-TC-net-rs", "contact"), ("SS-TC-net-rb", "body_resistance"), ("SS-TC-net-r1", "filter")):
        yield turns(name, "element", lambda e=elements[which]: float(e.resistance_ohm[0]))
    for name, which in (("SS-TC-net-cs", "contact_capacitance"), ("SS-TC-net-c1", "filter_capacitance")):
        yield turns(name, "element", lambda e=elements[which]: float(e.capacitance_nf[0]) / MILLI)
    # The reading is the voltage over the body, U_1 of figures 3 and 4.
    for name, hertz in (("SS-TC-net-peak", 50.0), ("SS-TC-net-direct", 0.0)):
        yield figure(name, f"{hertz:g} Hz", lambda g=of(name)["inputs"], f=hertz: read_current(g["voltage_v"], f))
    for name, share in (("SS-WE-61347-peak", 1.0), ("SS-WE-61347", math.sqrt(0.5))):
        given = of(name)["inputs"]
        yield figure(name, "solved", lambda g=given, s=share: MILLI * over(s * g["voltage_v"], g["resistance_ohm"])[0])
    given = of("SS-WE-discharge-power")["inputs"]
    yield figure("SS-WE-discharge-power", "solved", lambda: over(given["voltage_v"], given["resistance_ohm"])[1])


def read_current(volts: float, hertz: float) -> float:
    """Current [mA] of the body in the network when its meter shows a voltage."""
    elements: list[Element] = [VoltageSource("shown", "m.body", "earth", *columns(volts + 0j, 0.0, 0.0))]
    elements += touch_current_network("m", "touch", "earth", filtered=False)
    elements.append(Capacitor("hand", "touch", "earth", *columns(1.0)))
    return MILLI * float(abs(current_through(solve(Circuit(tuple(elements), *columns(hertz))), "m.body_resistance")[0]))


def over(volts: float, ohm: float) -> tuple[float, float]:
    """Current [A] and power [W] of a resistance under a voltage."""
    elements = (
        VoltageSource("source", "line", "earth", *columns(volts + 0j, 0.0, 0.0)),
        Resistor("load", "line", "earth", *columns(ohm)),
    )
    solution = solve(Circuit(elements, *columns(50.0)))
    taken = power(solution)[0, solution.branches.index("load")]
    return float(abs(current_through(solution, "load")[0])), float(taken.real)


def columns(*values: complex) -> Any:
    """Values as columns of one."""
    return [np.array([value]) for value in values]


def reactances() -> Iterator[Comparison]:
    """Reactance of a kilometre by the current of a first fault."""
    for lines, nanofarads, neutral in ((1.0, 0.0, 1000.0), (3.0, 1000.0 / 3.0, 0.0)):
        supply = InsulatedSupply(*columns(230.0, lines, 50.0, nanofarads, neutral))
        yield figure(
            "SS-WE-it-reactance",
            f"{lines:g} lines",
            lambda s=supply: 230.0 / float(current_to_earth(s, np.array([0.0]))[0]),
        )


def capacitances() -> Iterator[Comparison]:
    """What filter capacitors drive through a contact."""
    for name, unit in (("SS-WE-y-4.7", MILLI), ("SS-WE-y-nanofarad", MICRO)):
        given = of(name)["inputs"]
        nanofarads, volts, hertz = given["capacitance_nf"], given["voltage_v"], given["frequency_hz"]
        supply = SeparatedCircuit(*columns(volts, volts, 0.0, hertz, nanofarads, nanofarads, 0.0, math.inf, math.inf))
        yield figure(
            name, "solved", lambda s=supply, u=unit: u * float(single_contact_currents(s, np.array([1000.0]))[0][0])
        )
        body = bench(
            {"insulation_resistance_megohm": exact(500)},
            volts=volts,
            items=[item(filter_capacitance_nf=nanofarads)],
            earth_contacts="earthed",
        )
        yield figure(name, "an outlet", lambda b=body, u=unit: finding(b, "contact-current")["value"] / MILLI * u)


def discharges() -> Iterator[Comparison]:
    """Voltages left, times and energies of discharge."""
    for name in ("SS-WE-discharge-restart", "SS-WE-discharge-restart-6"):
        given = of(name)["inputs"]
        yield figure(
            name,
            "U",
            lambda g=given: left(g["capacitance_uf"], g["voltage_v"], g["resistance_ohm"], g["time_s"]),
        )
    yield figure("SS-WE-discharge-share", "3 RC", lambda: left(1.0, 100.0, 1e6, 3.0))
    yield figure("SS-SE-60950-share", "1 RC", lambda: left(1.0, 100.0, 1e6, 1.0))
    given = of("SS-WE-discharge-time")["inputs"]
    microfarads, volts, ohm = given["capacitance_uf"], given["voltage_v"], given["resistance_ohm"]
    end = given["end_voltage_v"]
    yield figure("SS-WE-discharge-time", "t", lambda: one(discharge_time, microfarads, volts, ohm, end))
    yield figure("SS-WE-discharge-tau", "t", lambda: one(discharge_time, microfarads, math.e, ohm, 1.0))
    yield figure("SS-WE-discharge-energy", "E", lambda: one(stored_energy, microfarads, volts))
    body = charged(microfarads, volts, ohm)
    yield figure("SS-WE-discharge-energy", "an outlet", lambda: quantity(body, "stored_energy_j"))


def left(microfarads: float, volts: float, ohm: float, seconds: float) -> float:
    """Voltage to which a capacitor has fallen after a time: where the time of discharge is that time."""
    low, high = 0.0, volts
    for _ in range(200):
        middle = (low + high) / 2.0
        if one(discharge_time, microfarads, volts, ohm, middle) > seconds:
            low = middle
        else:
            high = middle
    return high


def transformers() -> Iterator[Comparison]:
    """Regulation: what is lost at a load of resistance is the load loss over the output that the source takes."""
    for name, base in (("SS-WE-regulation-full", "full_load_v"), ("SS-WE-regulation-none", "no_load_v")):
        given = of(name)["inputs"]
        # Ten amperes of load, all of the fall in resistance.
        lost, rated = 10.0 * (given["no_load_v"] - given["full_load_v"]), 10.0 * given[base]
        plate = {"rated_power_va": rated, "load_loss_w": lost, "secondary_voltage_v": given[base]}
        plate["short_circuit_voltage_percent"] = 100.0 * lost / rated
        body = bench(volts=given[base], transformer=plate)
        yield figure(name, "an outlet", lambda b=body: quantity(b, "regulation_percent"))


def comparisons() -> list[Comparison]:
    """Everything of this module."""
    parts = (bodies, networks, reactances, capacitances, discharges, transformers)
    return [comparison for part in parts for comparison in part()]
