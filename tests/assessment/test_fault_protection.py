"""Fault protection as any-of: which member decides, and what a residual device may carry."""

import pytest

from tests.assessment.bodies import (
    RESIDUAL_30,
    Body,
    assumptions,
    conditions,
    copper,
    fault_protection,
    finding,
    judged,
    live,
    no_trip,
    readings,
    verdict_of,
)

TESTED = {"1": 25}
# B32 under bs-7671: 0.95 x 230 V / 160 A = 1.3656 ohm.  By hand, hot = 1.2 x cold where Ze is unknown.
MARGINAL_LOOP = live(1.1)  # 1.218 to 1.422
TOO_HIGH = live(1.6)  # 1.788 to 2.052


def test_overcurrent_alone_within_its_limit_is_a_plain_pass() -> None:
    answer = judged(readings(zs=live(0.6)))
    assert (answer["verdict"], answer["urgency"]) == ("pass", "none")
    assert finding(answer, "overcurrent-disconnection")["limit"] == pytest.approx(218.5 / 160, rel=1e-5)


def test_an_absent_residual_device_is_no_member() -> None:
    answer = judged(readings(zs=TOO_HIGH))
    assert verdict_of(answer, "residual-disconnection") == "not-applicable"
    assert answer["verdict"] == "fail"


def test_the_group_takes_its_best_member_and_the_other_does_not_count() -> None:
    answer = judged(readings(zs=live(86), times=TESTED), earthing="TT", residual=RESIDUAL_30)
    assert not finding(answer, "overcurrent-disconnection")["counts"]
    assert finding(answer, "residual-disconnection")["counts"]
    assert verdict_of(answer, "overcurrent-disconnection") == "fail"
    assert fault_protection(answer) == "pass"


def test_tt_by_residual_device_alone_passes_and_its_failure_is_only_reported() -> None:
    answer = judged(readings(zs=live(86), times=TESTED), earthing="TT", residual=RESIDUAL_30)
    assert (answer["verdict"], answer["urgency"]) == ("pass", "none")
    assert verdict_of(answer, "barrier-failed-path") == "fail"
    assert not finding(answer, "barrier-failed-path")["counts"]


def test_tn_with_the_overcurrent_device_in_time_needs_no_residual_test() -> None:
    assert judged(readings(zs=live(0.6)), residual=RESIDUAL_30)["verdict"] == "pass"


def test_tn_marginal_becomes_conditional_with_a_tested_residual_device() -> None:
    assert judged(readings(zs=MARGINAL_LOOP))["verdict"] == "marginal"
    answer = judged(readings(zs=MARGINAL_LOOP, times=TESTED), residual=RESIDUAL_30)
    assert (answer["verdict"], answer["urgency"]) == ("pass-with-conditions", "note")
    assert conditions(answer) == {"residual-carries-path"}


def test_tn_marginal_stays_marginal_with_an_untested_residual_device() -> None:
    assert judged(readings(zs=MARGINAL_LOOP), residual=RESIDUAL_30)["verdict"] == "marginal"


def test_tn_too_high_but_explained_by_the_dead_sum_is_conditional() -> None:
    answer = judged(readings(zs=TOO_HIGH, ze=0.4, dead=1.2, times=TESTED), residual=RESIDUAL_30)
    assert verdict_of(answer, "overcurrent-disconnection") == "fail"
    assert answer["verdict"] == "pass-with-conditions"
    assert conditions(answer) == {"residual-carries-path"}


def test_tn_too_high_but_explained_by_length_is_conditional() -> None:
    # 60 m x (7.41 + 12.1) milliohm = 1.17, with Ze 0.4 about 1.57 against 1.6 read.
    sizes = {"line_conductor": copper(2.5), "protective_conductor": copper(1.5), "length_m": 60}
    answer = judged(readings(zs=TOO_HIGH, ze=0.4, times=TESTED), residual=RESIDUAL_30, **sizes)
    assert answer["verdict"] == "pass-with-conditions"


def test_tn_too_high_and_unexplained_is_undetermined_until_a_dead_test() -> None:
    answer = judged(readings(zs=TOO_HIGH, ze=0.4, times=TESTED), residual=RESIDUAL_30)
    assert answer["verdict"] == "undetermined"
    assert "R1 + R2" in finding(answer, "residual-disconnection")["settled_by"]
    settled = judged(readings(zs=TOO_HIGH, ze=0.4, dead=1.2, times=TESTED), residual=RESIDUAL_30)
    assert settled["verdict"] == "pass-with-conditions"


def test_tn_beyond_expectation_fails_though_the_residual_inequality_is_met() -> None:
    answer = judged(readings(zs=live(4.9), ze=0.21, dead=0.76, times=TESTED), residual=RESIDUAL_30)
    found = finding(answer, "residual-disconnection")
    assert answer["verdict"] == found["verdict"] == "fail"
    assert found["value"] < found["limit"]


