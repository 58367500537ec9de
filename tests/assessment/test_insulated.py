"""IT supplies: what a first fault leaves, what tells of it, and whether a second one is cleared."""

import copy
import math
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from faultloop import assess, assess_many
from tests.assessment import strategies as s
from tests.assessment.bodies import Body, breaker, finding, live, rank, verdict_of
from tests.assessment.test_separated import cautions, without_digest

many = settings(max_examples=120, deadline=None)
MONITOR = {"fitted": True, "set_point_kohm": 50, "alarm_tested": True}


def linked(ohm: float) -> Body:
    """A live reading of the loop with the source linked to earth for it."""
    return live(ohm, state="source linked to earth for the test")


READ = {
    "earth_electrode_resistance_ohm": 20,
    "earth_fault_loop_impedance_ohm": linked(1.0),
    "monitored_insulation_kohm": 400,
}


def island(readings: Body | None = None, device: str | None = "B16", supply: Body | None = None, **it: Any) -> Body:
    """A fixed machine on a three-phase IT bus of 230/400 V without a neutral, all of it in order."""
    told = {
        "line_capacitance_to_earth_nf": 60, "neutral_distributed": False, "exposed_parts": "together",
        "insulation_monitor": MONITOR, **it,
    }  # fmt: skip
    voltages = {"nominal_voltage_to_earth_v": 230, "nominal_voltage_between_lines_v": 400}
    body: Body = {
        "point": {"label": "island"},
        "supply": {"earthing": "IT", "phases": 3, "frequency_hz": 50, **voltages, **(supply or {})},
        "it_supply": {name: value for name, value in told.items() if value is not None},
        "circuit": {"role": "final", "feeds": "fixed-equipment"},
        "readings": READ if readings is None else readings,
        "rules": "bs-7671",
    }
    if device is not None:
        body["overcurrent_device"] = breaker(device)
    return body


def without(name: str) -> Body:
    """The readings without one."""
    return {reading: value for reading, value in READ.items() if reading != name}


def test_an_island_in_order_passes() -> None:
    answer = assess(island())
    assert (answer["verdict"], answer["urgency"]) == ("pass", "none")
    assert {"pole-to-pole", "insulated-first-fault", "medical-locations"} <= cautions(answer)


def test_a_first_fault_drives_the_capacitance_of_three_lines() -> None:
    # By hand: 3 x 2 pi x 50 Hz x 60 nF x 230 V = 13.0 mA (common practice: I_d = 3 omega C U0), over 20 ohm 0.26 V.
    told = assess(island())
    assert finding(told, "first-fault")["value"] == pytest.approx(20 * 3 * 2 * math.pi * 50 * 60e-9 * 230, rel=1e-4)
    assert told["quantities"]["first_fault_current_ma"]["greatest"] == pytest.approx(1.2 * 13.006, rel=1e-3)


@pytest.mark.parametrize(("ma", "verdict"), [(2300, "pass"), (2499, "marginal"), (2800, "fail")])
def test_the_touch_voltage_of_a_first_fault_is_held_to_50_volts(ma: float, verdict: str) -> None:
    # IEC 60364-4-41, 411.6.2: R_A x I_d <= 50 V; 20 ohm x 2.3 A = 46 V.
    exact = {"value": 20, "instrument": {"percent": 1, "digits": 0, "resolution": 0.1}}
    read = {**READ, "earth_electrode_resistance_ohm": exact, "first_fault_current_ma": ma}
    assert verdict_of(assess(island(read)), "first-fault") == verdict


def test_no_first_fault_brings_more_than_the_voltage_of_a_line() -> None:
    told = assess(island({**READ, "earth_electrode_resistance_ohm": 1e6}, line_capacitance_to_earth_nf=5000))
    assert told["quantities"]["touch_voltage_v"]["greatest"] <= 1.1 * 230


@pytest.mark.parametrize("missing", ["earth_electrode_resistance_ohm", "earth_fault_loop_impedance_ohm"])
def test_required_readings_that_are_missing_leave_it_open(missing: str) -> None:
    assert assess(island(without(missing)))["verdict"] == "undetermined"


@pytest.mark.parametrize("unknown", ["line_capacitance_to_earth_nf", "exposed_parts", "insulation_monitor"])
def test_facts_that_are_missing_leave_it_open(unknown: str) -> None:
    assert assess(island(**{unknown: None}))["verdict"] == "undetermined"


def test_a_reading_stands_for_an_unknown_capacitance() -> None:
    told = assess(island({**READ, "first_fault_current_ma": 13}, line_capacitance_to_earth_nf=None))
    assert told["verdict"] == "pass"


@pytest.mark.parametrize("part", ["phases", "nominal_voltage_between_lines_v", "nominal_voltage_to_earth_v"])
def test_a_supply_that_is_half_told_is_asked_about(part: str) -> None:
    body = island()
    del body["supply"][part]
    assert assess(body)["verdict"] == "undetermined"


