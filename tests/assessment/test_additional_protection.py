"""Additional protection of outlets: who needs it, who is exempt, and what shows that it works."""

import pytest

from tests.assessment.bodies import RESIDUAL_30, Body, conditions, finding, judged, live, readings, verdict_of

CHECK = "additional-protection"
SETS = ("bs-7671", "bs-7671:2008", "iec-60364")


def socket(times: Body | None = None, **more: object) -> Body:
    """A socket-outlet with a sound loop."""
    return judged(readings(zs=live(0.6), times=times), **{"feeds": "socket-outlets", **more})


@pytest.mark.parametrize("rules", SETS)
def test_a_general_use_socket_without_a_sensitive_device_fails(rules: str) -> None:
    answer = socket(rules=rules, device="B20")
    assert (answer["verdict"], answer["urgency"]) == ("fail", "planned")
    assert finding(answer, CHECK)["limit"] == 30


@pytest.mark.parametrize("rules", SETS)
def test_a_tested_30_ma_device_meets_it(rules: str) -> None:
    assert socket({"1": 25}, rules=rules, residual=RESIDUAL_30)["verdict"] == "pass"


def test_a_100_ma_device_does_not() -> None:
    assert socket({"1": 25}, residual={"rated_residual_operating_current_ma": 100})["verdict"] == "fail"


def test_an_untested_device_is_undetermined_because_it_is_required() -> None:
    answer = socket(residual=RESIDUAL_30)
    assert verdict_of(answer, CHECK) == answer["verdict"] == "undetermined"


def test_a_device_over_time_fails_even_where_the_overcurrent_device_is_in_time() -> None:
    answer = socket({"1": 310}, residual=RESIDUAL_30)
    assert verdict_of(answer, "overcurrent-disconnection") == "pass"
    assert verdict_of(answer, CHECK) == answer["verdict"] == "fail"


@pytest.mark.parametrize("delay", ["selective", "time-delayed"])
def test_a_delayed_device_gives_no_additional_protection(delay: str) -> None:
    assert socket({"1": 400}, residual={**RESIDUAL_30, "delay": delay})["verdict"] in ("fail", "undetermined")


@pytest.mark.parametrize(
    ("rules", "users", "verdict"),
    [
        ("iec-60364", "ordinary", "fail"),
        ("iec-60364", "instructed", "pass-with-conditions"),
        ("iec-60364", "skilled", "pass-with-conditions"),
        ("bs-7671", "instructed", "fail"),
        ("bs-7671", "skilled", "fail"),
        ("bs-7671:2008", "instructed", "pass-with-conditions"),
        ("bs-7671:2008", "skilled", "pass-with-conditions"),
    ],
)
def test_users_exempt_an_outlet_where_the_rule_set_says_so(rules: str, users: str, verdict: str) -> None:
    answer = socket(rules=rules, users=users, device="B20")
    assert answer["verdict"] == verdict
    assert ("supervision" in conditions(answer)) == (verdict != "fail")


@pytest.mark.parametrize("rules", SETS)
def test_designated_equipment_is_exempt_on_conditions(rules: str) -> None:
    answer = socket(rules=rules, designated_equipment=True, device="B20")
    assert answer["verdict"] == "pass-with-conditions"
    assert conditions(answer) == {"designated-equipment"}


def test_an_exempt_outlet_is_not_worse_off_for_an_untested_device() -> None:
    answer = socket(residual=RESIDUAL_30, designated_equipment=True)
    assert answer["verdict"] == "pass-with-conditions"


def test_a_proven_device_needs_no_exemption() -> None:
    answer = socket({"1": 25}, residual=RESIDUAL_30, designated_equipment=True)
    assert (answer["verdict"], conditions(answer)) == ("pass", set())


def test_mobile_equipment_outdoors_has_no_exemption() -> None:
    answer = socket(feeds="mobile-equipment-outdoors", designated_equipment=True, users="skilled")
    assert answer["verdict"] == "fail"


@pytest.mark.parametrize(
    "more",
    [
        pytest.param({"feeds": "fixed-equipment"}, id="fixed equipment"),
        pytest.param({"role": "distribution", "feeds": None}, id="distribution circuit"),
        pytest.param({"device": "B40"}, id="socket above the rating"),
        pytest.param({"device": "B32", "rules": "bs-7671:2008"}, id="above 20 A in the older edition"),
    ],
)
def test_it_is_not_asked_elsewhere(more: Body) -> None:
    answer = socket(**more)
    assert verdict_of(answer, CHECK) == "not-applicable"
    assert answer["verdict"] == "pass"


def test_a_distribution_circuit_that_feeds_outlets_is_asked_about() -> None:
    asked = socket(role="distribution")
    assert finding(asked, CHECK)["reason"] == "role-unclear"
    assert asked["verdict"] == "undetermined"
    assert socket({"1": 25}, role="distribution", residual=RESIDUAL_30)["verdict"] == "pass"


def test_a_circuit_is_rated_no_higher_than_its_device() -> None:
    answer = socket(rated_current_a=63)
    assert finding(answer, CHECK)["verdict"] == "fail"


def test_a_use_not_stated_is_asked_for_unless_a_proven_device_is_there() -> None:
    asked = socket(feeds=None)
    assert asked["verdict"] == "undetermined"
    assert "circuit.feeds" in finding(asked, CHECK)["settled_by"]
    assert socket({"1": 25}, feeds=None, residual=RESIDUAL_30)["verdict"] == "pass"


@pytest.mark.parametrize(("own", "front"), [(6, 6), (10, 30)])
def test_a_quick_device_in_front_is_not_overlooked(own: float, front: float) -> None:
    # The delayed device gives no additional protection; the one in front may, and its test is what is missing.
    delayed = {"rated_residual_operating_current_ma": own, "delay": "selective"}
    answer = socket({"1": 140}, residual=delayed, upstream=[{"rated_residual_operating_current_ma": front}])
    assert verdict_of(answer, CHECK) == "undetermined"