def test_a_computed_r1_r2_explains_nothing() -> None:
    computed = {"value": 4.69, "method": "calculated"}
    read = readings(zs=live(4.9), ze=0.21, dead=computed, times=TESTED)
    assert judged(read, residual=RESIDUAL_30)["verdict"] == "undetermined"


@pytest.mark.parametrize(("zs", "verdict"), [(21.0, "undetermined"), (24.0, "fail")])
def test_tn_fails_where_even_the_lower_end_is_above_twenty_ohm(zs: float, verdict: str) -> None:
    # 21 - 1.08 = 19.92; 24 - 1.23 = 22.77.
    answer = judged(readings(zs=live(zs), times=TESTED), residual=RESIDUAL_30)
    assert answer["verdict"] == verdict


@pytest.mark.parametrize(("rules", "limit"), [("bs-7671", 50 / 0.3), ("iec-60364", 230 / 0.3)])
def test_fifty_volt_is_asked_of_tn_where_the_rule_set_says_so(rules: str, limit: float) -> None:
    device = {"rated_residual_operating_current_ma": 300}
    answer = judged(readings(zs=live(0.6), times=TESTED), residual=device, rules=rules)
    assert finding(answer, "residual-disconnection")["limit"] == pytest.approx(limit, rel=1e-5)


def test_a_residual_device_that_failed_its_test_earns_no_credit() -> None:
    read = readings(zs=TOO_HIGH, ze=0.4, dead=1.2, times={"1": 310})
    answer = judged(read, residual=RESIDUAL_30)
    assert answer["verdict"] == "fail"
    assert finding(answer, "residual-disconnection")["reason"] == "device-over-time"


@pytest.mark.parametrize(
    ("read", "more"),
    [
        pytest.param(readings(zs=live(0.6)), {"device": None}, id="device"),
        pytest.param(readings(zs=live(0.6)), {"role": None}, id="role"),
        pytest.param(readings(zs=live(0.6)), {"earthing": None}, id="earthing"),
        pytest.param(readings(zs=live(0.6)), {"voltage": None}, id="nominal voltage"),
        pytest.param(readings(), {}, id="loop"),
        pytest.param(readings(ze=0.2), {}, id="Ze without R1 + R2"),
        pytest.param(readings(dead=0.4), {}, id="R1 + R2 without Ze"),
        pytest.param(readings(times=TESTED), {"earthing": "TT", "residual": RESIDUAL_30}, id="R_A"),
        pytest.param(readings(zs=live(86)), {"earthing": "TT", "residual": RESIDUAL_30}, id="operating time"),
    ],
)
def test_without_required_evidence_nothing_is_decided(read: Body, more: Body) -> None:
    assert judged(read, **more)["verdict"] == "undetermined"


def test_ze_with_a_dead_r1_r2_stands_for_a_loop_reading() -> None:
    answer = judged(readings(ze=0.2, dead=0.4))
    assert answer["verdict"] == "pass"
    assert finding(answer, "overcurrent-disconnection")["value"] == pytest.approx(0.2 + 1.2 * 0.4)


@pytest.mark.parametrize("read", [readings(electrode=71), readings(zs=live(86))], ids=["R_A", "loop"])
def test_tt_passes_on_the_electrode_or_on_the_loop(read: Body) -> None:
    answer = judged({**read, "residual_operating_time_ms": TESTED}, earthing="TT", residual=RESIDUAL_30)
    assert answer["verdict"] == "pass"
    assert ("electrode-from-loop" in assumptions(answer)) == ("earth_electrode_resistance_ohm" not in read)


def test_tt_overcurrent_device_in_time_passes_as_well() -> None:
    # 0.2 s on TT; a B16 still operates at once from 80 A: 2.731 ohm.
    answer = judged(readings(zs=live(1.2), electrode=0.5), earthing="TT", device="B16")
    assert answer["verdict"] == "pass"


def test_an_earthing_that_is_not_covered_is_undetermined_and_asks_for_a_competent_person() -> None:
    answer = judged(readings(zs=live(0.6)), earthing="TN-C")
    assert answer["verdict"] == "undetermined"
    assert "competent person" in finding(answer, "overcurrent-disconnection")["settled_by"]


def test_without_an_explanation_a_no_trip_reading_does_not_fail_within_its_uplift() -> None:
    # 1.9 read, up to 0.5 too high: hot from 2.28 - 1.2 x 0.74 = 1.39, just over; 1.8 from 1.28, below.
    assert judged(readings(zs=no_trip(1.8)))["verdict"] == "marginal"
    assert judged(readings(zs=no_trip(1.9)))["verdict"] == "fail"
