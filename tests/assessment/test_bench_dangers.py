"""What a bench must not be told to be by mistake: live chassis, floated instruments, shorts, several supplies."""

import copy
import math

import pytest

from faultloop import bench_network
from tests.assessment.bench_bodies import CLIP, Body, small
from tests.assessment.test_benches import change, contact, everything_said, greatest, node, refused

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
    """A pole stands highest by most of the windings with least of the wiring, lowest by the same turned over."""
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


# ---- several supplies ------------------------------------------------------------------------------------------


def two_supplies(*links: Body) -> Body:
    """Two separated supplies of 230 V with an item of class I each."""
    body = small(links=list(links))
    body["supplies"].append({**copy.deepcopy(body["supplies"][1]), "id": "second"})
    for item, supply in zip(body["items"], ("iso", "second"), strict=True):
        item |= {"fed_by": supply, "role": "under-test", "live_chassis": "none"}
    return body


def test_of_two_supplies_that_a_link_joins_the_poles_may_stand_at_the_sum() -> None:
    answer = bench_network(
        two_supplies({"id": "lead", "kind": "other", "from": "iso.L2", "to": "second.L2", "resistance_ohm": 0.1})
    )
    across = contact(answer, "iso.L1", "second.L1")
    assert across["hands"] == "two"
    # Poled alike nothing stands between them, poled otherwise 460 V over 1 kΩ.
    assert across["as_found"]["current_ma"]["greatest"] == pytest.approx(460.0, rel=5e-3)
    assert across["as_found"]["current_ma"]["least"] == pytest.approx(0.0, abs=0.5)
    items = [found for found in answer["findings"] if found["check"] == "separated-items"]
    assert [found["value"] for found in items] == [2.0, 2.0]
    assert {found["verdict"] for found in items} == {"fail"}
    perhaps = bench_network(two_supplies({"id": "lead", "kind": "other", "from": "iso.L2", "to": "second.L2"}))
    unsettled = {found["reason"] for found in perhaps["findings"] if found["check"] == "separated-items"}
    assert unsettled == {"items-unknown"}
    apart = bench_network(two_supplies())
    assert not any(found["kind"] == "across-supplies" for found in apart["contacts"])
    assert {f["verdict"] for f in apart["findings"] if f["check"] == "separated-items"} == {"pass-with-conditions"}


# ---- bonding by a lead -----------------------------------------------------------------------------------------


def two_cases(*links: Body, planned: Body | None = None) -> Body:
    """Two items of class I on one supply of 1 kVA whose earth contacts are joined to nothing."""
    lead = {"length_m": 5, "area_mm2": 1.5}
    items = [
        {"id": name, "fed_by": "iso", "protection_class": "I", "lead": lead, "filter_capacitance_nf": 1}
        for name in "ab"
    ]
    body = small(items=items, links=list(links), **({} if planned is None else {"planned_link": planned}))
    body["supplies"][1] |= {
        "transformer": {"rated_power_va": 1000, "short_circuit_voltage_percent": 6},
        "overcurrent_device": {"kind": "miniature-circuit-breaker", "characteristic": "B", "rated_current_a": 6},
    }
    return body


BOND: Body = {"id": "bond", "kind": "bonding-lead", "from": "a.case", "to": "b.case"}


def test_a_lead_stated_as_nothing_leaves_source_and_leads() -> None:
    told = {f["check"]: f for f in bench_network(two_cases({**BOND, "resistance_ohm": 0}))["findings"]}
    hair = {f["check"]: f for f in bench_network(two_cases({**BOND, "resistance_ohm": 1e-6}))["findings"]}
    assert told["second-fault-disconnection"]["verdict"] == "pass"
    assert told["second-fault-disconnection"]["interval"] == hair["second-fault-disconnection"]["interval"]


