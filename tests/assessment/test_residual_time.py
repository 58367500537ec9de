"""Operating times of residual devices: by which multiple they are judged, and what a test shows."""

import pytest

from tests.assessment.bodies import (
    RESIDUAL_30,
    SELECTIVE_100,
    Body,
    finding,
    judged,
    live,
    readings,
    verdict_of,
)


def on_tt(times: Body, residual: Body = RESIDUAL_30, **more: Body) -> Body:
    """A TT circuit of fixed equipment that only its residual device can disconnect."""
    return judged(readings(zs=live(86), times=times), earthing="TT", residual=residual, **more)


def test_the_prospective_multiple_is_that_of_the_least_hot_current() -> None:
    # 218.5 V / (1.2 x (86 + 4.33) ohm) / 0.1 A
    answer = on_tt({"1": 410}, SELECTIVE_100)
    expected = 218.5 / (1.2 * (86 + 0.05 * 86 + 0.03)) / 0.1
    assert answer["quantities"]["residual_current_multiple"] == pytest.approx(expected, rel=1e-5)


def test_a_selective_time_at_once_the_rating_is_not_held_against_the_required_time() -> None:
    answer = on_tt({"1": 410}, SELECTIVE_100)
    assert answer["quantities"]["required_disconnection_time_s"] == 0.2
    assert answer["verdict"] == "pass"


@pytest.mark.parametrize("times", [{"1": 45}, {"1": 45, "2": 40, "5": 20}], ids=["1x", "all"])
def test_a_quick_test_result_never_replaces_the_band(times: Body) -> None:
    # At least 4680 ohm hot: 47 mA, 1.6 x 30 mA, where the standard allows 0.3 s against 0.2 s required.
    answer = judged(readings(zs=live(4300), electrode=1000, times=times), earthing="TT", residual=RESIDUAL_30)
    assert verdict_of(answer, "residual-disconnection") == "fail"


def test_the_band_needs_twice_the_rating_on_tt_and_once_on_tn() -> None:
    tt = finding(on_tt({"1": 25}), "residual-disconnection")
    tn = finding(
        judged(readings(zs=live(0.6), times={"1": 25}), residual=RESIDUAL_30, rules="iec-60364"),
        "residual-disconnection",
    )
    assert tt["limit"] == pytest.approx(218.5 / 0.06, rel=1e-5)
    assert tn["limit"] == pytest.approx(230 / 0.03, rel=1e-5)


@pytest.mark.parametrize("more", [{"5": 22}, {"2": 40}, {"2": 40, "5": 22}], ids=str)
def test_missing_multiples_have_no_effect(more: Body) -> None:
    alone, together = on_tt({"1": 25}), on_tt({"1": 25, **more})
    assert alone["verdict"] == together["verdict"]
    own = "residual-device-test"
    assert [f for f in alone["findings"] if f["check"] != own] == [f for f in together["findings"] if f["check"] != own]


@pytest.mark.parametrize(
    ("times", "residual"),
    [
        ({"1": 301}, RESIDUAL_30),
        ({"1": 25, "2": 151}, RESIDUAL_30),
        ({"1": 25, "5": 41}, RESIDUAL_30),
        ({"1": 501}, SELECTIVE_100),
        ({"1": 410, "5": 162}, SELECTIVE_100),
        ({"1": {"value": 300, "bound": "above"}}, RESIDUAL_30),
    ],
)
def test_a_test_result_over_its_limit_fails_the_device(times: Body, residual: Body) -> None:
    answer = on_tt(times, residual)
    assert answer["verdict"] == "fail"
    assert finding(answer, "residual-disconnection")["reason"] == "device-over-time"
    assert answer["quantities"]["disconnection_time_s"]["by"] == "none"


@pytest.mark.parametrize(
    ("times", "residual"),
    [
        ({"1": 300}, RESIDUAL_30),
        ({"1": 25, "2": 150, "5": 40}, RESIDUAL_30),
        ({"1": 500, "2": 200, "5": 150}, SELECTIVE_100),
        ({"1": {"value": 300, "bound": "below"}}, RESIDUAL_30),
    ],
)
def test_a_test_result_at_its_limit_does_not(times: Body, residual: Body) -> None:
    assert on_tt(times, residual)["verdict"] == "pass"


@pytest.mark.parametrize(
    "time",
    [
        pytest.param({"value": 250, "bound": "above"}, id="over 250 ms"),
        pytest.param({"value": 400, "bound": "below"}, id="under 400 ms"),
        pytest.param(0.024, id="seconds in a millisecond field"),
    ],
)
def test_a_time_that_does_not_decide_is_asked_for_again(time: Body | float) -> None:
    answer = on_tt({"1": time})
    assert answer["verdict"] == "undetermined"
    assert "time" in finding(answer, "residual-disconnection")["settled_by"]


def test_other_multiples_do_not_stand_for_the_time_at_the_rating() -> None:
    assert on_tt({"5": 22})["verdict"] == "undetermined"


def test_a_time_delayed_device_has_no_standard_times() -> None:
    device = {**RESIDUAL_30, "rated_residual_operating_current_ma": 100, "delay": "time-delayed"}
    answer = on_tt({"1": 380}, device)
    assert answer["verdict"] == "undetermined"
    assert "limit" not in finding(answer, "residual-disconnection")
