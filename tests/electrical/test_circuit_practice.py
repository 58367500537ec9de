"""What the trade knows of transformers, three phases and separated benches, found again by the nodal solution.

Sources: common practice, unless a test names another.
"""

import math
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from faultloop.electrical.circuit_elements import (
    Capacitor,
    Element,
    IdealTransformer,
    Impedance,
    Resistor,
    VoltageSource,
)
from faultloop.electrical.circuit_layout import Circuit
from faultloop.electrical.circuit_models import body, real_transformer, touch_current_network
from faultloop.electrical.circuit_solution import Solution, current_through, voltage_between
from faultloop.electrical.circuits import solve
from tests.electrical.networks import answer, column

OPEN = column(math.inf)
NONE = column(0.0)
MAINS = VoltageSource("mains", "line", "earth", column(230.0 + 0j), column(0.4), column(0.2))
PERSON = 1000.0  # ohms, a round value for ordering work


def bench(ratio: float = 1.0, interwinding_nf: float = 0.0) -> tuple[Element, ...]:
    """Mains, and a transformer of about 1 kVA with its secondary brought out as pole1 and pole2."""
    values = (column(ratio), *(column(value) for value in (1.0, 0.5, 1.0, 0.5, 5e3, 2e4, interwinding_nf)))
    return (MAINS, *real_transformer("bench", ("line", "earth"), ("pole1", "pole2"), *values))


def contact(name: str, one: str, other: str, ohm: float = PERSON) -> Resistor:
    """A body between two points."""
    return Resistor(name, one, other, column(ohm))


def amperes(found: Solution, branch: str) -> float:
    """Magnitude of a current of one network."""
    return float(abs(current_through(found, branch)[0]))


def volts(found: Solution, plus: str, minus: str) -> float:
    """Magnitude of a voltage of one network."""
    return float(abs(voltage_between(found, plus, minus)[0]))


def wound(ratio: float) -> Solution:
    """An ideal transformer on 230 V with 10 ohms at its secondary."""
    return answer(
        VoltageSource("mains", "line", "earth", column(230.0 + 0j), NONE, NONE),
        IdealTransformer("t", "line", "earth", "pole1", "pole2", column(ratio)),
        Resistor("load", "pole1", "pole2", column(10.0)),
    )


@pytest.mark.parametrize(
    ("primary", "secondary", "volts_out", "share"), [(1, 1, 230, 1), (2, 1, 115, 0.5), (1, 2, 460, 2)]
)
def test_turns_set_voltage_and_current(primary: int, secondary: int, volts_out: float, share: float) -> None:
    """Equal turns keep the voltage; half the turns halve it, and the primary carries half; twice, twice."""
    found = wound(primary / secondary)
    assert volts(found, "pole1", "pole2") == pytest.approx(volts_out, rel=1e-12)
    assert amperes(found, "t.secondary") == pytest.approx(volts_out / 10.0, rel=1e-12)
    assert amperes(found, "t.primary") == pytest.approx(share * volts_out / 10.0, rel=1e-12)


def test_a_load_is_seen_through_a_transformer_by_the_square_of_the_ratio() -> None:
    found = wound(3.0)
    seen = voltage_between(found, "line", "earth") / current_through(found, "t.primary")
    assert seen == pytest.approx([9.0 * 10.0], rel=1e-12)


def test_a_real_transformer_drops_under_load_and_magnetises_without() -> None:
    idle, loaded = answer(*bench()), answer(*bench(), Resistor("load", "pole1", "pole2", column(50.0)))
    assert 0.0 < amperes(idle, "bench.primary_winding") < 0.06
    assert amperes(idle, "bench.secondary_winding") == 0.0
    np.testing.assert_allclose(current_through(loaded, "bench.secondary_winding"), current_through(loaded, "load"))
    assert current_through(loaded, "load")[0].real > 0.0
    assert 0.9 * 230.0 < volts(loaded, "pole1", "pole2") < volts(idle, "pole1", "pole2") < 230.0


@given(st.floats(1.0, 1e3), st.floats(-1e2, 1e2))
def test_three_phases_in_star_sum_to_nothing(resistance: float, reactance: float) -> None:
    """Balanced loads: no current in the neutral, the star point at the source's; one phase lost: the others' sum."""
    phases = np.exp(-2j * np.pi * np.arange(3) / 3.0) * 230.0

    def star(*loads: float) -> Solution:
        return answer(
            *(VoltageSource(f"e{at}", f"l{at}", "earth", column(phases[at]), NONE, NONE) for at in range(3)),
            *(Impedance(f"z{at}", f"l{at}", "star", column(load), column(reactance)) for at, load in enumerate(loads)),
            Impedance("neutral", "star", "earth", column(0.5), NONE),
        )

    balanced = star(resistance, resistance, resistance)
    assert amperes(balanced, "neutral") <= 1e-12 * amperes(balanced, "z0")
    assert amperes(star(resistance, resistance, math.inf), "neutral") > 0.1 * amperes(balanced, "z0")
    assert volts(balanced, "l0", "l1") == pytest.approx(math.sqrt(3.0) * 230.0)