@pytest.mark.parametrize("planned", [False, True])
def test_a_lead_between_the_cases_is_the_bonding(planned: bool) -> None:
    answer = bench_network(two_cases(planned=BOND) if planned else two_cases(BOND))
    verdicts = {found["check"]: found["verdict"] for found in answer["findings"]}
    assert verdicts["separated-items"] == "pass-with-conditions"
    # (3.17 Ω + 2·0.121 Ω + 0.1 Ω) let some 65 A flow: B6 is sure from 30 A.
    assert verdicts["second-fault-disconnection"] == "pass"
    off = change(answer, "remove-link", "bond")
    assert not off["helps"]
    assert off["verdict"] == "fail"
    assert "does not help" in off["text"]


def test_a_lead_of_much_resistance_bonds_nothing() -> None:
    answer = bench_network(two_cases({**BOND, "resistance_ohm": 1e5}))
    verdicts = {found["check"]: found["verdict"] for found in answer["findings"]}
    assert verdicts["separated-items"] == "fail"


def test_a_change_that_helps_says_what_stays_failed() -> None:
    body = two_cases(planned={**CLIP, "from": "earth", "to": "a.L2"})
    answer = bench_network(body)
    off = change(answer, "remove-link", "clip")
    assert off["helps"]
    assert off["verdict"] == "fail"
    assert "Not met or not settled even so: One item, or several that are bonded and not earthed" in off["text"]
    helping = [found["verdict"] in ("fail", "undetermined") for found in answer["changes"] if found["floats"]]
    assert helping == sorted(helping)


# ---- short circuits, and contacts that a link raises -----------------------------------------------------------


def test_a_link_between_both_poles_is_told_as_a_short_circuit() -> None:
    body = small(planned_link={"id": "lead", "kind": "other", "from": "iso.L1", "to": "iso.L2", "resistance_ohm": 0.1})
    body["supplies"][1]["overcurrent_device"] = {
        "kind": "miniature-circuit-breaker",
        "characteristic": "B",
        "rated_current_a": 2,
    }
    body["supplies"][0]["overcurrent_device"] = {
        "kind": "miniature-circuit-breaker",
        "characteristic": "B",
        "rated_current_a": 6,
    }
    answer = bench_network(body)
    # Reactance of 5.29 Ω and 0.1 Ω across it: 230 V / 5.2909 Ω = 43.5 A.
    assert "43.5 A" in answer["planned_link"]["text"]
    assert "arc" in answer["planned_link"]["text"]
    assert "where it carries" not in answer["planned_link"]["text"]
    assert "e4" not in answer["planned_link"]["text"]
    assert answer["verdict"] == "fail"
    assert answer["urgency"] in ("urgent", "stop-use")
    seen = {of["supply"]: of for of in answer["planned_link"]["devices"] if of["sees"] == "current"}
    assert seen["iso"]["outcome"] == "operates"
    assert seen["iso"]["text"] in answer["planned_link"]["text"]
    # 230 V to 230 V: the device ahead carries as much.
    assert seen["wall"]["current_a"]["greatest"] == pytest.approx(43.47, rel=1e-3)


def test_two_earthed_clips_on_both_poles_are_a_short_circuit_whether_planned_or_made() -> None:
    clips = [{**CLIP, "id": f"clip{at}", "to": f"set.L{at}"} for at in (1, 2)]
    made = bench_network(small(links=clips))
    assert made["verdict"] == "fail"
    reasons = {found["check"]: found["reason"] for found in made["findings"]}
    assert reasons["planned-link"] == "shorts"
    planned = bench_network(small(links=clips[:1], planned_link=clips[1]))
    # 5.29 Ω of the transformer, twice 0.1 Ω of clip: no more than 230 V / 5.29 Ω.
    assert "43.4 A" in planned["planned_link"]["text"] or "43.5 A" in planned["planned_link"]["text"]
    assert "where it carries" not in planned["planned_link"]["text"]


def test_a_shorted_secondary_shows_ahead_by_the_ratio_of_the_windings() -> None:
    body = small(planned_link={"id": "lead", "kind": "other", "from": "iso.L1", "to": "iso.L2", "resistance_ohm": 0.1})
    body["supplies"][1]["nominal_voltage_between_lines_v"] = 115
    answer = bench_network(body)
    seen = {of["supply"]: of for of in answer["planned_link"]["devices"] if of["sees"] == "current"}
    # u_k 5 % of 500 VA at 115 V: 1.3225 Ω, 86.7 A; half of it at 230 V.
    assert seen["iso"]["current_a"]["greatest"] == pytest.approx(115 / math.hypot(1.3225, 0.1), rel=1e-3)
    assert seen["wall"]["current_a"]["greatest"] == pytest.approx(115 / math.hypot(1.3225, 0.1) / 2, rel=1e-3)


