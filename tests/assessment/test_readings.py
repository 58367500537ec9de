"""What a reading is worth: method, bound, instrument, and the readings beside it."""

import pytest

from tests.assessment.bodies import (
    RESIDUAL_30,
    Body,
    assumptions,
    copper,
    finding,
    judged,
    live,
    no_trip,
    readings,
)

COLD = {"temperature": "none"}
HIGH_CURRENT_U = 0.05, 0.03
PRECISE = {"instrument": {"percent": 3, "digits": 3, "resolution": 0.01}}


def loop_of(answer: Body) -> Body:
    """The cold loop that was decided on."""
    found: Body = answer["quantities"]["earth_fault_loop_impedance_ohm"]
    return found


def test_a_method_not_stated_is_no_trip_where_a_residual_device_is_fitted_and_said() -> None:
    assert "method-no-trip" in assumptions(judged(readings(zs=0.6), residual=RESIDUAL_30))
    assert "method-high-current" in assumptions(judged(readings(zs=0.6)))


def test_a_stated_method_is_not_assumed() -> None:
    answer = judged(readings(zs=no_trip(0.6)), residual=RESIDUAL_30)
    assert not {name for name in assumptions(answer) if name.startswith("method")}


def test_a_no_trip_reading_may_be_high_by_half_an_ohm_but_not_low() -> None:
    answer = judged(readings(zs=no_trip(1.2)), policy=COLD)
    assert loop_of(answer) == {"least": pytest.approx(0.53), "greatest": pytest.approx(1.37)}


def test_a_no_trip_reading_is_floored_at_ze() -> None:
    answer = judged(readings(zs=no_trip(1.2), ze=0.8), policy=COLD)
    assert loop_of(answer) == {"least": pytest.approx(0.8), "greatest": pytest.approx(1.37)}


def test_a_no_trip_reading_can_pass_alone() -> None:
    assert judged(readings(zs=no_trip(0.7)))["verdict"] == "pass"


def test_a_dead_r1_r2_with_ze_outranks_a_no_trip_reading_and_says_so() -> None:
    # Expected 0.25 + 0.4 = 0.65; 1.21 read, 0.56 more, within 0.5 and the combined U of 0.18.
    answer = judged(readings(zs=no_trip(1.21), ze=0.25, dead=0.4), device="C16")
    assert answer["verdict"] == "pass"
    assert finding(answer, "overcurrent-disconnection")["value"] == pytest.approx(0.25 + 1.2 * 0.4)
    assert "reading-outranked" in assumptions(answer)
    assert judged(readings(zs=no_trip(1.21), ze=0.25), device="C16")["verdict"] == "marginal"


def test_a_no_trip_reading_beyond_the_uplift_is_not_outranked() -> None:
    # 1.5 - 0.65 = 0.85 is more than 0.5 + 0.21.
    answer = judged(readings(zs=no_trip(1.5), ze=0.25, dead=0.4), device="C16")
    assert finding(answer, "overcurrent-disconnection")["verdict"] == "marginal"
    assert finding(answer, "protective-conductor-condition")["reason"] == "excess-unexplained"
    assert answer["verdict"] == "fail"


def test_a_higher_dead_sum_is_not_undone_by_a_live_reading_through_a_parallel_path() -> None:
    answer = judged(readings(zs=live(0.4), ze=0.3, dead=0.9))
    assert "higher-dead-sum" in assumptions(answer)
    assert finding(answer, "overcurrent-disconnection")["value"] == pytest.approx(0.3 + 1.2 * 0.9)


def test_a_point_below_its_origin_is_a_contradiction() -> None:
    answer = judged(readings(zs=live(0.18), ze=live(0.74)))
    assert answer["verdict"] == "undetermined"
    assert finding(answer, "overcurrent-disconnection")["reason"] == "loop-below-external"


def test_a_point_a_little_below_its_origin_is_measurement_uncertainty() -> None:
    assert judged(readings(zs=live(0.30), ze=live(0.33)))["verdict"] == "pass"


