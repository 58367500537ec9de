"""Figures of separated and IT supplies that were not found in print: recalled, common practice, or plain arithmetic.

They are no oracles. Where the service departs from one of them, one of the two was remembered wrongly.
"""

import math
from collections.abc import Callable, Iterator
from functools import partial

import numpy as np
import pytest

from faultloop.electrical.circuit_supplies import (
    InsulatedSupply,
    SeparatedCircuit,
    current_to_earth,
    single_contact_currents,
)
from tests.reference.published import Comparison, compared, unproven
from tests.reference.separation import MET, NEAR, greatest_length
from tests.reference.separation_figures import columns, left
from tests.reference.unearthed import RULES, Body, bench, exact, finding, insulated, quantity, turning_point, verdict

OMEGA = 2.0 * math.pi * 50.0
# The source multiplied a current that it had rounded: 3 x 66 mA for 197.1 mA.
ROUNDED_BETWEEN = {"SS-WE-it-first"}


def last_place(value: float) -> float:
    """One unit in the last place of a figure as it was written down."""
    _, _, decimals = f"{value:.12g}".partition(".")
    return float(10.0 ** -len(decimals))


def recalled(row_id: str, part: str, compute: Callable[..., float]) -> Comparison:
    """Compare a figure that carries its own rounding."""
    row = unproven("separation", row_id)
    return compared(row, part, "value", compute, step=row["printed_step"] or last_place(row["value"]))


def limit(row_id: str, part: str, compute: Callable[..., float]) -> Comparison:
    """Compare a limit, which carries all its figures."""
    row = unproven("separation", row_id)
    return compared(row, part, "value", compute, step=NEAR * float(row["value"]))


def limits() -> Iterator[Comparison]:
    """What the answers turn on."""
    for rules in RULES:
        ask = partial(bench, rules=rules)
        yield limit("SS-413-volt-metres", rules, lambda a=ask: 400.0 * greatest_length(a, 400.0))
        yield limit("SS-413-metres", rules, lambda a=ask: greatest_length(a, 100.0))
        yield limit("SS-413-length-115", rules, lambda a=ask: greatest_length(a, 115.0))
        yield limit(
            "SS-413-two-faults-time", rules, lambda a=ask: quantity(a(volts=230), "required_disconnection_time_s")
        )
        yield limit("SS-IT-first-ac", rules, lambda e=rules: greatest_electrode(e, milliamperes=1000.0))
        yield limit("SS-IT-first-ac", f"{rules}, 3 A", lambda e=rules: 3.0 * greatest_electrode(e, milliamperes=3000.0))
        source = ask(transformer={"short_circuit_tolerance_percent": None})
        yield recalled("SS-TR-uk-tolerance", rules, lambda b=source: tolerance(b))
        for kind, insulation, tested in (
            ("basic", "SS-TR-insulation-basic", "SS-TR-dielectric-basic-300"),
            ("double-or-reinforced", "SS-TR-insulation-reinforced", "SS-TR-dielectric-reinforced-300"),
        ):
            yield limit(insulation, rules, lambda a=ask, k=kind: least_insulation(a, k))
            yield limit(tested, rules, lambda a=ask, k=kind: least_test(a, k))


def greatest_electrode(rules: str, milliamperes: float) -> float:
    """Electrode at which a first fault is no longer met."""

    def ask(ohm: float) -> Body:
        read = {"earth_electrode_resistance_ohm": exact(ohm), "first_fault_current_ma": exact(milliamperes)}
        return insulated(read, rules=rules)

    return turning_point(ask, verdict("first-fault", *MET), 1.0, 200.0)


def tolerance(body: Body) -> float:
    """Per cent by which the source may differ, where the maker states nothing."""
    source = quantity(body, "source_impedance_ohm")
    return float(100.0 * (source["greatest"] - source["least"]) / (source["greatest"] + source["least"]))


def least_insulation(ask: Callable[..., Body], kind: str) -> float:
    """Insulation between the windings up to which they fail."""

    def windings(megohm: float) -> Body:
        read = {"winding_insulation_resistance_megohm": exact(megohm)}
        return ask(read, transformer={"winding_insulation": kind})

    return turning_point(windings, verdict("winding-insulation", "fail"), 0.5, 50.0)


def least_test(ask: Callable[..., Body], kind: str, working_v: float = 230.0) -> float:
    """Test voltage up to which the windings fail, however well they read."""

    def windings(volts: float) -> Body:
        read = {"winding_insulation_resistance_megohm": exact(100.0)}
        plate = {"winding_insulation": kind, "dielectric_test_v": volts}
        plate |= {"primary_voltage_v": working_v, "secondary_voltage_v": working_v}
        return ask(read, volts=working_v, transformer=plate)

    return turning_point(windings, verdict("winding-insulation", "fail"), 500.0, 9000.0)