def test_one_pole_of_a_sound_separated_bench_gives_no_path_and_two_poles_the_full_voltage() -> None:
    single = answer(*bench(), contact("person", "pole1", "earth"))
    assert amperes(single, "person") < 1e-12
    double = answer(*bench(), contact("person", "pole1", "pole2"))
    assert amperes(double, "person") == pytest.approx(230.0 / PERSON, rel=0.01)
    assert double.islands[0].nodes[-2:] == ("pole1", "pole2")
    assert np.isnan(volts(double, "pole1", "earth"))


@given(st.floats(0.01, 200.0))
def test_capacitance_between_windings_lets_one_pole_carry_a_little(capacitance_nf: float) -> None:
    """The contact closes the capacitance: at most what half of it, and half of it with twice the voltage, can pass."""
    found = answer(*bench(interwinding_nf=capacitance_nf), contact("person", "pole1", "earth"))
    most = 230.0 * 2.0 * math.pi * 50.0 * capacitance_nf * 1e-9
    assert 0.2 * min(most, 0.1) < amperes(found, "person") < 1.02 * most


def test_the_bench_of_22_nanofarads() -> None:
    """22.3 nF of cable and filters on the other pole pass 1.61 mA at 230 V; a clip on it makes 230 mA (U·ω·C, U/R)."""
    source = VoltageSource("bench", "pole1", "pole2", column(230.0 + 0j), NONE, NONE)
    spread = Capacitor("cable", "pole2", "earth", column(22.3))
    clip = Impedance("clip", "pole2", "earth", column(0.05), NONE)
    assert amperes(answer(source, spread, contact("person", "pole1", "earth")), "person") == pytest.approx(
        1.61e-3, rel=0.005
    )
    assert amperes(answer(source, spread, clip, contact("person", "pole1", "earth")), "person") == pytest.approx(
        0.23, rel=1e-3
    )


@given(st.floats(0.0, 1e4))
def test_an_instrument_that_earths_one_pole_makes_the_other_live(instrument: float) -> None:
    """Its screen's resistance in series with the contact; the pole that it earths is quiet."""
    clip = Impedance("instrument", "pole2", "earth", column(instrument), NONE)
    found = answer(*bench(), clip, contact("person", "pole1", "earth"))
    assert amperes(found, "person") == pytest.approx(230.0 / (PERSON + instrument), rel=0.01)
    assert volts(answer(*bench(), clip), "pole1", "earth") == pytest.approx(230.0, rel=0.01)
    assert amperes(answer(*bench(), clip, contact("person", "pole2", "earth")), "person") < 1e-9


def test_a_residual_device_before_the_transformer_sees_nothing_of_a_contact_behind_it() -> None:
    """Two poles touched: the line and neutral of the primary stay equal."""
    found = answer(
        VoltageSource("mains", "line", "earth", column(230.0 + 0j), column(0.4), NONE),
        Impedance("neutral", "primary2", "earth", column(0.2), NONE),
        *real_transformer(
            "t", ("line", "primary2"), ("pole1", "pole2"), *(column(v) for v in (1, 1, 0.5, 1, 0.5, 5e3, 2e4, 0.0))
        ),
        Impedance("clip", "pole2", "earth", column(0.05), NONE),
        contact("person", "pole1", "earth"),
    )
    assert amperes(found, "person") > 0.2
    assert abs(current_through(found, "mains") + current_through(found, "neutral"))[0] < 1e-12


LOGARITHMS = st.floats(-1.0, 8.0)


@settings(max_examples=300, deadline=None)
@given(st.lists(st.tuples(LOGARITHMS, st.floats(-3.0, 5.0)), min_size=3, max_size=3), st.floats(2.0, 5.0))
def test_earthing_one_pole_solidly_never_lowers_a_contact_with_the_other(
    legs: list[tuple[float, float]], person: float
) -> None:
    """Holds for resistance beside capacitance from each pole to earth and within the source.

    With p = R + Z_i·w, q = Z_a·w and w = 1 + R·Y_b the currents are E/|p + q| floating and E/|p| earthed; for
    resistance and capacitance Re(p·q*) = R·Re(Z_a*·w*) + |w|²·Re(Z_i·Z_a*) is not negative.
    """
    (inner_ohm, inner_nf), *earths = legs
    parts: list[Element] = [VoltageSource("e", "inner", "pole1", column(230.0 + 0j), NONE, NONE)]
    parts += beside("source", "inner", "pole2", inner_ohm, inner_nf)
    for pole, (ohm, nf) in zip(("pole1", "pole2"), earths, strict=True):
        parts += beside(pole, pole, "earth", ohm, nf)
    floating, earthed = clipped(*parts, contact("person", "pole2", "earth", 10.0**person))
    assert floating <= earthed * (1.0 + 1e-9)


