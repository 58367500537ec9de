"""The checks beside disconnection: the path, the means of earthing, tests, breaking capacity, polarity, insulation."""

from typing import Any

import pytest

from faultloop import assess
from tests.assessment.bodies import (
    RESIDUAL_30,
    SELECTIVE_100,
    Body,
    breaker,
    conditions,
    copper,
    finding,
    judged,
    live,
    no_trip,
    readings,
    request,
    verdict_of,
)

SIZES = {"line_conductor": copper(2.5), "protective_conductor": copper(1.5)}


def with_supply(body: Body, **supply: Any) -> Body:
    return assess({**body, "supply": {**body["supply"], **supply}})


# protective-conductor-condition


def test_case_05_the_neutral_tells_that_the_protective_conductor_is_defective() -> None:
    # R1 = (0.79 - 0.21)/2 = 0.29; a sound 1.5 mm2 conductor adds 0.29 x 2.5/1.5 = 0.483: 0.983 expected, 4.90 read.
    read = readings(zs=live(4.9), ze=0.21, z_ln=0.79, times={"1": 28, "5": 22})
    answer = judged(read, residual=RESIDUAL_30, feeds="socket-outlets", **SIZES)
    found = finding(answer, "protective-conductor-condition")
    assert found["verdict"] == "fail"
    assert found["value"] == pytest.approx(4.9 - (0.21 + 0.29 * (1 + 2.5 / 1.5)), rel=1e-4)
    assert (answer["verdict"], answer["urgency"]) == ("fail", "urgent")
    assert "fault-path-unexplained" in {caution["caution"] for caution in answer["cautions"]}


def test_case_01_agreement_is_a_pass() -> None:
    # |0.74 - (0.18 + 0.55)| = 0.01 is within U(Zs) = 0.067.
    answer = judged(readings(zs=live(0.74), ze=0.18, dead=0.55), device="B16")
    assert finding(answer, "protective-conductor-condition")["verdict"] == "pass"
    assert answer["verdict"] == "pass"


def test_what_a_no_trip_method_can_add_is_no_defect() -> None:
    answer = judged(readings(zs=no_trip(1.21), ze=0.2, dead=0.45), device="B16")
    assert finding(answer, "protective-conductor-condition")["verdict"] == "pass"


def test_without_an_expectation_the_condition_is_not_examined() -> None:
    assert verdict_of(judged(readings(zs=live(0.6))), "protective-conductor-condition") == "not-examined"
    assert (
        verdict_of(judged(readings(zs=live(60)), earthing="TT"), "protective-conductor-condition") == "not-applicable"
    )


# means-of-earthing


def test_a_lost_means_of_earthing_withdraws_every_pass() -> None:
    body = request(readings(zs=live(0.6), ze=0.2))
    answer = with_supply(body, means_of_earthing={"evidence": "terminal hangs loose", "state": "lost"})
    assert finding(answer, "overcurrent-disconnection")["verdict"] == "pass"
    assert finding(answer, "means-of-earthing")["reason"] == "lost"
    assert answer["verdict"] == "fail"
    assert "means-of-earthing-lost" in {caution["caution"] for caution in answer["cautions"]}


def test_153_ohm_disconnected_withdraws_what_3_ohm_connected_shows() -> None:
    # A TN-S supply whose Ze reads 153 ohm with the earthing conductor disconnected has lost its earth.
    answer = judged(readings(zs=live(3.4), ze=153), earthing="TN-S", device="B6")
    assert finding(answer, "means-of-earthing")["reason"] == "external-loop-open"
    assert answer["verdict"] == "fail"


@pytest.mark.parametrize(("state", "verdict"), [("proven", "pass"), ("doubtful", "undetermined"), (None, "pass")])
def test_what_is_stated_of_the_means_of_earthing(state: str | None, verdict: str) -> None:
    stated: Body = {"evidence": "seen at the service head"} | ({} if state is None else {"state": state})
    answer = with_supply(request(readings(zs=live(0.6), ze=0.2)), means_of_earthing=stated)
    assert answer["verdict"] == verdict
    assert verdict_of(answer, "means-of-earthing") == (verdict if state else "not-examined")


def test_on_tt_a_high_external_loop_is_normal() -> None:
    answer = judged(readings(zs=live(62), ze=60, times={"1": 24}), earthing="TT", residual=RESIDUAL_30)
    assert verdict_of(answer, "means-of-earthing") == "not-examined"


# residual-device-test (IEC 61008-1 Table 1)


@pytest.mark.parametrize(
    ("residual", "times", "verdict", "reason"),
    [
        (RESIDUAL_30, {"1": 28}, "pass", "within-limit"),
        (RESIDUAL_30, {"1": 300, "2": 150, "5": 40}, "pass", "within-limit"),
        (RESIDUAL_30, {"1": 301}, "fail", "over-time"),
        (RESIDUAL_30, {"1": 28, "5": 41}, "fail", "over-time"),
        (RESIDUAL_30, {"1": {"value": 300, "bound": "above"}}, "fail", "over-time"),
        (SELECTIVE_100, {"1": 410, "5": 146}, "pass", "within-limit"),
        (SELECTIVE_100, {"1": 410, "5": 162}, "fail", "over-time"),
        (SELECTIVE_100, {"1": 410, "5": 44}, "pass", "sooner-than-selective"),
        (RESIDUAL_30, {"0.5": {"value": 2000, "bound": "above"}, "1": 28}, "pass", "within-limit"),
        (RESIDUAL_30, {"0.5": 60, "1": 28, "loads_connected": True}, "undetermined", "trips-at-half-with-loads"),
        (RESIDUAL_30, {"0.5": 60, "1": 28, "loads_connected": False}, "fail", "trips-at-half"),
    ],
    ids=str,
)
def test_times_of_the_residual_device(residual: Body, times: Body, verdict: str, reason: str) -> None:
    answer = judged(readings(zs=live(0.6), times=times), residual=residual)
    found = finding(answer, "residual-device-test")
    assert (found["verdict"], found["reason"]) == (verdict, reason)