def assumed() -> Iterator[Comparison]:
    """What is taken where nothing is stated."""
    wired = bench(wiring_length_m=1000)
    yield recalled("SS-CP-cable-most", "a kilometre", lambda: quantity(wired, "pole_capacitance_to_earth_nf"))
    # Both ends of the windings drive: (U + P)·ωC/2, the body being far below.
    windings = bench({"insulation_resistance_megohm": exact(10_000)}, transformer={"interwinding_capacitance_nf": None})
    yield recalled(
        "SS-CP-windings-most",
        "not stated",
        lambda: finding(windings, "contact-current")["value"] / (OMEGA * 230.0) * 1e9,
    )


def contacts() -> Iterator[Comparison]:
    """Currents that capacitance and insulation drive."""
    for row_id, nanofarads, unit in (
        ("SS-WE-y-2x2.2", 4.4, 1e3),
        ("SS-WE-touch-200pf", 0.2, 1e6),
        ("SS-WE-touch-10nf", 10.0, 1e6),
        ("SS-WE-separated-cable", 36.0, 1e3),
    ):
        yield recalled(row_id, "solved", lambda c=nanofarads, u=unit: u * touched(c, math.inf, 500.0))
    yield recalled("SS-WE-it-body", "solved", lambda: 1e3 * touched(0.0, 1e6, 1000.0))
    earthed = bench({}, pole_earthed=True)
    yield recalled("SS-WE-separated-pole-earthed", "an outlet", lambda: finding(earthed, "contact-current")["value"])


def touched(nanofarads: float, insulation_ohm: float, body_ohm: float) -> float:
    """Current [A] through a body on one pole of 230 V."""
    supply = SeparatedCircuit(
        *columns(230.0, 230.0, 0.0, 50.0, nanofarads, nanofarads, 0.0, insulation_ohm, insulation_ohm)
    )
    return float(single_contact_currents(supply, np.array([body_ohm]))[0][0])


def faults() -> Iterator[Comparison]:
    """A transformer's short circuit; first and second faults of an IT supply of 3500 ohm a phase to earth."""
    plate = bench(transformer={"short_circuit_voltage_percent": 10})
    yield recalled(
        "SS-WE-transformer-short", "an outlet", lambda: quantity(plate, "line_line_fault_current_a")["least"]
    )
    nanofarads = 1e9 / (OMEGA * 3500.0)
    for row_id, lines, each, neutral in (
        ("SS-WE-it-phase", 1.0, 0.0, nanofarads),
        ("SS-WE-it-first", 3.0, nanofarads, 0.0),
    ):
        supply = InsulatedSupply(*columns(230.0, lines, 50.0, each, neutral))
        yield recalled(row_id, "solved", lambda s=supply: 1e3 * float(current_to_earth(s, np.array([0.0]))[0]))
    read = {"earth_electrode_resistance_ohm": exact(5)}
    island = insulated(read, it_supply={"line_capacitance_to_earth_nf": nanofarads})
    yield recalled("SS-WE-it-touch", "an outlet", lambda: finding(island, "first-fault")["value"])
    # One circuit is half of the loop of two: line and protective conductor of 32.15 mohm each, as hot as in service.
    two = insulated(
        {"earth_fault_loop_impedance_ohm": exact(2 * 0.03215, method="high-current", conductor_temperature_c=70)},
        supply={"nominal_voltage_between_lines_v": 398.4},
    )
    yield recalled("SS-WE-it-second", "0.8 of it", lambda: 0.8 * quantity(two, "second_fault_current_a")["least"])
    yield recalled(
        "SS-WE-it-second-loop", "U/I", lambda: 1e3 * 398.4 / quantity(two, "second_fault_current_a")["least"]
    )


def discharges() -> Iterator[Comparison]:
    """An X capacitor through its resistor."""
    yield recalled("SS-WE-discharge-34", "1 s", lambda: left(0.47, 325.0, 1e6, 1.0))


PARTS = (limits, assumed, contacts, faults, discharges)
COMPARISONS = [comparison for part in PARTS for comparison in part()]


@pytest.mark.parametrize("comparison", COMPARISONS, ids=lambda c: c.title)
def test_figure_is_as_recalled(comparison: Comparison) -> None:
    value = comparison.value
    agrees = comparison.within_one_step if comparison.row in ROUNDED_BETWEEN else comparison.rounds
    assert agrees(value), f"recalled {comparison.printed:g}, computed {value:.6g}"


def test_every_excuse_is_needed() -> None:
    missed = {c.row for c in COMPARISONS if not c.rounds(c.value)}
    assert missed == ROUNDED_BETWEEN


@pytest.mark.parametrize("volts", [200.0, 230.0, 399.0])
def test_guidance_on_lengths_is_the_lower_of_both(volts: float) -> None:
    assert greatest_length(bench, volts) == pytest.approx(min(500.0, 100_000.0 / volts), rel=NEAR)


@pytest.mark.parametrize(("working_v", "column"), [(115.0, 150), (400.0, 600)])
@pytest.mark.parametrize(("kind", "word"), [("basic", "basic"), ("double-or-reinforced", "reinforced")])
def test_test_voltages_follow_the_working_voltage(working_v: float, column: int, kind: str, word: str) -> None:
    row = unproven("separation", f"SS-TR-dielectric-{word}-{column}")
    assert least_test(bench, kind, working_v) == pytest.approx(row["value"], rel=NEAR)