@pytest.mark.parametrize(
    ("neutral", "limit"), [(False, 0.95 * 400 / 160), (True, 0.95 * 230 / 160), (None, 0.95 * 230 / 160)]
)
def test_a_second_fault_shares_the_voltage_between_two_circuits(neutral: bool | None, limit: float) -> None:
    # IEC 60364-4-41, 411.6.4: Zs <= U/(2 Ia) without a neutral, U0/(2 Ia) with one; unknown counts as with one.
    told = finding(assess(island(neutral_distributed=neutral)), "second-fault-disconnection")
    assert told["limit"] == pytest.approx(limit, rel=1e-5)


def test_a_live_reading_without_a_link_shows_a_first_fault_or_an_untold_link() -> None:
    read = assess(island({**READ, "earth_fault_loop_impedance_ohm": live(1.0)}))
    assert finding(read, "second-fault-disconnection")["reason"] == "loop-reads-earth"
    nothing = {**READ, "earth_fault_loop_impedance_ohm": {"value": 2000, "bound": "above"}}
    assert finding(assess(island(nothing)), "second-fault-disconnection")["reason"] == "loop-missing"


def test_a_dead_test_of_the_circuit_carries_a_second_fault() -> None:
    # By hand: 1.2 x 1.0 ohm against 0.95 x 400 V / (2 x 80 A) = 2.375 ohm.
    read = without("earth_fault_loop_impedance_ohm") | {"line_plus_protective_resistance_ohm": 1.0}
    told = finding(assess(island(read)), "second-fault-disconnection")
    assert (told["verdict"], told["value"]) == ("pass", pytest.approx(1.2))


def test_a_device_that_was_never_timed_is_not_relied_on() -> None:
    body = island({**READ, "earth_electrode_resistance_ohm": 100}, exposed_parts="separately")
    body["residual_current_device"] = {"rated_residual_operating_current_ma": 30}
    assert verdict_of(assess(body), "second-fault-disconnection") == "undetermined"
    body["readings"]["residual_operating_time_ms"] = {"1": 500}
    assert verdict_of(assess(body), "second-fault-disconnection") == "fail"


def test_lost_earthing_leaves_the_voltage_of_the_line() -> None:
    lost = assess(island(supply={"means_of_earthing": {"evidence": "clamp off", "state": "lost"}}))
    assert (lost["verdict"], lost["urgency"]) == ("fail", "stop-use")


def test_a_half_filled_form_is_no_stop_of_use() -> None:
    for missing in ("earth_electrode_resistance_ohm", "earth_fault_loop_impedance_ohm"):
        assert assess(island(without(missing)))["urgency"] == "planned"
    assert assess(island(line_capacitance_to_earth_nf=None))["urgency"] == "planned"


@pytest.mark.parametrize("decision", ["guarded", "simple"])
@pytest.mark.parametrize("over", ["earth_electrode_resistance_ohm", "first_fault_current_ma"])
def test_over_range_is_never_a_pass(decision: str, over: str) -> None:
    body = island({**READ, over: {"value": 500, "bound": "above"}})
    assert verdict_of(assess(body | {"policy": {"decision": decision}}), "first-fault") == "undetermined"


def test_a_standing_first_fault_orders_work() -> None:
    read = {**READ, "monitored_insulation_kohm": 0.5}
    assert assess(island(read))["urgency"] == "planned"
    worse = assess(island({**read, "earth_fault_loop_impedance_ohm": linked(4.0)}))
    assert (worse["verdict"], worse["urgency"]) == ("fail", "urgent")


def test_a_second_fault_that_is_not_cleared_fails() -> None:
    assert verdict_of(assess(island({**READ, "earth_fault_loop_impedance_ohm": linked(4.0)})), "first-fault") == "pass"
    told = assess(island({**READ, "earth_fault_loop_impedance_ohm": linked(4.0)}))
    assert (told["verdict"], verdict_of(told, "second-fault-disconnection")) == ("fail", "fail")


@pytest.mark.parametrize(("electrode", "verdict"), [(100, "pass"), (1600, "undetermined"), (2500, "fail")])
def test_parts_that_are_earthed_separately_are_protected_as_on_tt(electrode: float, verdict: str) -> None:
    # IEC 60364-4-41, 411.6.4 b): R_A x I_dn <= 50 V; 50 V / 30 mA = 1667 ohm.
    body = island({**READ, "earth_electrode_resistance_ohm": electrode}, exposed_parts="separately")
    body["residual_current_device"] = {"rated_residual_operating_current_ma": 30}
    body["readings"]["residual_operating_time_ms"] = {"1": 24}
    assert verdict_of(assess(body), "second-fault-disconnection") == verdict
    # By the overcurrent device alone the electrode would have to be below 50 V / 80 A.
    del body["residual_current_device"]
    assert verdict_of(assess(body), "second-fault-disconnection") == "fail"


