"""Currents to earth on separated and IT supplies by closed forms in plain complex numbers, and at their extremes."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from faultloop.electrical.circuit_elements import Capacitor, Element, Impedance, Resistor, VoltageSource
from faultloop.electrical.circuit_layout import Circuit
from faultloop.electrical.circuit_solution import current_through
from faultloop.electrical.circuit_supplies import (
    InsulatedSupply,
    SeparatedCircuit,
    current_to_earth,
    single_contact_currents,
)
from faultloop.electrical.circuits import solve
from tests.reference.unearthed import LEAD, bench, exact, finding, insulated, item, quantity

CLOSE = 1e-9
NOISE = 1e-14  # of the greatest current that could flow: where all but rounding cancels
many = settings(max_examples=300, deadline=None)


def decades(low: float, high: float) -> st.SearchStrategy[float]:
    """Numbers even in their logarithm."""
    return st.floats(math.log10(low), math.log10(high)).map(lambda power: 10.0**power)


HERTZ, VOLTS, BODY = st.sampled_from([16.7, 50.0, 60.0, 400.0]), st.floats(6.0, 1000.0), decades(1.0, 1e7)
NANOFARADS = st.just(0.0) | decades(1e-4, 1e6)
INSULATION = st.just(math.inf) | decades(1e2, 1e12)
ELECTRODE = st.just(0.0) | decades(1e-3, 1e7)


def admittance(hertz: float, nanofarads: float, ohm: float = math.inf) -> complex:
    """A capacitance with a resistance beside it [S]."""
    return complex(1.0 / ohm, 2.0 * math.pi * hertz * nanofarads * 1e-9)


def contact_by_hand(
    touched: complex, other: complex, windings: complex, volts: float, primary: float, ohm: float
) -> float:
    """Current [A] of a body on one pole, from the one balance of currents that there is.

    With V of the touched pole, V·(Y + Yw + 1/R) + (V - U)·(Y' + Yw) = ±P·Yw, where Yw is half of the capacitance
    between the windings: from the end that carries P to one pole, from the end at earth to the other.
    """
    whole = touched + other + 2.0 * windings + 1.0 / ohm
    drive = (other + windings) * volts
    return max(abs(drive + primary * windings), abs(drive - primary * windings)) / abs(whole) / ohm


def contact(
    c1: float,
    c2: float,
    ohm: float,
    hertz: float = 50.0,
    volts: float = 230.0,
    windings: float = 0.0,
    primary: float = 230.0,
    r1: float = math.inf,
    r2: float = math.inf,
) -> tuple[float, float]:
    """The service's currents [A] at both poles."""
    columns = (np.array([value]) for value in (volts, primary, 0.0, hertz, c1, c2, windings, r1, r2))
    one, other = single_contact_currents(SeparatedCircuit(*columns), np.array([ohm]))
    return float(one[0]), float(other[0])


@many
@given(NANOFARADS, NANOFARADS, BODY, HERTZ, VOLTS)
def test_a_contact_by_unequal_capacitances_of_the_poles(
    c1: float, c2: float, ohm: float, hertz: float, u: float
) -> None:
    """I = U·ωC'/|1 + jωR(C1 + C2)|, with C' of the pole that is not touched."""
    omega = 2.0 * math.pi * hertz
    both = abs(1.0 + 1j * omega * (c1 + c2) * 1e-9 * ohm)
    expected = [u * omega * far * 1e-9 / both for far in (c2, c1)]
    assert contact(c1, c2, ohm, hertz, u) == pytest.approx(expected, rel=CLOSE, abs=NOISE * u / ohm)


@many
@given(NANOFARADS, NANOFARADS, NANOFARADS, INSULATION, INSULATION, BODY, HERTZ, VOLTS, VOLTS)
def test_a_contact_with_windings_and_insulation(
    c1: float, c2: float, between: float, r1: float, r2: float, ohm: float, hertz: float, u: float, primary: float
) -> None:
    first, second = admittance(hertz, c1, r1), admittance(hertz, c2, r2)
    half = admittance(hertz, between / 2.0)
    got, noise = contact(c1, c2, ohm, hertz, u, between, primary, r1, r2), NOISE * (u + primary) / ohm
    assert got[0] == pytest.approx(contact_by_hand(first, second, half, u, primary, ohm), rel=CLOSE, abs=noise)
    # At L2 the windings' drive comes from the end at earth; the other end drives the far pole.
    whole = first + second + 2.0 * half + 1.0 / ohm
    far = max(abs(-u * (first + half) + sign * primary * half) for sign in (1.0, -1.0))
    assert got[1] == pytest.approx(far / abs(whole) / ohm, rel=CLOSE, abs=noise)


def test_a_contact_at_its_extremes() -> None:
    omega = 2.0 * math.pi * 50.0
    # Nothing joins the other pole to earth: nothing flows, whatever hangs on the touched one.
    assert contact(0.0, 0.0, 1000.0) == (0.0, 0.0)
    assert contact(1e4, 0.0, 1000.0)[0] == pytest.approx(0.0, abs=NOISE * 0.230)
    # A body far below the capacitances: U·ωC of the other pole.
    assert contact(1.0, 7.0, 1e-3)[0] == pytest.approx(230.0 * omega * 7e-9, rel=1e-9)
    # The other pole as good as earthed: the whole voltage on the body.
    assert contact(0.0, 1e9, 1000.0)[0] == pytest.approx(0.230, rel=1e-9)
    # One pole earthed by insulation of nothing, no capacitance at all.
    assert contact(0.0, 0.0, 1000.0, r2=1e-6)[0] == pytest.approx(0.230, rel=1e-8)
    # The touched pole as good as earthed: its capacitance carries what the body does not.
    beside = contact(1e9, 10.0, 1000.0)[0]
    assert beside == pytest.approx(230.0 * 10.0 / 1e9 / 1000.0, rel=1e-6)
    # Both poles alike, a body of no matter: it holds half the voltage.
    assert contact(100.0, 100.0, 1e9)[0] == pytest.approx(115.0 / 1e9, rel=1e-6)
    # Textbook: U/(2 R + r) with r of each pole.
    assert contact(0.0, 0.0, 1000.0, r1=1e6, r2=1e6) == pytest.approx([230.0 / (2000.0 + 1e6)] * 2, rel=1e-12)


def first_fault(
    lines: float, each: float, neutral: float, ohm: float, hertz: float = 50.0, volts: float = 230.0
) -> float:
    """The service's current [A] of a first fault."""
    columns = (np.array([value]) for value in (volts, lines, hertz, each, neutral))
    return float(current_to_earth(InsulatedSupply(*columns), np.array([ohm]))[0])


@many
@given(NANOFARADS, NANOFARADS, ELECTRODE, HERTZ, VOLTS)
def test_a_first_fault_of_three_lines(each: float, neutral: float, ohm: float, hertz: float, u: float) -> None:
    """U0·jωC/(1 + jωC·R_A), with C of all live conductors together: their voltages add up to nothing."""
    drive = 1j * 2.0 * math.pi * hertz * (3.0 * each + neutral) * 1e-9
    expected = abs(u * drive / (1.0 + drive * ohm))
    assert first_fault(3.0, each, neutral, ohm, hertz, u) == pytest.approx(expected, rel=CLOSE, abs=0.0)


@many
@given(NANOFARADS, NANOFARADS, ELECTRODE, HERTZ, VOLTS)
def test_a_first_fault_of_one_line(each: float, neutral: float, ohm: float, hertz: float, u: float) -> None:
    """U0·jωCn/(1 + jω(C + Cn)·R_A): the line's own capacitance lies beside the fault."""
    omega = 2.0 * math.pi * hertz
    both = abs(1.0 + 1j * omega * (each + neutral) * 1e-9 * ohm)
    expected = u * omega * neutral * 1e-9 / both
    noise = NOISE * u * omega * each * 1e-9
    assert first_fault(1.0, each, neutral, ohm, hertz, u) == pytest.approx(expected, rel=CLOSE, abs=noise)


def test_a_first_fault_at_its_extremes() -> None:
    omega = 2.0 * math.pi * 50.0
    assert first_fault(3.0, 0.0, 0.0, 0.0) == 0.0
    assert first_fault(3.0, 0.0, 0.0, 50.0) == 0.0
    assert first_fault(3.0, 60.0, 0.0, 0.0) == pytest.approx(3.0 * omega * 60e-9 * 230.0, rel=1e-12)
    # Capacitance as good as an earthed neutral: U0/R_A. An electrode as good as none: nothing.
    assert first_fault(3.0, 1e12, 0.0, 50.0) == pytest.approx(230.0 / 50.0, rel=1e-9)
    assert first_fault(3.0, 60.0, 60.0, 1e15) == pytest.approx(230.0 / 1e15, rel=1e-6)
    assert first_fault(3.0, 60.0, 60.0, math.inf) == 0.0
    assert first_fault(1.0, 60.0, 0.0, 0.0) == 0.0
    for unknown in ((math.nan, 60.0, 0.0, 1.0), (3.0, math.nan, 0.0, 1.0), (3.0, 1.0, math.nan, 1.0)):
        assert math.isnan(first_fault(*unknown))
    assert math.isnan(first_fault(3.0, 1.0, 0.0, math.nan))


@pytest.mark.parametrize("nanofarads", [1.0, 60.0, 5000.0, 1e6])
@pytest.mark.parametrize("ohm", [0.5, 50.0, 2000.0])
def test_an_outlet_of_an_insulated_supply_tells_the_same(nanofarads: float, ohm: float) -> None:
    drive = 1j * 2.0 * math.pi * 50.0 * 3.0 * nanofarads * 1e-9
    current = abs(230.0 * drive / (1.0 + drive * ohm))
    body = insulated(
        {"earth_electrode_resistance_ohm": exact(ohm)}, it_supply={"line_capacitance_to_earth_nf": nanofarads}
    )
    assert finding(body, "first-fault")["value"] == pytest.approx(current * ohm, rel=1e-5)
    # Capacitors are within 20 % (common practice).
    for end, part in (("least", 0.8), ("greatest", 1.2)):
        touched = abs(230.0 * part * drive / (1.0 + part * drive * 1000.0))
        assert quantity(body, "contact_current_ma")[end] == pytest.approx(1000.0 * touched, rel=1e-5)


@pytest.mark.parametrize("nanofarads", [0.1, 4.7, 300.0, 1e5])
def test_a_separated_outlet_tells_the_same(nanofarads: float) -> None:
    body = bench(
        {"insulation_resistance_megohm": exact(200)},
        items=[item(filter_capacitance_nf=nanofarads)],
        earth_contacts="earthed",
        transformer={"interwinding_capacitance_nf": 2.0, "primary_voltage_v": 400},
    )
    pole, half = admittance(50.0, nanofarads, 200e6), admittance(50.0, 1.0)
    expected = 1000.0 * contact_by_hand(pole, pole, half, 230.0, 400.0, 1000.0)
    assert finding(body, "contact-current")["value"] == pytest.approx(expected, rel=1e-5)


@pytest.mark.parametrize("bonding", [0.01, 0.05, 1.0])
@pytest.mark.parametrize("wiring", [None, 20.0])
@pytest.mark.parametrize(
    "factor",
    [1.0, 1.2],
)
def test_two_faults_of_a_separated_supply(bonding: float, wiring: float | None, factor: float) -> None:
    """Source, wiring, two leads and the bonding of their cases, added by size: U over the loop."""
    body = bench(
        {"bonding_resistance_ohm": exact(bonding)},
        items=[item(), item(lead={**LEAD, "length_m": 10}), item(lead={**LEAD, "length_m": 7}), item("II")],
        earth_contacts="bonded",
        transformer={"short_circuit_tolerance_percent": 10},
    )
    cores = 2.0 * (10.0 + 7.0) * 0.0121  # 12.1 ohm/km of 1.5 mm2 (IEC 60228, class 1 and 2), two longest leads
    if wiring is not None:
        conductor = {"material": "copper", "insulation": "pvc", "area_mm2": 2.5}
        body["circuit"] = {"length_m": wiring, "line_conductor": conductor}
        cores += 2.0 * wiring * 0.00741
    body["policy"] = {"temperature": "none" if factor == 1.0 else "split"}
    source = 0.06 * 230.0**2 / 1000.0
    told = finding(body, "second-fault-disconnection")
    assert told["value"] == pytest.approx(source + factor * (cores + bonding), rel=1e-5)
    assert told["limit"] == pytest.approx(230.0 / 30.0, rel=1e-5)
    current = quantity(body, "second_fault_current_a")
    # The least current that is told is that of hot conductors, whatever the policy compares.
    assert current["least"] == pytest.approx(230.0 / (1.1 * source + 1.2 * (cores + bonding)), rel=1e-5)
    assert current["greatest"] == pytest.approx(1.1 * 230.0 / (0.9 * source), rel=1e-5)


@pytest.mark.parametrize("neutral", [False, True])
@pytest.mark.parametrize("ohm", [0.05, 1.2])
def test_two_faults_of_an_insulated_supply_by_its_network(neutral: bool, ohm: float) -> None:
    """A fault in each of two circuits with one protective conductor; next to nothing holds the lines to earth."""
    none, elements = np.zeros(1), list[Element]()
    for line in range(3):
        phasor = 400.0 / math.sqrt(3.0) * np.exp(-2j * np.pi * np.array([line]) / 3.0)
        elements.append(VoltageSource(f"e{line}", f"l{line}", "star", phasor, none, none))
        elements.append(Capacitor(f"c{line}", f"l{line}", "earth", np.array([0.06])))
    # Of each circuit one half of its loop is the live conductor, the other the protective conductor.
    half = np.array([ohm / 2.0])
    elements.append(Impedance("first", "l0", "case_1", half, none))
    elements.append(Impedance("second", "star" if neutral else "l1", "case_2", half, none))
    elements += [Impedance(f"pe_{case}", f"case_{case}", "bar", half, none) for case in (1, 2)]
    elements.append(Resistor("electrode", "bar", "earth", np.array([20.0])))
    current = float(abs(current_through(solve(Circuit(tuple(elements), np.array([50.0]))), "first")[0]))
    # A reading as hot as in service; U0 of the outlet is that of the star.
    body = insulated(
        {"earth_fault_loop_impedance_ohm": exact(ohm, method="high-current", conductor_temperature_c=70)},
        it_supply={"neutral_distributed": neutral},
        supply={"nominal_voltage_to_earth_v": 400.0 / math.sqrt(3.0)},
    )
    told = quantity(body, "second_fault_current_a")
    assert told["least"] == pytest.approx(current, rel=1e-5)
    assert told["greatest"] == pytest.approx(1.1 * current, rel=1e-5)


@many
@given(st.floats(0.5, 40.0), st.floats(0.0, 1.0))
def test_regulation_beside_the_phasors(percent: float, share: float) -> None:
    """|U0| = |U + I·Z|: the formula leaves out what the fourth order of the cross voltage adds.

    With a share of 1 all of the short-circuit voltage is resistance, which division may round to a little more.
    """
    ohmic = percent * share
    plate = {"short_circuit_voltage_percent": percent, "load_loss_w": 1000.0 * ohmic / 100.0}
    along, across = ohmic / 100.0, math.sqrt(percent**2 - ohmic**2) / 100.0
    # With U0 as unit and the load's current in phase with U: U = sqrt(1 - across^2) - along.
    exactly = 100.0 * (1.0 - math.sqrt(1.0 - across**2) + along)
    told = quantity(bench(transformer=plate), "regulation_percent")
    assert told == pytest.approx(exactly, abs=100.0 * across**4 / 6.0 + 1e-5 * exactly)


@pytest.mark.parametrize("power_va", [50.0, 1000.0, 25e3])
@pytest.mark.parametrize("percent", [3.0, 10.0])
def test_a_short_circuit_is_the_rated_current_over_the_short_circuit_voltage(power_va: float, percent: float) -> None:
    plate = {"rated_power_va": power_va, "short_circuit_voltage_percent": percent}
    told = quantity(bench(transformer=plate), "line_line_fault_current_a")
    rated = power_va / 230.0
    assert told["least"] == pytest.approx(100.0 * rated / percent, rel=1e-5)
    # The greatest takes the voltage tolerance of 10 % (IEC 60909-0) too.
    assert told["greatest"] == pytest.approx(110.0 * rated / percent, rel=1e-5)


@pytest.mark.parametrize(("power_va", "percent", "loss_w"), [(30.0, 3.7, 1.11), (63.0, 0.7, 0.441), (100.0, 9.0, 9.0)])
def test_regulation_of_a_transformer_that_is_all_resistance(power_va: float, percent: float, loss_w: float) -> None:
    """Its load loss is the whole short-circuit voltage, and so is what a load of resistance loses."""
    plate = {"rated_power_va": power_va, "short_circuit_voltage_percent": percent, "load_loss_w": loss_w}
    assert quantity(bench(transformer=plate), "regulation_percent") == pytest.approx(percent, rel=1e-5)
