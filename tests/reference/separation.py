"""Printed figures of separated and IT supplies, each by what the answers turn on or by the functions behind them."""

import math
from collections.abc import Callable, Iterator
from functools import partial
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
from tests.reference.published import Comparison, Row, compared, named
from tests.reference.unearthed import (
    RULES,
    Body,
    bench,
    breaker,
    exact,
    finding,
    greatest_number,
    insulated,
    item,
    quantity,
    turning_point,
    verdict,
    without,
)

MILLI, MICRO = 1e3, 1e6
# A limit is printed as it is meant: half of this part of it is how near the answer has to turn.
NEAR = 1e-6
MET = ("pass", "pass-with-conditions")
C_MIN = {"iec-60364": 1.0, "bs-7671": 0.95}
# Least currents that trip: 5 In of type B, 10 In of type C (IEC 60898-1), Imax(5 s) of gG 16 A (IEC 60269-1).
GUARANTEED = ((breaker("B16"), "final", 80.0), (breaker("C10"), "final", 100.0))
FUSE = {"kind": "fuse", "fuse_system": "iec-60269", "utilisation_category": "gG", "rated_current_a": 16}


def of(row_id: str) -> Row:
    """A row that a test may rely on."""
    return named("separation", row_id)


def turns(row_id: str, part: str, compute: Callable[..., float]) -> Comparison:
    """Compare a limit that is printed with all its figures."""
    row = of(row_id)
    return compared(row, part, "value", compute, step=NEAR * float(row["value"]))


def figure(row_id: str, part: str, compute: Callable[..., float]) -> Comparison:
    """Compare a figure that is printed as it was rounded."""
    return compared(of(row_id), part, "value", compute)


def separated_circuits() -> Iterator[Comparison]:
    """What a separated circuit may be: voltage, items, nothing at earth, length of its wiring."""
    for rules in RULES:
        ask = partial(bench, rules=rules)
        yield turns(
            "SS-413-voltage",
            rules,
            lambda a=ask: turning_point(lambda u: a(volts=u), verdict("separated-voltage", *MET), 300.0, 900.0),
        )
        yield turns(
            "SS-TR-isolating-ac",
            f"{rules}, by the plate",
            lambda a=ask: turning_point(
                lambda u: a(volts=None, transformer={"secondary_voltage_v": u}),
                verdict("separated-voltage", *MET),
                300.0,
                900.0,
            ),
        )
        yield figure("SS-413-items", f"{rules}, class I", lambda a=ask: most_items(a, "I", verdict_of_items))
        yield figure("SS-413-items", f"{rules}, class II", lambda a=ask: most_items(a, "II", without("supervision")))
        yield figure(
            "SS-413-class-one",
            f"{rules}, beside two of class II",
            lambda a=ask: most_items(a, "I", verdict_of_items, others=2),
        )
        yield figure(
            "SS-413-earthed-points",
            rules,
            lambda a=ask: greatest_number(lambda n: a(pole_earthed=n > 0), verdict("separation", *MET), range(2)),
        )
        for name, volts in (("SS-413-length-230", 230.0), ("SS-413-length-400", 400.0)):
            yield figure(name, f"{rules}, turns", lambda a=ask, u=volts: greatest_length(a, u))
            yield figure(
                name, f"{rules}, limit", lambda a=ask, u=volts: finding(a({}, volts=u), "wiring-length")["limit"]
            )


verdict_of_items = verdict("separated-items", *MET)


def most_items(ask: Callable[..., Body], kind: str, holds: Callable[[Body], bool], others: int = 0) -> int:
    """Greatest number of items of a class on a separated outlet without bonding."""
    rest = [item("II") for _ in range(others)]
    return greatest_number(lambda n: ask(items=[item(kind) for _ in range(n)] + rest), holds, range(1, 5))


def greatest_length(ask: Callable[..., Body], volts: float) -> float:
    """Length of wiring at which guidance is left, where no contact was read."""
    return turning_point(lambda m: ask({}, volts=volts, wiring_length_m=m), verdict("wiring-length", *MET), 10.0, 900.0)


