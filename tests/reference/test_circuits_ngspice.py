"""The nodal solution beside the general-purpose circuit simulator ngspice."""

from collections.abc import Callable, Sequence
from pathlib import Path

import numpy as np
import pytest

from faultloop.electrical.circuit_elements import Capacitor, CurrentSource, Element, Impedance, Resistor, VoltageSource
from faultloop.electrical.circuit_layout import Circuit
from faultloop.electrical.circuit_models import body, real_transformer, touch_current_network
from faultloop.electrical.circuit_solution import current_through, voltage_between
from faultloop.electrical.circuits import solve
from tests.electrical.networks import answer, column, network
from tests.reference.ngspice import Answers, simulated, written

AGREE = 1e-6
NOISE = 1e-11  # of the greatest voltage or current of the network: where all but rounding cancels
USUAL, ILL_CONDITIONED = 200, 130
FREQUENCIES = (50.0, 400.0, 1000.0, 10_000.0)
OMEGA = 2.0 * np.pi * np.array(FREQUENCIES)


def agree(ours: Sequence[complex], theirs: Sequence[complex], greatest: float) -> None:
    """Magnitude and phase at once: the difference of the phasors, beside their size."""
    difference, size = np.abs(np.array(ours) - np.array(theirs)), np.abs(np.array(theirs))
    assert (difference <= AGREE * size + NOISE * greatest).all()


def test_generated_networks(tmp_path: Path) -> None:
    """Every node voltage and every source's current of 330 networks of 2 to 40 nodes, solved in one run.

    The last 130 spread their impedances over ten decades and more, as milliohms beside insulation do.
    """
    rng = np.random.default_rng(20261201)
    decades = [1.5] * USUAL + [5.0] * ILL_CONDITIONED
    networks = [
        network(rng, 40 if at % 10 == 0 else int(rng.integers(2, 41)), decades=d) for at, d in enumerate(decades)
    ]
    lines = [
        line for at, parts in enumerate(networks) for line in written(parts, f"k{at}", 50.0, exact=decades[at] > 2.0)
    ]
    (theirs,) = simulated(lines, [50.0], tmp_path)
    assert len(networks) >= 300
    for at, parts in enumerate(networks):
        ours = answer(*parts)
        assert not ours.islands
        assert not ours.defects
        live = [node for node in ours.nodes if node != "earth"]
        agree(
            [voltage_between(ours, node, "earth")[0] for node in live],
            [theirs[f"v(k{at}_{node})"] for node in live],
            np.abs(ours.potential_v).max(),
        )
        sources = [part.name for part in parts if isinstance(part, VoltageSource | Impedance)]
        agree(
            [current_through(ours, name)[0] for name in sources],
            [theirs[f"i(vk{at}_{name})"] for name in sources],
            np.abs(ours.current_a).max(),
        )


def bench() -> tuple[tuple[Element, ...], list[str]]:
    """2:1 transformer as coupled inductances, capacitance between its windings, one pole clipped, the other touched."""
    magnetising, first, second, ratio = 12.0, 3e-3, 0.6e-3, 2.0
    own1, own2 = first + magnetising, second + magnetising / ratio**2
    coupling = magnetising / ratio / np.sqrt(own1 * own2)
    parts: tuple[Element, ...] = (
        VoltageSource("mains", "line", "earth", column(230.0 + 0j), column(0.4), OMEGA * 5e-4),
        *real_transformer(
            "t",
            ("line", "earth"),
            ("pole1", "pole2"),
            ratio=column(ratio),
            primary_resistance_ohm=column(1.0),
            primary_leakage_ohm=OMEGA * first,
            secondary_resistance_ohm=column(0.3),
            secondary_leakage_ohm=OMEGA * second,
            magnetising_ohm=OMEGA * magnetising,
            core_loss_ohm=column(np.inf),
            interwinding_nf=column(1.5),
        ),
        Impedance("clip", "pole2", "earth", column(10.0), column(0.0)),
        Resistor("person", "pole1", "earth", column(1000.0)),
    )
    return parts, [
        "vbench_mains bench_e 0 dc 0 ac 230 0",
        "rbench_0 bench_e bench_e2 0.4",
        "lbench_0 bench_e2 bench_line 5e-4",
        "rbench_1 bench_line bench_p 1",
        f"lbench_1 bench_p 0 {own1!r}",
        f"lbench_2 bench_s bench_pole2 {own2!r}",
        f"kbench lbench_1 lbench_2 {float(coupling)!r}",
        "rbench_2 bench_s bench_pole1 0.3",
        "cbench_1 bench_line bench_pole1 0.75n",
        "cbench_2 0 bench_pole2 0.75n",
        "rbench_clip bench_pole2 0 10",
        "rbench_person bench_pole1 0 1000",
    ]