def test_a_contact_that_a_link_raises_over_a_line_is_named() -> None:
    """100 nF from one pole to earth drive 230·ω·100 nF = 7.2 mA through a hand on the other."""
    body = small()
    body["items"][1] |= {
        "fed_by": "wall",
        "signal_ground": {"kind": "floating"},
    }
    body["planned_link"] = {**CLIP, "from": "scope.signal_ground"}
    answer = bench_network(body)
    assert answer["planned_link"]["ties"] == "no"
    text = answer["planned_link"]["text"]
    assert "iso.L1 to earth, would carry 7." in text
    assert "over 3.5 mA" in text
    assert answer["verdict"] == "fail"


# ---- antistatic mats -------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("ohm", "tied", "verdict", "current_ma"),
    [
        (1e6, "no", "pass-with-conditions", 230 / 1.001e3),
        (100e3, "no", "pass-with-conditions", 230 / 101.0),
        (30e3, "no", "fail", 230 / 31.0),
        (10e3, "yes", "fail", 230 / 11.0),
    ],
)
def test_a_path_ties_by_the_current_that_it_lets_flow(ohm: float, tied: str, verdict: str, current_ma: float) -> None:
    """Up to 10 mA the contact's current judges it: 0.23 and 2.3 mA with conditions, 7.4 mA over 3.5 mA."""
    mat = {"id": "mat", "kind": "antistatic-mat", "from": "set.L2", "to": "earth", "resistance_ohm": ohm}
    answer = bench_network(small(links=[mat]))
    assert answer["as_found"]["tied"] == tied
    checks = {found["check"]: found["verdict"] for found in answer["findings"]}
    assert checks["contact-current"] == verdict
    assert greatest(answer, "iso.L1") == pytest.approx(current_ma, rel=3e-2)
    assert (answer["urgency"] == "stop-use") is (ohm < 23e3)


# ---- refusals --------------------------------------------------------------------------------------------------


def test_a_class_that_does_not_fit_its_supply_is_refused_at_its_place() -> None:
    body = small()
    body["items"][0]["protection_class"] = "III"
    ((place, words),) = refused(body)
    assert place == "items/0/protection_class"
    assert "iso has 230 V" in words
    body = small()
    body["supplies"].append({"id": "cell", "kind": "battery"})
    body["items"][1]["fed_by"] = "cell"
    ((place, words),) = refused(body)
    assert place == "items/1/protection_class"
    assert "a battery has none" in words


def test_refusals_show_what_is_expected_where_it_is() -> None:
    body = small()
    body["supplies"][1]["kind"] = "isolated"
    ((place, words),) = refused(body)
    assert place == "supplies/1/kind"
    assert "separated, earthed or battery" in words
    body = small()
    del body["supplies"][1]["kind"]
    ((place, words),) = refused(body)
    assert place == "supplies/1/kind"
    body = small()
    body["items"][0]["id"] = "my set"
    ((place, words),) = refused(body)
    assert place == "items/0/id"
    assert "letters, digits, - and _, with no space" in words
    body = small()
    body["supplies"][0] |= {"overcurrent_device": "B16", "residual_current_device": "30 mA"}
    found = dict(refused(body))
    assert '"characteristic": "B"' in found["supplies/0/earthed/overcurrent_device"]
    assert '"residual_type": "A"' in found["supplies/0/earthed/residual_current_device"]


def test_resistances_are_written_with_the_unit_that_keeps_them_short() -> None:
    mat = {"id": "mat", "kind": "antistatic-mat", "from": "set.L2", "to": "earth"}
    said = everything_said(bench_network(small(links=[mat], planned_link={**CLIP, "kind": "other"})))
    assert "0.1 Ω to 1 MΩ" in said
    assert "e+0" not in said
    assert "1e6" not in said