def contacts() -> Iterator[Comparison]:
    """Currents at which a contact is felt, is too great, and shows that a pole stands at earth."""

    def ask(milliamperes: float) -> Body:
        return bench({"contact_current_l1_ma": exact(0.1), "contact_current_l2_ma": exact(milliamperes)})

    for name in ("SS-TC-startle-ac", "SS-BI-perception"):
        yield turns(name, "felt", lambda: turning_point(ask, without("contact-felt"), 0.1, 3.0))
    for name in ("SS-TC-limit-ac", "SS-TC-60950-class-1"):
        yield turns(name, "contact", lambda: turning_point(ask, verdict("contact-current", *MET), 1.0, 9.0))
    yield turns("SS-BI-let-go-10", "separation", lambda: turning_point(ask, verdict("separation", *MET), 1.0, 90.0))
    earthed = bench({}, pole_earthed=True)
    yield figure(
        "SS-BI-assumed", "one pole earthed", lambda: 230.0 / finding(earthed, "contact-current")["value"] * MILLI
    )
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


def insulated_supplies() -> Iterator[Comparison]:
    """Two faults on an IT supply."""
    for rules in RULES:
        # The British set has a current of its own for the fuse, printed beside BS 88-2.
        for device, role, amperes in (*GUARANTEED, (FUSE, "distribution", 65.0 if rules == "iec-60364" else 55.0)):
            for name, distributed, volts in (
                ("SS-IT-second-divisor", False, 400.0),
                ("SS-IT-second-divisor-neutral", True, 230.0),
            ):
                yield turns(
                    name,
                    f"{rules}, {amperes:g} A",
                    lambda d=device, r=role, n=distributed, c=C_MIN[rules] * volts / amperes, e=rules: (
                        c / greatest_loop(r, d, n, e)
                    ),
                )
        body = insulated({"earth_fault_loop_impedance_ohm": exact(0.5)}, role="distribution", rules=rules)
        yield figure("SS-IT-second-distribution", rules, lambda b=body: quantity(b, "required_disconnection_time_s"))
    for lines, nanofarads, neutral in ((1.0, 0.0, 1000.0), (3.0, 1000.0 / 3.0, 0.0)):
        supply = InsulatedSupply(*columns(230.0, lines, 50.0, nanofarads, neutral))
        yield figure(
            "SS-WE-it-reactance",
            f"{lines:g} lines",
            lambda s=supply: 230.0 / float(current_to_earth(s, np.array([0.0]))[0]),
        )


def greatest_loop(role: str, device: Body, neutral: bool, rules: str) -> float:
    """Loop of one circuit at which a second fault is no longer cleared in time."""

    def ask(ohm: float) -> Body:
        readings = {"earth_fault_loop_impedance_ohm": exact(ohm, method="high-current")}
        return insulated(readings, role, device, it_supply={"neutral_distributed": neutral}, rules=rules)

    return turning_point(ask, verdict("second-fault-disconnection", *MET), 0.1, 50.0)


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


def stored() -> Iterator[Comparison]:
    """What stays charged: voltages, times and energies of discharge."""
    quick = without("discharged-first")
    for name in ("SS-SE-60204-voltage", "SS-SE-61010-voltage"):
        yield turns(name, "turns", lambda: turning_point(lambda u: charged(1000.0, u, 1e12), quick, 10.0, 300.0))
    # U = 60 V·e^k stands k time constants above 60 V.
    above = 60.0 * math.exp(2.0)
    for name in ("SS-SE-60204-time", "SS-SE-61010-time"):
        yield turns(
            name,
            "turns",
            lambda: 2.0e-2 * turning_point(lambda c: charged(c, above, 1e4), quick, 10.0, 1000.0),
        )
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


def charged(microfarads: float, volts: float, ohm: float) -> Body:
    """An outlet with an item that stays charged."""
    told = {"capacitance_uf": microfarads, "voltage_v": volts, "discharge_resistance_ohm": ohm}
    return bench(items=[item(stored=told)])


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
    parts = (separated_circuits, contacts, networks, insulated_supplies, capacitances, stored, transformers)
    return [comparison for part in parts for comparison in part()]