def beside(name: str, plus: str, minus: str, ohm: float, nf: float) -> list[Element]:
    """Resistance beside capacitance, by their logarithms."""
    return [
        Resistor(f"{name}.r", plus, minus, column(10.0**ohm)),
        Capacitor(f"{name}.c", plus, minus, column(10.0**nf)),
    ]


def clipped(*parts: Element) -> tuple[float, float]:
    """The person's current with pole1 as it is, and solidly earthed."""
    clip: Any = Impedance("clip", "pole1", "earth", column(math.inf, 0.0), NONE)
    floating, earthed = abs(current_through(answer(*parts, clip), "person"))
    return float(floating), float(earthed)


def test_but_three_sections_of_capacitance_and_resistance_can_lower_it() -> None:
    """Counter-example: each section turns the voltage by about 60 degrees, so the far end stands opposite to pole2.

    Earth, at the far end, is then more than the source's voltage away from pole2, which a clip would take away.
    """
    parts: list[Element] = [VoltageSource("e", "pole2", "pole1", column(230.0 + 0j), NONE, NONE)]
    along = ["pole2", "a", "b", "earth"]
    for at, ohm in enumerate((1e3, 1e4, 1e5)):
        nf = 1e9 / (2.0 * math.pi * 50.0 * ohm * math.sqrt(3.0))
        parts.append(Capacitor(f"c{at}", along[at], along[at + 1], column(nf)))
        parts.append(Resistor(f"r{at}", along[at + 1], "pole1", column(ohm)))
    floating, earthed = clipped(*parts, contact("person", "pole2", "earth", 1e7))
    assert floating > 1.05 * earthed


def test_but_a_second_source_can_make_it_lower() -> None:
    """Counter-example: 12 V separated, 100 nF from a mains winding: the mains drives more than the 12 V do."""
    parts = (
        MAINS,
        VoltageSource("e", "pole2", "pole1", column(12.0 + 0j), NONE, NONE),
        Capacitor("windings", "line", "pole1", column(100.0)),
    )
    floating, earthed = clipped(*parts, contact("person", "pole2", "earth", 2000.0))
    assert floating > 1.1 * earthed


def test_but_leakage_inductance_against_capacitance_can_make_it_lower() -> None:
    """Counter-example outside resistance and capacitance: series resonance of the source with the cable."""
    parts = (
        VoltageSource("e", "pole2", "pole1", column(230.0 + 0j), NONE, column(2000.0)),
        Impedance("cable", "pole1", "earth", NONE, column(-2000.0)),
    )
    floating, earthed = clipped(*parts, contact("person", "pole2", "earth"))
    assert floating == pytest.approx(0.23)
    assert earthed == pytest.approx(230.0 / math.hypot(1000.0, 2000.0))


def test_body_of_skin_and_inside() -> None:
    """The skin's capacitance shorts its resistance as the frequency rises (IEC TS 60479-1:2005, figure 1)."""
    parts = body("person", "pole1", "earth", column(500.0), column(1500.0), column(20.0))
    source = VoltageSource("e", "pole1", "earth", column(100.0 + 0j), NONE, NONE)
    direct, mains, high = abs(
        current_through(solve(Circuit((source, *parts), column(0.0, 50.0, 1e9))), "person.internal")
    ).tolist()
    assert direct == pytest.approx(100.0 / 3500.0)
    assert high == pytest.approx(100.0 / 500.0)
    assert direct < mains < high


def test_touch_current_network() -> None:
    """IEC 60990:2016: 2000 ohms at low frequency, 500 at high; the filter is flat below 100 Hz and falls by decades."""
    source = VoltageSource("e", "part", "earth", column(1.0 + 0j), NONE, NONE)
    parts = touch_current_network("meter", "part", "earth", filtered=True)
    found = solve(Circuit((source, *parts), column(0.0, 50.0, 1e6)))
    plain = solve(
        Circuit((source, *touch_current_network("meter", "part", "earth", filtered=False)), column(0.0, 50.0, 1e6))
    )
    unweighted = abs(voltage_between(found, "meter.body", "earth")) / 500.0
    weighted = abs(voltage_between(found, "meter.filtered", "earth")) / 500.0
    assert unweighted[0] == pytest.approx(1.0 / 2000.0)
    assert unweighted[2] == pytest.approx(1.0 / 500.0, rel=1e-3)
    assert abs(current_through(plain, "meter.body_resistance")) == pytest.approx(unweighted, rel=0.05)
    ratio = weighted / unweighted
    assert ratio == pytest.approx([1.0, 1.0, 1.0 / (2.0 * math.pi * 1e6 * 1e4 * 22e-9)], rel=0.01)
