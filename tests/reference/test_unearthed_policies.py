"""What a temperature policy leaves of a limit on supplies whose live parts are not earthed."""

import pytest

from tests.reference.separation import MET
from tests.reference.unearthed import Body, bench, exact, insulated, item, quantity, turning_point, verdict

CHECK = "second-fault-disconnection"
# Zs <= 2/3 U0/Ia (IEC 60364-6, informative) and 0.8 of the table (UK practice) stand in place of heating and of
# uncertainty, so what they let pass must not lie beyond what heating alone lets pass.
FLAT = ("two-thirds", "four-fifths")


def greatest_loop(policy: str) -> float:
    """Loop of one circuit of an IT supply, as read without uncertainty, at which a second fault is no longer met."""

    def ask(ohm: float) -> Body:
        body = insulated({"earth_fault_loop_impedance_ohm": exact(ohm, method="high-current")})
        return body | {"policy": {"temperature": policy}}

    return turning_point(ask, verdict(CHECK, *MET), 0.1, 50.0)


def greatest_short_circuit_voltage(policy: str) -> float:
    """Per cent of a separating transformer whose tolerance is not stated, at which two faults are no longer met."""

    def ask(percent: float) -> Body:
        plate = {"short_circuit_voltage_percent": percent, "short_circuit_tolerance_percent": None}
        body = bench(
            {"bonding_resistance_ohm": exact(0.05)},
            items=[item(), item()],
            earth_contacts="bonded",
            transformer=plate,
        )
        return body | {"policy": {"temperature": policy}}

    return turning_point(ask, verdict(CHECK, *MET), 1.0, 90.0)


def test_split_heats_an_insulated_loop_and_none_leaves_it_cold() -> None:
    # U/(2 Ia) of 400 V and 80 A, over 1 + 0.004 (70 - 20).
    assert greatest_loop("none") == pytest.approx(400.0 / 160.0, rel=1e-6)
    assert greatest_loop("split") == pytest.approx(400.0 / 160.0 / 1.2, rel=1e-6)


def test_split_takes_the_source_of_a_separated_supply_at_its_greatest() -> None:
    # 1.2 uk/100 U^2/S + 1.2 (4 x 3 m x 12.1 mohm/m + 0.05) = U/Ia of 230 V, 1000 VA and 30 A.
    expected = (230.0 / 30.0 - 1.2 * (4 * 3 * 0.0121 + 0.05)) / (1.2 * 230.0**2 / 1000.0) * 100.0
    assert greatest_short_circuit_voltage("split") == pytest.approx(expected, rel=1e-6)


@pytest.mark.parametrize("policy", FLAT)
def test_a_flat_policy_lets_pass_no_more_of_an_insulated_supply(policy: str) -> None:
    assert greatest_loop(policy) <= greatest_loop("split") * (1.0 + 1e-6)


@pytest.mark.parametrize("policy", FLAT)
def test_a_flat_policy_lets_pass_no_more_of_a_separated_supply(policy: str) -> None:
    split = greatest_short_circuit_voltage("split")
    assert greatest_short_circuit_voltage(policy) <= split * (1.0 + 1e-6)


@pytest.mark.parametrize(
    ("nanofarads", "ohm"),
    [
        (60.0, 50.0),
        (5000.0, 100.0),
        (1e5, 100.0),
    ],
)
def test_the_ends_of_a_first_fault_stand_in_order(nanofarads: float, ohm: float) -> None:
    told = {"line_capacitance_to_earth_nf": nanofarads}
    ends = quantity(insulated({"earth_electrode_resistance_ohm": ohm}, it_supply=told), "first_fault_current_ma")
    assert ends["least"] <= ends["greatest"]