def test_the_result_nearest_to_its_limit_speaks() -> None:
    # 28/300, 90/150, 12/40: the second is the nearest.
    answer = judged(readings(zs=live(0.6), times={"1": 28, "2": 90, "5": 12}), residual=RESIDUAL_30)
    found = finding(answer, "residual-device-test")
    assert (found["value"], found["limit"]) == (90.0, 150.0)


def test_no_test_and_no_device() -> None:
    assert verdict_of(judged(readings(zs=live(0.6)), residual=RESIDUAL_30), "residual-device-test") == "not-examined"
    assert verdict_of(judged(readings(zs=live(0.6))), "residual-device-test") == "not-applicable"


# breaking-capacity


@pytest.mark.parametrize(
    ("stated", "verdict", "reason"),
    [
        ({"prospective_current_ka": 4.1}, "pass", "within-limit"),
        ({"prospective_current_ka": 8.2}, "undetermined", "back-up-not-documented"),
        (
            {"prospective_current_ka": 8.2, "assembly_conditional_rating_ka": 16},
            "pass-with-conditions",
            "assembly-rating",
        ),
        ({"prospective_current_ka": 20, "assembly_conditional_rating_ka": 16}, "fail", "assembly-rating-exceeded"),
        # 1.1 x 230 / (0.1 - 0.035) = 3.89 kA.
        ({"line_neutral_loop_impedance_ohm": live(0.1)}, "pass", "within-limit"),
    ],
    ids=str,
)
def test_current_at_the_board(stated: Body, verdict: str, reason: str) -> None:
    answer = judged(readings(zs=live(0.6)), device=breaker("B32", breaking_capacity_ka=6), board=stated)
    found = finding(answer, "breaking-capacity")
    assert (found["verdict"], found["reason"]) == (verdict, reason)
    assert ("back-up-documented" in conditions(answer)) == (verdict == "pass-with-conditions")


def test_case_17_next_to_the_transformer_the_declared_value_governs() -> None:
    # 0.028 ohm with 10 % + 0.02 ohm is 0.0052 to 0.0508: nothing that a portable instrument can decide; 16 kA declared.
    vague = live(0.028, instrument={"percent": 10, "digits": 2, "resolution": 0.01})
    body = request(
        readings(zs=live(0.3)),
        device=breaker("B32", breaking_capacity_ka=6),
        board={"line_neutral_loop_impedance_ohm": vague},
    )
    answer = with_supply(body, declared_prospective_current_ka=16)
    found = finding(answer, "breaking-capacity")
    assert (found["verdict"], found["value"]) == ("undetermined", 16.0)


def test_an_outlet_can_only_fail_the_breaking_capacity() -> None:
    capacity = breaker("B32", breaking_capacity_ka=6)
    assert verdict_of(judged(readings(zs=live(0.6)), device=capacity), "breaking-capacity") == "not-examined"
    # 0.95 x 230 / (0.028 + 0.0314) = 3.68 kA cold at the least; hot a little less.
    weak = breaker("B32", breaking_capacity_ka=1.5)
    answer = judged(readings(zs=live(0.028)), device=weak)
    assert finding(answer, "breaking-capacity")["reason"] == "outlet-current-over-capacity"


def test_three_phases_need_the_current_between_lines() -> None:
    device = breaker("C32", breaking_capacity_ka=6, poles=3)
    answer = judged(readings(zs=live(0.3)), device=device, board={"line_neutral_loop_impedance_ohm": live(0.1)})
    assert verdict_of(answer, "breaking-capacity") == "not-examined"


# polarity, insulation resistance, touch voltage


@pytest.mark.parametrize(
    ("stated", "verdict"), [("correct", "pass"), ("reversed", "fail"), ("not-tested", "not-examined")]
)
def test_polarity(stated: str, verdict: str) -> None:
    answer = judged({**readings(zs=live(0.6)), "polarity": stated})
    assert verdict_of(answer, "polarity") == verdict
    assert (answer["verdict"] == "fail") == (stated == "reversed")


@pytest.mark.parametrize(
    ("value", "verdict"),
    [(200, "pass"), (1.2, "pass"), (1.05, "marginal"), (0.95, "marginal"), (0.5, "fail"),
     ({"value": 200, "bound": "above"}, "pass"), ({"value": 0.4, "bound": "above"}, "undetermined"),
     ({"value": 0.01, "bound": "below"}, "fail")],
)  # fmt: skip
def test_insulation_resistance_has_a_least_value(value: Any, verdict: str) -> None:
    answer = judged({**readings(zs=live(0.6)), "insulation_resistance_megohm": value})
    assert verdict_of(answer, "insulation-resistance") == verdict


def test_touch_voltage_is_reported_and_never_counts() -> None:
    # Case 01: 230 x 0.275 x 1.2097 / 0.857 = 89 V for 0.1 s at most; the curve lies at 1000 x 0.116/sqrt(0.1) = 367 V.
    read = readings(zs=live(0.74, conductor_temperature_c=18), ze=0.18, dead=0.55, protective=0.275)
    found = finding(judged(read, device="B16"), "touch-voltage")
    assert found["value"] == pytest.approx(89.2, rel=0.01)
    assert found["limit"] == pytest.approx(1000 * 0.116 / 0.1**0.5, rel=1e-4)
    assert (found["verdict"], found["counts"]) == ("pass", False)