def touch() -> tuple[tuple[Element, ...], list[str]]:
    """A floating part that leaks through 10 nF into the network of IEC 60990, figure 4."""
    parts: tuple[Element, ...] = (
        VoltageSource("mains", "line", "earth", column(230.0 + 0j), column(0.5), column(0.0)),
        Capacitor("filter", "line", "part", column(10.0)),
        *touch_current_network("meter", "part", "earth", filtered=True),
    )
    return parts, [
        "vtouch_mains touch_e 0 dc 0 ac 230 0",
        "rtouch_0 touch_e touch_line 0.5",
        "ctouch_0 touch_line touch_part 10n",
        "rtouch_s touch_part touch_meter.body 1500",
        "ctouch_s touch_part touch_meter.body 0.22u",
        "rtouch_b touch_meter.body 0 500",
        "rtouch_1 touch_meter.body touch_meter.filtered 10k",
        "ctouch_1 touch_meter.filtered 0 0.022u",
    ]


def star() -> tuple[tuple[Element, ...], list[str]]:
    """Unbalanced three phases with a lost neutral, its star point held by capacitance alone."""
    angles = (0.0, -120.0, 120.0)
    loads = (20.0, 50.0, 400.0)
    parts: list[Element] = [Capacitor("held", "star", "earth", column(47.0))]
    lines = ["cstar_held star_star 0 47n"]
    for at, (angle, load) in enumerate(zip(angles, loads, strict=True)):
        phase = column(230.0 * np.exp(1j * np.radians(angle)))
        parts.append(VoltageSource(f"e{at}", f"l{at}", "earth", phase, column(0.2), OMEGA * 1e-4))
        parts.append(Impedance(f"z{at}", f"l{at}", "star", column(load), OMEGA * 1e-3))
        lines += [
            f"vstar_{at} star_e{at} 0 dc 0 ac 230 {angle}",
            f"rstar_{at} star_e{at} star_f{at} 0.2",
            f"lstar_{at} star_f{at} star_l{at} 1e-4",
            f"rstar_z{at} star_l{at} star_g{at} {load}",
            f"lstar_z{at} star_g{at} star_star 1e-3",
        ]
    return tuple(parts), lines


def person() -> tuple[tuple[Element, ...], list[str]]:
    """A body of skin and inside (IEC TS 60479-1, figure 1) that closes a leakage current of 5 mA."""
    parts: tuple[Element, ...] = (
        CurrentSource("leak", "frame", "earth", column(5e-3 + 0j)),
        Resistor("floor", "frame", "earth", column(20e3)),
        *body("body", "frame", "earth", column(575.0), column(2000.0), column(15.0)),
    )
    return parts, [
        "iperson 0 person_frame dc 0 ac 5m 0",
        "rperson_0 person_frame 0 20k",
        "rperson_1 person_frame person_body.under_skin 2k",
        "cperson_1 person_frame person_body.under_skin 15n",
        "rperson_2 person_body.under_skin person_body.beyond 575",
        "rperson_3 person_body.beyond 0 2k",
        "cperson_3 person_body.beyond 0 15n",
    ]


SCENARIOS: dict[str, Callable[[], tuple[tuple[Element, ...], list[str]]]] = {
    "bench": bench,
    "touch": touch,
    "star": star,
    "person": person,
}
COMPARED = {
    "bench": ("line", "pole1", "pole2"),
    "touch": ("line", "part", "meter.body", "meter.filtered"),
    "star": ("l0", "l1", "l2", "star"),
    "person": ("frame", "body.under_skin", "body.beyond"),
}


@pytest.fixture(scope="module")
def spoken(tmp_path_factory: pytest.TempPathFactory) -> list[Answers]:
    """All scenarios, written by hand for the simulator, in one run."""
    lines = [line for scenario in SCENARIOS.values() for line in scenario()[1]]
    return simulated(lines, FREQUENCIES, tmp_path_factory.mktemp("ngspice"))


@pytest.mark.parametrize("name", sorted(SCENARIOS))
def test_named_scenarios(name: str, spoken: list[Answers]) -> None:
    """Magnitude within 1e-6 of itself and phase within a microradian, at 50 Hz to 10 kHz."""
    ours = solve(Circuit(SCENARIOS[name]()[0], np.array(FREQUENCIES)))
    for node in COMPARED[name]:
        mine = voltage_between(ours, node, "earth")
        theirs = np.array([answers[f"v({name}_{node})"] for answers in spoken])
        np.testing.assert_allclose(np.abs(mine), np.abs(theirs), rtol=AGREE)
        np.testing.assert_allclose(np.angle(mine / theirs), 0.0, atol=AGREE)