@pytest.mark.parametrize("name", ["zs", "ze", "dead"])
def test_a_resistance_below_what_an_instrument_shows_is_asked_about(name: str) -> None:
    read: Body = {"zs": live(0.6), "ze": 0.2, "dead": 0.4, name: 0.00055}
    if name != "zs":
        del read["zs"]
    assert judged(readings(**read))["verdict"] == "undetermined"


@pytest.mark.parametrize(
    ("reading", "verdict"),
    [
        (live(2000, bound="above"), "fail"),
        (live(0.5, bound="above"), "undetermined"),
        (live(0.05, bound="below"), "pass"),
        (live(2, bound="below"), "marginal"),
    ],
)
def test_a_bound_is_judged_on_the_side_that_it_leaves_open(reading: Body, verdict: str) -> None:
    assert judged(readings(zs=reading))["verdict"] == verdict


@pytest.mark.parametrize(
    ("read", "said"),
    [
        (readings(zs=live(0.6)), True),
        (readings(ze=0.2, dead=0.4), True),
        (readings(zs=live(0.6, **PRECISE), ze={"value": 0.2, **PRECISE}), False),
    ],
)
def test_a_default_uncertainty_is_said(read: Body, said: bool) -> None:
    assert ("instrument" in assumptions(judged(read))) == said


def test_a_default_uncertainty_of_an_electrode_is_said() -> None:
    answer = judged(readings(electrode=71, times={"1": 25}), earthing="TT", residual=RESIDUAL_30)
    assert "instrument" in assumptions(answer)


@pytest.mark.parametrize(
    ("read", "u"),
    [
        (readings(zs=live(1.0)), 0.05 + 0.03),
        (readings(zs=live(1.0, **PRECISE)), 0.03 + 0.03),
        (readings(ze=0.4, dead=0.6), ((0.02 + 0.03) ** 2 + (0.012 + 0.02) ** 2) ** 0.5),
    ],
    ids=["default", "stated", "sum"],
)
def test_uncertainty_by_method_and_instrument(read: Body, u: float) -> None:
    answer = judged(read, policy=COLD)
    assert loop_of(answer)["greatest"] == pytest.approx(1.0 + u, rel=1e-5)
    assert loop_of(answer)["least"] == pytest.approx(1.0 - u, rel=1e-5)


def test_the_part_heated_is_r1_r2_if_known_else_the_rest_beyond_ze_else_all() -> None:
    whole = judged(readings(zs=live(1.0)))
    rest = judged(readings(zs=live(1.0), ze=0.4))
    known = judged(readings(zs=live(1.0), ze=0.4, dead=0.58))
    values = [finding(answer, "overcurrent-disconnection")["value"] for answer in (whole, rest, known)]
    assert values == pytest.approx([1.2, 0.4 + 1.2 * 0.6, 1.0 + 0.2 * 0.58])


@pytest.mark.parametrize(
    ("read", "insulation", "factor"),
    [
        (readings(zs=live(0.6)), "pvc", 1.2),
        (readings(zs=live(0.6)), "xlpe", 1.28),
        (readings(zs=live(0.6, conductor_temperature_c=18)), "pvc", 1.2 / 0.992),
        (readings(zs=live(0.6, conductor_temperature_c=35)), "pvc", 1.2 / 1.06),
        (readings(ze=0.2, dead={"value": 0.4, "conductor_temperature_c": 5}), "pvc", 1.2 / 0.94),
    ],
)
def test_temperature_factor_from_test_to_service(read: Body, insulation: str, factor: float) -> None:
    answer = judged(read, line_conductor=copper(2.5, insulation))
    assert answer["quantities"]["temperature_factor"] == pytest.approx(factor, rel=1e-5)


def test_assumed_temperatures_are_said() -> None:
    assert {"test-temperature", "service-temperature"} <= assumptions(judged(readings(zs=live(0.6))))
    stated = judged(readings(zs=live(0.6, conductor_temperature_c=20)), line_conductor=copper(2.5))
    assert not {"test-temperature", "service-temperature"} & assumptions(stated)
