"""Readings held against each other: what contradicts is asked about, what explains itself is a note."""

from typing import Any

import pytest

from faultloop import assess
from tests.assessment.bodies import (
    RESIDUAL_30,
    Body,
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

CHECK = "readings-agree"
SIZES = {"line_conductor": copper(2.5), "protective_conductor": copper(1.5)}


def agreed(read: Body, **more: Any) -> tuple[str, str]:
    found = finding(judged(read, **more), CHECK)
    return found["verdict"], found["reason"]


def test_one_reading_alone_has_nothing_to_agree_with() -> None:
    answer = judged(readings(zs=live(0.6)))
    assert verdict_of(answer, CHECK) == "not-examined"
    assert answer["verdict"] == "pass"


def test_case_01_agrees() -> None:
    # 0.18 + 0.55 = 0.73 against 0.74, U about 0.08.
    assert agreed(readings(zs=live(0.74), ze=0.18, dead=0.55)) == ("pass", "within-limit")


def test_the_whole_cannot_be_less_than_its_part() -> None:
    assert agreed(readings(zs=live(0.3), ze=0.8)) == ("undetermined", "loop-below-external")


@pytest.mark.parametrize("part", ["dead", "protective"])
def test_a_dead_test_above_the_live_loop_is_asked_about(part: str) -> None:
    read = readings(zs=live(0.6), **{part: 3.0})  # type: ignore[arg-type]
    assert agreed(read) == ("undetermined", "loop-below-its-part")
    assert judged(read)["verdict"] == "undetermined"


def test_leaving_out_the_external_loop_never_helps_a_dead_test_that_contradicts() -> None:
    with_external = judged(readings(zs=live(0.6), ze=0.2, dead=3.0))
    without = judged(readings(zs=live(0.6), dead=3.0))
    # 0.2 + 1.2 x 3.0 = 3.8 ohm decides with Ze; without it nobody knows how much is missing.
    assert with_external["verdict"] == "fail"
    assert without["verdict"] in ("undetermined", "fail")


def test_r2_above_r1_and_r2_is_asked_about() -> None:
    assert agreed(readings(ze=0.2, dead=0.5, protective=0.9)) == ("undetermined", "part-above-whole")


@pytest.mark.parametrize("name", ["dead", "protective"])
def test_a_dead_test_over_range_shows_a_break_that_bonding_hides(name: str) -> None:
    read = readings(zs=live(0.6), ze=0.2, **{name: {"value": 200, "bound": "above"}})  # type: ignore[arg-type]
    answer = judged(read, residual=RESIDUAL_30)
    assert finding(answer, "protective-conductor-condition")["reason"] == "open-when-dead"
    assert answer["verdict"] == "fail"
    on_tt = judged(readings(zs=live(60), **{name: {"value": 200, "bound": "above"}}), earthing="TT")  # type: ignore[arg-type]
    assert on_tt["verdict"] == "fail"


def test_a_loop_like_the_neutrals_below_its_parts_suspects_the_neutral_as_return() -> None:
    # 0.50 to earth and to neutral where Ze 0.2 and a dead 0.62 add up to 0.82; U is about 0.07.
    read = readings(zs=live(0.5), ze=0.2, z_ln=0.5, dead=0.62)
    assert agreed(read) == ("undetermined", "neutral-return-suspected")


def test_a_loop_below_its_parts_is_a_path_in_parallel_and_only_a_note() -> None:
    answer = judged(readings(zs=live(0.5), ze=0.2, dead=0.62))
    assert finding(answer, CHECK)["reason"] == "parallel-path"
    assert answer["verdict"] == "pass"
    assert "parallel-paths" in {c["caution"] for c in answer["cautions"]}


def test_what_a_no_trip_method_adds_is_a_note() -> None:
    answer = judged(readings(zs=no_trip(1.21), ze=0.2, dead=0.45), device="B16")
    assert finding(answer, CHECK)["reason"] == "no-trip-inflation"
    assert answer["verdict"] == "pass"


def test_a_loop_to_neutral_above_the_loop_to_earth_is_only_a_note() -> None:
    answer = judged(readings(zs=live(0.5), z_ln=0.9), device="B16")
    assert finding(answer, CHECK)["reason"] == "neutral-above-earth-loop"
    assert answer["verdict"] == "pass"


@pytest.mark.parametrize(
    ("voltage", "verdict"), [(231, "pass"), (251, "pass"), (110, "undetermined"), (270, "undetermined")]
)
def test_a_voltage_off_the_nominal_is_asked_about(voltage: float, verdict: str) -> None:
    # 230 V within 10 % is 207 to 253 V; 2 % for the voltmeter.
    assert agreed({**readings(zs=live(0.6)), "voltage_v": voltage})[0] == verdict


def instrument(**more: Any) -> Body:
    return {"percent": 5, "digits": 3, "resolution": 0.01, **more}


def test_leads_off_zero_by_more_than_the_digits_are_asked_about() -> None:
    # Nulled with other leads: joined leads show -0.08 ohm, and three digits are 0.03 ohm.
    assert agreed(readings(zs=live(0.6, instrument=instrument(zero_check=-0.08)))) == (
        "undetermined",
        "leads-not-nulled",
    )
    assert agreed(readings(zs=live(0.6, instrument=instrument(zero_check=-0.02))))[0] == "pass"


@pytest.mark.parametrize(
    ("taken_at", "verdict"),
    [
        ("2026-03-01", "pass"),
        ("2026-03-01T09:30:00Z", "pass"),
        ("2026-03-15", "pass-with-conditions"),
        (None, "pass-with-conditions"),
    ],
)
def test_a_calibration_that_lapsed_before_the_reading_is_a_condition(taken_at: str | None, verdict: str) -> None:
    dated = {} if taken_at is None else {"taken_at": taken_at}
    answer = judged(readings(zs=live(0.6, instrument=instrument(calibration_due="2026-03-01"), **dated)))
    assert answer["verdict"] == verdict
    assert ("instrument-checked" in conditions(answer)) == (verdict != "pass")


@pytest.mark.parametrize(
    ("value", "verdict", "reason"),
    [
        (2.0, "pass", "within-limit"),
        (18.0, "pass", "raised"),
        (35.0, "undetermined", "far-raised"),
        (50.5, "marginal", "limit-inside-uncertainty"),
        (60.0, "fail", "dangerous"),
        ({"value": 20, "bound": "above"}, "undetermined", "over-range"),
    ],
)
def test_voltage_between_neutral_and_earth(value: Any, verdict: str, reason: str) -> None:
    answer = judged({**readings(zs=live(0.6)), "voltage_neutral_to_earth_v": value})
    found = finding(answer, "neutral-earth-voltage")
    assert (found["verdict"], found["reason"]) == (verdict, reason)
    assert answer["verdict"] == verdict


# A dead test that is its own explanation


def masked(dead: float, **more: Any) -> Body:
    read = readings(zs=live(0.3 + dead), ze=0.3, dead=dead, times={"1": 24})
    return judged(read, device="B16", residual=RESIDUAL_30, **more)


def test_a_dead_test_beyond_its_length_is_a_defect_and_no_explanation() -> None:
    # 20 m of 2.5/1.5 mm2: 20 x (7.41 + 12.1)/1000 = 0.39 ohm, and 4.6 ohm were read.
    answer = masked(4.6, length_m=20, **SIZES)
    assert finding(answer, "protective-conductor-condition")["reason"] == "dead-test-unexplained"
    assert finding(answer, "residual-disconnection")["reason"] == "path-beyond-its-length"
    assert (answer["verdict"], answer["urgency"]) == ("fail", "urgent")
    # What nothing explains is taken to lie in the protective path: 5.52 of 5.82 ohm hot.
    assert finding(answer, "touch-voltage")["value"] == pytest.approx(230 * 1.2 * 4.6 / (0.3 + 1.2 * 4.6), rel=1e-5)


def test_without_a_length_the_dead_test_explains_a_long_path() -> None:
    answer = masked(3.0)
    assert answer["verdict"] == "pass-with-conditions"
    assert "residual-carries-path" in conditions(answer)


def test_a_little_more_than_the_length_gives_is_no_defect() -> None:
    # 0.70 read, 0.2 + 0.39 expected; contacts and temperature are allowed 0.05 ohm beside 10 % of the length.
    answer = judged(readings(zs=live(0.70), ze=0.2), device="B20", length_m=20, **SIZES)
    assert finding(answer, "protective-conductor-condition")["verdict"] == "pass"


def test_on_tn_s_the_external_loop_is_not_the_neutrals() -> None:
    # Ze 0.8, origin Z_LN 0.2, Z_LN 0.8: R1 = 0.3, so 0.8 + 0.6 = 1.4 is what is expected, and read.
    equal = {"line_conductor": copper(2.5), "protective_conductor": copper(2.5)}
    read = readings(zs=live(1.4), ze=0.8, z_ln=live(0.8))
    told = judged(read, device="B16", earthing="TN-S", board={"line_neutral_loop_impedance_ohm": 0.2}, **equal)
    assert finding(told, "protective-conductor-condition")["verdict"] == "pass"
    untold = judged(read, device="B16", earthing="TN-S", **equal)
    assert verdict_of(untold, "protective-conductor-condition") == "not-examined"


# Lost means of earthing


@pytest.mark.parametrize(("residual", "urgency"), [(None, "stop-use"), (RESIDUAL_30, "urgent")])
@pytest.mark.parametrize("lost", ["stated", "read"])
def test_a_lost_means_of_earthing_orders_work_by_the_whole_voltage(lost: str, residual: Any, urgency: str) -> None:
    body = request(readings(zs=live(0.6), ze=25 if lost == "read" else 0.2, times={"1": 24}), residual=residual)
    if lost == "stated":
        body["supply"]["means_of_earthing"] = {"evidence": "terminal hangs loose", "state": "lost"}
    answer = assess(body)
    assert answer["verdict"] == "fail"
    if lost == "stated":
        assert answer["urgency"] == urgency
    else:
        assert answer["urgency"] in ("stop-use", "urgent")
    assert "disconnection_time_s" not in answer["quantities"]
    assert "prospective_earth_fault_current_a" not in answer["quantities"]


# What is given is used, or said not to be


def test_a_residual_device_that_needs_more_than_its_rating_has_failed() -> None:
    read = {**readings(zs=live(0.6), ze=0.2, times={"1": 24}), "residual_operating_current_ma": 45}
    answer = judged(read, residual=RESIDUAL_30, feeds="socket-outlets", rated_current_a=32)
    assert finding(answer, "residual-device-test")["reason"] == "over-current"
    assert answer["verdict"] == "fail"


@pytest.mark.parametrize(
    ("part", "name", "value"),
    [
        ("readings", "standing_leakage_ma", 28),
        ("readings", "line_line_loop_impedance_ohm", 0.5),
        ("supply", "frequency_hz", 400),
    ],
)
def test_a_value_on_which_nothing_is_decided_is_named(part: str, name: str, value: float) -> None:
    body = request(readings(zs=live(0.6)))
    body[part] = {**body[part], name: value}
    entry = next(e for e in assess(body)["not_examined"] if e["subject"] == f"{part}.{name}")
    assert entry["reason"] == "not-used"


# Units that are probably wrong


@pytest.mark.parametrize(
    ("read", "check", "reason"),
    [
        ({"insulation_resistance_megohm": 500_000}, "insulation-resistance", "beyond-instruments"),
        ({"residual_operating_time_ms": {"1": 0.024}}, "residual-device-test", "time-implausible"),
        ({"residual_operating_time_ms": {"1": 24, "0.5": 1999}}, "residual-device-test", "half-unclear"),
    ],
)
def test_a_value_in_another_unit_is_asked_about(read: Body, check: str, reason: str) -> None:
    answer = judged({**readings(zs=live(0.6), ze=0.2), **read}, residual=RESIDUAL_30)
    found = finding(answer, check)
    assert (found["verdict"], found["reason"]) == ("undetermined", reason)
    assert found["settled_by"]


@pytest.mark.parametrize(
    ("to_earth", "between", "known"),
    [
        (230, 400, True),
        (230, None, True),
        (120, 240, True),
        (277, 480, True),
        (400, 690, True),
        (400, 400, False),
        (400, None, False),
        (230, 230, False),
    ],
)
def test_the_voltage_to_earth_must_belong_to_the_voltage_between_lines(
    to_earth: float, between: float | None, known: bool
) -> None:
    body = request(readings(zs=live(0.3)), device="B6", voltage=to_earth)
    if between is not None:
        body["supply"]["nominal_voltage_between_lines_v"] = between
    found = finding(assess(body), "overcurrent-disconnection")
    assert (found["reason"] == "nominal-voltage-unclear") == (not known)


@pytest.mark.parametrize("method", ["calculated", "declared", "dead"])
def test_a_loop_that_nobody_read_live_is_not_decided_on(method: str) -> None:
    answer = judged(readings(zs={"value": 0.5, "method": method}))
    assert answer["verdict"] == "undetermined"
    assert "loop-not-read-unused" in {a["assumption"] for a in answer["assumptions"]}


def test_a_no_trip_reading_fails_nothing_alone_under_a_flat_policy() -> None:
    # Limit 0.8 x 218.5/320 = 0.546; 0.90 - 0.14 - 0.5 is below it.
    answer = judged(readings(zs=no_trip(0.90)), device="C32", policy={"temperature": "four-fifths"})
    found = finding(answer, "overcurrent-disconnection")
    assert (found["verdict"], found["reason"]) == ("undetermined", "no-trip-undecided")
    beyond = judged(readings(zs=no_trip(1.9)), device="C32", policy={"temperature": "four-fifths"})
    assert finding(beyond, "overcurrent-disconnection")["verdict"] == "fail"


def test_a_rule_set_that_was_not_named_is_said() -> None:
    body = request(readings(zs=live(0.6)))
    del body["rules"]
    assert "rules" in {a["assumption"] for a in assess(body)["assumptions"]}
    assert "rules" not in {a["assumption"] for a in judged(readings(zs=live(0.6)))["assumptions"]}


# Prospective current at the board


@pytest.mark.parametrize(
    ("board", "reason"),
    [
        ({"prospective_current_ka": {"value": 20, "bound": "above"}}, "back-up-not-documented"),
        ({"prospective_current_ka": {"value": 4, "bound": "above"}}, "current-over-range"),
        (
            {"prospective_current_ka": {"value": 5.9, "instrument": {"percent": 20, "digits": 0, "resolution": 0.1}}},
            None,
        ),
        ({"prospective_current_ka": 3, "line_neutral_loop_impedance_ohm": 0.02}, None),
        ({"prospective_current_ka": 5.9}, "within-limit"),
    ],
)
def test_breaking_capacity_takes_a_stated_current_with_its_bound_and_instrument(
    board: Body, reason: str | None
) -> None:
    device = {
        "kind": "miniature-circuit-breaker",
        "characteristic": "B",
        "rated_current_a": 32.0,
        "breaking_capacity_ka": 6,
    }
    found = finding(judged(readings(zs=live(0.6)), device=device, board=board), "breaking-capacity")
    if reason is not None:
        assert found["reason"] == reason
    assert (found["verdict"] == "pass") == (reason == "within-limit")


def test_an_outlet_shows_the_least_that_its_board_can_have() -> None:
    rewirable = {"kind": "fuse", "fuse_system": "bs-3036", "rated_current_a": 30, "breaking_capacity_ka": 1}
    read = readings(zs=live(0.08), z_ln=live(0.07))
    beyond = judged(read, device=rewirable, board={"prospective_current_ka": 0.9})
    assert finding(beyond, "breaking-capacity")["reason"] == "outlet-current-over-capacity"
    device = {
        "kind": "miniature-circuit-breaker",
        "characteristic": "B",
        "rated_current_a": 32.0,
        "breaking_capacity_ka": 6,
    }
    for board in ({"prospective_current_ka": 0.9}, {"prospective_current_ka": 0}):
        told = finding(judged(read, device=device, board=board), "breaking-capacity")
        assert (told["verdict"], told["reason"]) == ("undetermined", "board-below-outlet")


def test_a_single_pole_device_sees_the_loop_to_earth_at_its_board() -> None:
    device = {
        "kind": "miniature-circuit-breaker",
        "characteristic": "B",
        "rated_current_a": 32.0,
        "breaking_capacity_ka": 6,
    }
    board = {"line_neutral_loop_impedance_ohm": live(0.1), "earth_fault_loop_impedance_ohm": live(0.03)}
    assert finding(judged(readings(zs=live(0.6)), device=device, board=board), "breaking-capacity")["verdict"] != "pass"


def test_a_standing_voltage_on_the_neutral_or_an_open_conductor_comes_first() -> None:
    standing = judged({**readings(zs=live(0.6)), "voltage_neutral_to_earth_v": 230})
    assert (standing["verdict"], standing["urgency"]) == ("fail", "stop-use")
    opened = judged(readings(zs=live(0.6), ze=0.2, dead={"value": 1999, "bound": "above"}))
    assert (opened["verdict"], opened["urgency"]) == ("fail", "stop-use")
    behind = judged(readings(zs=live(0.6), ze=0.2, dead={"value": 1999, "bound": "above"}), residual=RESIDUAL_30)
    assert behind["urgency"] == "urgent"


def test_the_time_that_the_rules_give_a_distribution_circuit_stops_no_use() -> None:
    answer = judged(
        {**readings(zs=live(0.4), ze=0.3), "insulation_resistance_megohm": 0.5},
        device={"kind": "fuse", "fuse_system": "bs-88-2", "utilisation_category": "gG", "rated_current_a": 63},
        role="distribution",
    )
    assert finding(answer, "overcurrent-disconnection")["verdict"] == "pass"
    assert (answer["verdict"], answer["urgency"]) == ("fail", "planned")


@pytest.mark.parametrize(("earthing", "hot"), [("TN-S", 1.2 * 1.2), ("TN-C-S", 0.8 + 1.2 * 0.4)])
def test_only_on_tn_c_s_is_the_external_loop_split_off_the_neutrals(earthing: str, hot: float) -> None:
    answer = judged(readings(zs=live(1.3), ze=0.8, z_ln=live(1.2)), device="B16", earthing=earthing)
    assert finding(answer, "line-neutral-disconnection")["value"] == pytest.approx(hot, rel=1e-5)


@pytest.mark.parametrize(
    ("board", "verdict", "reason"),
    [
        # 0.95 x 230 V / (1.2 x 0.044 ohm at the most) is over 4 kA at the outlet; the device breaks 3 kA alone.
        (
            {"prospective_current_ka": 9, "assembly_conditional_rating_ka": 10},
            "pass-with-conditions",
            "assembly-rating",
        ),
        ({"assembly_conditional_rating_ka": 10}, "undetermined", "current-missing"),
        ({"prospective_current_ka": 9}, "fail", "outlet-current-over-capacity"),
        ({"prospective_current_ka": 9, "assembly_conditional_rating_ka": 3.5}, "fail", "outlet-current-over-capacity"),
    ],
)
def test_a_rating_on_paper_stands_behind_an_outlet_beside_its_board(board: Body, verdict: str, reason: str) -> None:
    device = {
        "kind": "miniature-circuit-breaker",
        "characteristic": "B",
        "rated_current_a": 32.0,
        "breaking_capacity_ka": 3,
    }
    instrument_ = {"percent": 5, "digits": 2, "resolution": 0.001}
    read = readings(zs=live(0.04, instrument=instrument_), ze=0.03)
    found = finding(judged(read, device=device, board=board), "breaking-capacity")
    assert (found["verdict"], found["reason"]) == (verdict, reason)
