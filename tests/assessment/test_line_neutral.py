"""The line-neutral fault: measured, inferred, on TT added up; what counts where it is not cleared at once."""

import pytest

from tests.assessment.bodies import (
    RESIDUAL_30,
    Body,
    cautions,
    conditions,
    copper,
    finding,
    fuse,
    judged,
    live,
    readings,
    verdict_of,
)

CHECK = "line-neutral-disconnection"
SIZES = {"line_conductor": copper(2.5), "neutral_conductor": copper(2.5), "protective_conductor": copper(1.5)}


def test_not_measured_and_sizes_not_stated_is_not_examined_and_caps_nothing() -> None:
    answer = judged(readings(zs=live(0.6)))
    assert answer["verdict"] == "pass"
    entry = next(e for e in answer["not_examined"] if e["subject"] == CHECK)
    assert "line-neutral" in entry["settled_by"]


def test_measured_within_the_limit_passes_heating_only_the_part_of_the_installation() -> None:
    found = finding(judged(readings(zs=live(0.9), ze=0.21, z_ln=live(0.79))), CHECK)
    assert found["verdict"] == "pass"
    assert found["value"] == pytest.approx(0.21 + 1.2 * 0.58)


def test_inferred_from_the_earth_fault_loop_where_the_neutral_is_no_thinner() -> None:
    found = finding(judged(readings(zs=live(0.6)), **SIZES), CHECK)
    assert (found["verdict"], found["reason"]) == ("pass", "inferred-within-limit")
    assert "nferred" in found["explanation"]


def test_inferred_from_the_dead_sum_rather_than_from_a_higher_live_reading() -> None:
    # Dead: 0.25 + 1.2 x 0.85 = 1.27, +- 1.2 x 0.057, so at most 1.338 against 230/160 = 1.4375;
    # the live reading of 1.18 alone would reach 1.457.
    answer = judged(
        readings(zs=live(1.18), ze=0.25, dead=0.85, times={"1": 25}),
        device="C16",
        residual=RESIDUAL_30,
        rules="iec-60364",
        **SIZES,
    )
    assert verdict_of(answer, CHECK) == "pass"
    assert answer["verdict"] == "pass-with-conditions"


@pytest.mark.parametrize(
    "more",
    [
        pytest.param({"protective_conductor": copper(4)}, id="protective conductor larger"),
        pytest.param({"protective_conductor": copper(1.5, material="aluminium")}, id="another metal"),
        pytest.param(
            {
                "protective_conductor": copper(1.5, "bare", "steel"),
                "neutral_conductor": copper(2.5, "bare", "steel"),
            },
            id="steel path",
        ),
        pytest.param({"neutral_conductor": None}, id="neutral not stated"),
        pytest.param({"protective_conductor": None}, id="protective conductor not stated"),
        pytest.param({"earthing": "TT"}, id="TT"),
    ],
)
def test_nothing_is_inferred_otherwise(more: Body) -> None:
    assert verdict_of(judged(readings(zs=live(0.6)), **{**SIZES, **more}), CHECK) == "not-examined"


def test_an_inference_that_does_not_meet_the_limit_shows_nothing() -> None:
    read = readings(zs=live(1.6), ze=0.4, dead=1.2, times={"1": 25})
    answer = judged(read, residual=RESIDUAL_30, **SIZES)
    assert verdict_of(answer, CHECK) == "undetermined"
    assert "Measure the line-neutral loop" in finding(answer, CHECK)["settled_by"]


@pytest.mark.parametrize(("device", "verdict"), [("B16", "pass"), ("C32", "undetermined")])
def test_on_tt_the_origin_and_r1_r2_add_up(device: str, verdict: str) -> None:
    # 0.4 + 1.2 = 1.6 cold, 0.4 + 1.2 x 1.2 = 1.84 hot; limits 2.731 and 0.683.
    answer = judged(
        readings(electrode=60, dead=1.2, times={"1": 28}),
        earthing="TT",
        device=device,
        residual=RESIDUAL_30,
        board={"line_neutral_loop_impedance_ohm": 0.4},
    )
    assert finding(answer, CHECK)["value"] == pytest.approx(1.84)
    assert verdict_of(answer, CHECK) == answer["verdict"] == verdict


