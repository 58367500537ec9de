"""What a bench must not be told to be by mistake: live chassis, floated instruments, short circuits, several supplies."""

import math

import pytest

from faultloop import bench_network
from tests.assessment.bench_bodies import CLIP, Body, small
from tests.assessment.test_benches import change, contact, greatest, node

OMEGA = 2.0 * math.pi * 50.0


def television(**changes: object) -> Body:
    """An earthed oscilloscope about to be clipped to the signal ground of a television of class II."""
    body = small()
    body["items"][0] = {
        "id": "tv",
        "fed_by": "iso",
        "protection_class": "II",
        "role": "under-test",
        "filter_capacitance_nf": 1.0,
        "signal_ground": {"kind": "floating"},
        **changes,
    }
    body["planned_link"] = {**CLIP, "to": "tv.signal_ground"}
    return body


# ---- a chassis that nobody described ---------------------------------------------------------------------------


def test_a_chassis_that_nobody_described_may_stand_at_either_pole() -> None:
    answer = bench_network(television())
    assert answer["verdict"] == "undetermined"
    assert answer["urgency"] == "stop-use"
    assert answer["planned_link"]["ties"] == "perhaps"
    # With the chassis at one pole the other carries 230 V over 1 kΩ.
    for pole in ("iso.L1", "iso.L2"):
        assert greatest(answer, pole, state="with_planned_link") == pytest.approx(230.0, rel=2e-3)
    assumed = next(told for told in answer["assumptions"] if told["assumption"] == "tv: live-chassis")
    assert "measure from the chassis to each pole, dead, or state live_chassis" in assumed["text"]
    separation = next(found for found in answer["findings"] if found["check"] == "separation")
    assert "live_chassis" in separation["settled_by"]


@pytest.mark.parametrize(("stated", "tied"), [("none", "no"), ("L1", "yes"), ("L2", "yes")])
def test_a_chassis_that_is_described_is_what_was_said(stated: str, tied: str) -> None:
    answer = bench_network(television(live_chassis=stated))
    assert answer["planned_link"]["ties"] == tied
    assert not any("live-chassis" in told["assumption"] for told in answer["assumptions"])


def test_of_class_i_a_chassis_is_open_only_where_it_stands_off_the_earthed_case() -> None:
    for ground, asked in (("earthed", False), ("floating", True)):
        answer = bench_network(television(protection_class="I", signal_ground={"kind": ground}))
        assert any("live-chassis" in told["assumption"] for told in answer["assumptions"]) is asked


# ---- windings --------------------------------------------------------------------------------------------------


def test_turning_the_primary_swaps_the_pole_and_the_phase() -> None:
    """25 nF lie at each pole: 230·ω·25 nF from the live end and as much from the secondary add up, or cancel."""
    body = small(items=[])
    body["supplies"][1] |= {"cable_capacitance_to_earth_nf": 0}
    body["supplies"][1]["transformer"]["interwinding_capacitance_nf"] = 50.0
    answer = bench_network(body)
    for pole in ("iso.L1", "iso.L2"):
        ends = contact(answer, pole)["as_found"]["current_ma"]
        assert ends["greatest"] == pytest.approx(2 * 230 * OMEGA * 25e-9 * 1000, rel=2e-3)
        assert ends["least"] == pytest.approx(0.0, abs=1e-3)


def test_potentials_mix_the_ends_of_windings_and_wiring() -> None:
    """A pole stands highest by most of the windings with least of the wiring, and lowest by the same poled otherwise."""
    body = small(items=[])
    body["supplies"][1]["cable_capacitance_to_earth_nf"] = {"least": 0.1, "greatest": 2.0}
    body["supplies"][1]["transformer"]["interwinding_capacitance_nf"] = {"least": 0.1, "greatest": 1.0}
    told = node(bench_network(body), "iso.L1")["as_found"]["potential_v"]
    # Charge balance of the island: half windings a each, cable c each; L1 - L2 = 230, the live end at 230 beside L1.
    most = (230 * 0.5 + 230 * (0.5 + 0.1)) / (2 * (0.5 + 0.1))
    assert told["greatest"] == pytest.approx(most, rel=2e-3)
    assert told["least"] == pytest.approx(230 * 0.1 / (2 * 0.6), rel=2e-3)


# ---- instruments that stand at a pole --------------------------------------------------------------------------


def floated(protection_class: str, fed_by: str) -> Body:
    """An instrument that nothing earths, clipped to a pole."""
    body = small()
    body["supplies"].append({"id": "cell", "kind": "battery"})
    body["items"][1] = {
        "id": "scope",
        "fed_by": fed_by,
        "protection_class": protection_class,
        "role": "instrument",
        "filter_capacitance_nf": 1.0,
        "signal_ground": {"kind": "floating"},
    }
    body["links"] = [CLIP]
    return body


@pytest.mark.parametrize(("protection_class", "fed_by"), [("I", "iso"), ("II", "iso"), ("II", "cell")])
def test_an_instrument_at_a_pole_is_no_pass(protection_class: str, fed_by: str) -> None:
    answer = bench_network(floated(protection_class, fed_by))
    assert answer["as_found"]["live_parts"] == ["scope.signal_ground"]
    assert answer["verdict"] == "fail"
    assert answer["urgency"] == "stop-use"
    reasons = {found["check"]: found["reason"] for found in answer["findings"]}
    assert reasons["separation"] == "part-at-pole"
    contact(answer, "scope.signal_ground")  # and to earth
    hand = contact(answer, "scope.signal_ground", "iso.L1")
    assert hand["kind"] == "part-to-pole"
    assert hand["hands"] == "two"
    assert hand["as_found"]["current_ma"]["greatest"] == pytest.approx(230.0, rel=2e-3)
    off = change(answer, "remove-link", "clip")
    assert off["live_parts"] == []


def test_an_instrument_at_a_chassis_that_may_be_live_is_undetermined() -> None:
    body = television()
    body["supplies"].append({"id": "cell", "kind": "battery"})
    body["items"][1] |= {"fed_by": "cell", "protection_class": "II"}
    body["items"][1]["signal_ground"] = {"kind": "floating"}
    answer = bench_network(body)
    assert answer["verdict"] == "undetermined"
    assert answer["urgency"] == "stop-use"
    assert "scope.signal_ground may then be joined to a pole" in answer["planned_link"]["text"]