@pytest.mark.parametrize(
    ("monitor", "shown", "verdict"),
    [
        ({"fitted": False}, 400, "fail"),
        (MONITOR, 400, "pass"),
        (MONITOR, 38, "pass-with-conditions"),
        (MONITOR, 52, "pass-with-conditions"),
        ({**MONITOR, "alarm_tested": False}, 400, "pass-with-conditions"),
        ({"fitted": True, "alarm_tested": True}, 400, "undetermined"),
        (MONITOR, None, "pass"),
    ],
)
def test_a_monitor_tells_of_the_first_fault(monitor: Body, shown: float | None, verdict: str) -> None:
    read = without("monitored_insulation_kohm") | ({} if shown is None else {"monitored_insulation_kohm": shown})
    assert verdict_of(assess(island(read, insulation_monitor=monitor)), "insulation-monitor") == verdict


def test_no_earth_fault_current_is_told_that_no_fault_drives() -> None:
    told = assess(island())["quantities"]
    assert not {"prospective_earth_fault_current_a", "disconnection_time_s"} & set(told)
    assert told["second_fault_current_a"]["least"] == pytest.approx(0.95 * 400 / (2 * 1.2 * 1.08), rel=1e-3)


def test_a_line_that_is_touched_is_told() -> None:
    # 13.0 mA into a body of 1000 ohm: the capacitance decides, not the body.
    told = assess(island())["quantities"]["contact_current_ma"]
    assert told == {"least": pytest.approx(0.8 * 13.0, rel=0.01), "greatest": pytest.approx(1.2 * 13.0, rel=0.01)}


def test_one_line_and_neutral_drive_a_third() -> None:
    told = assess(island(supply={"phases": 1}))
    by_hand = 20 * 2 * math.pi * 50 * 60e-9 * 230
    assert finding(told, "first-fault")["value"] == pytest.approx(by_hand, rel=1e-3)


@many
@given(s.requests)
def test_no_number_is_missing_from_a_sentence(body: Body) -> None:
    for found in assess({**body, "supply": {**body.get("supply", {}), "earthing": "IT"}})["findings"]:
        assert "nan" not in found["explanation"].split(), found
        assert "nan" not in found.get("settled_by", "").split(), found


RAISED = ("earth_electrode_resistance_ohm", "earth_fault_loop_impedance_ohm", "first_fault_current_ma")


@many
@given(st.sampled_from(RAISED), st.floats(1.0, 100.0), s.it_supplies, st.floats(0.1, 3.0))
def test_a_worse_reading_never_improves_a_verdict(which: str, factor: float, it: Body, loop: float) -> None:
    body = island({**READ, "first_fault_current_ma": 40.0, "earth_fault_loop_impedance_ohm": linked(loop)})
    body["it_supply"] = it
    worse = copy.deepcopy(body)
    told = body["readings"][which]
    worse["readings"][which] = {**told, "value": told["value"] * factor} if isinstance(told, dict) else told * factor
    before, after = assess_many([body, worse])
    assert rank(after["verdict"]) <= rank(before["verdict"])


@many
@given(st.floats(0, 5000), st.floats(1.0, 50.0), st.floats(0.1, 500))
def test_more_capacitance_never_improves_a_verdict(capacitance: float, factor: float, electrode: float) -> None:
    read = {**READ, "earth_electrode_resistance_ohm": electrode}
    less, more = (island(read, line_capacitance_to_earth_nf=of) for of in (capacitance, capacitance * factor))
    before, after = assess_many([less, more])
    assert rank(after["verdict"]) <= rank(before["verdict"])


@many
@given(s.it_supplies, st.sampled_from(sorted(READ)))
def test_dropping_required_evidence_never_upgrades(it: Body, dropped: str) -> None:
    # What a monitor shows may be worse than nothing shown of it: it is no evidence that is required.
    body = island({**READ, "monitored_insulation_kohm": 1e6})
    body["it_supply"] = it
    less = copy.deepcopy(body)
    del less["readings"][dropped]
    before, after = assess_many([body, less])
    known = "set_point_kohm" in it.get("insulation_monitor", {}) or dropped != "monitored_insulation_kohm"
    # What showed a failure leaves the question open where it is gone; nothing is met by that.
    open_now = max(rank(before["verdict"]), rank("undetermined"))
    assert rank(after["verdict"]) <= open_now or not known


FIELDS: Body = {
    "line_capacitance_to_earth_nf": 90, "neutral_distributed": True, "exposed_parts": "separately",
    "insulation_monitor": {"fitted": False},
}  # fmt: skip


@pytest.mark.parametrize("name", sorted(FIELDS))
def test_every_field_of_an_it_supply_changes_the_answer(name: str) -> None:
    assert without_digest(island()) != without_digest(island(**{name: FIELDS[name]}))


@pytest.mark.parametrize("earthing", ["TN-S", "TT", "separated"])
def test_what_belongs_to_an_it_supply_is_named_elsewhere(earthing: str) -> None:
    body = island(supply={"earthing": earthing})
    named = {entry["subject"] for entry in assess(body)["not_examined"] if entry["reason"] == "not-used"}
    assert {"it_supply", "readings.monitored_insulation_kohm"} <= named