def test_on_tt_without_the_origin_it_is_not_examined() -> None:
    read = readings(electrode=60, dead=1.2, times={"1": 28})
    assert verdict_of(judged(read, earthing="TT", residual=RESIDUAL_30), CHECK) == "not-examined"


def on_a_fuse(area: float, z_ln: Body) -> Body:
    """A gG 32 by IEC 60269: 5 s from 150 A, 0.4 s from 275 A; limit 230/275 = 0.836 ohm."""
    device = fuse(32)
    return judged(readings(zs=live(0.3), z_ln=z_ln), device=device, rules="iec-60364", line_conductor=copper(area))


def test_a_conductor_that_bears_the_current_for_as_long_as_the_device_takes_passes() -> None:
    # 196 A for up to 5 s; (115 x 10 / 196)^2 = 34 s.
    found = finding(on_a_fuse(10, live(0.9)), CHECK)
    assert (found["verdict"], found["reason"]) == ("pass", "conductor-withstands")


def test_the_conductor_must_bear_every_current_of_the_interval() -> None:
    # Least 230/1.223 = 188 A, (460/188)^2 = 6.0 s, borne; greatest 253/0.999 = 253 A, 3.3 s, not borne for 5 s.
    exact = {"instrument": {"percent": 1, "digits": 0, "resolution": 0.01}}
    assert verdict_of(on_a_fuse(4, live(1.009, **exact)), CHECK) == "undetermined"


def test_rated_current_carrying_and_breaking_capacity_stated_are_conditional() -> None:
    device = {**_c32(), "breaking_capacity_ka": 6}
    board = {"prospective_current_ka": 1.5}
    read = readings(zs=live(0.5), z_ln=live(0.65))
    answer = judged(read, device=device, board=board, current_carrying_capacity_a=32)
    assert verdict_of(answer, CHECK) == answer["verdict"] == "pass-with-conditions"
    assert conditions(answer) == {"conductor-rating"}
    for missing in (
        {"board": None},
        {"current_carrying_capacity_a": None},
        {"device": _c32()},
        {"current_carrying_capacity_a": 27},
        {"board": {"prospective_current_ka": 8}},
    ):
        stated: Body = {"device": device, "board": board, "current_carrying_capacity_a": 32}
        assert verdict_of(judged(read, **{**stated, **missing}), CHECK) == "undetermined"


def _c32() -> Body:
    return {"kind": "miniature-circuit-breaker", "characteristic": "C", "rated_current_a": 32}


def test_not_cleared_at_once_asks_for_the_devices_time_at_the_current() -> None:
    # 218.5 / (1.2 x 0.65) = 280 A nominal; at the upper end 218.5 / (1.2 x 0.7125) = 255.6 A.
    answer = judged(readings(zs=live(0.5), z_ln=live(0.65)), device="C32", line_conductor=copper(2.5))
    found = finding(answer, CHECK)
    assert found["verdict"] == answer["verdict"] == "undetermined"
    assert "255.6 A" in found["settled_by"]
    assert "line-neutral-unseen" in cautions(answer)


def test_simple_decides_on_the_nominal_line_neutral_loop() -> None:
    # 1.32 hot against 1.3656, upper end 1.422.
    read = readings(zs=live(1.1), z_ln=live(1.1))
    assert verdict_of(judged(read, device="C16", policy={"decision": "simple"}), CHECK) == "pass"
    assert verdict_of(judged(read, device="C16"), CHECK) == "undetermined"


def test_the_greatest_short_circuit_current_is_the_cold_one() -> None:
    answer = judged(readings(zs=live(0.9), ze=0.21, z_ln=live(0.79)))
    current = answer["quantities"]["prospective_short_circuit_current_a"]
    assert current["greatest"] == pytest.approx(1.1 * 230 / (0.79 - 0.0695), rel=1e-5)


def test_the_residual_device_never_stands_for_the_line_neutral_fault() -> None:
    read = readings(zs=live(86), z_ln=live(1.9), times={"1": 25})
    answer = judged(read, device="C16", earthing="TT", residual=RESIDUAL_30)
    assert answer["verdict"] == "undetermined"
    assert "line-neutral-unseen" in cautions(answer)
