"""Urgency orders work by touch voltage, time, and what is left when the barrier fails."""

import pytest

from tests.assessment.bodies import RESIDUAL_30, SELECTIVE_100, Body, copper, finding, judged, live, no_trip, readings


def test_nothing_is_ordered_for_a_pass_and_a_note_for_conditions() -> None:
    assert judged(readings(zs=live(0.6)))["urgency"] == "none"
    conditional = judged(readings(zs=live(1.1), times={"1": 25}), residual=RESIDUAL_30)
    assert conditional["urgency"] == "note"


def test_no_earth_and_no_barrier_is_stop_use() -> None:
    answer = judged(readings(zs=live(2000, bound="above")))
    assert answer["urgency"] == "stop-use"
    # At most c_max = 1.1 times the nominal voltage.
    assert answer["quantities"]["touch_voltage_v"]["greatest"] == pytest.approx(253)


@pytest.mark.parametrize("dead", [0.2, 0.5])
def test_an_old_dead_test_does_not_quieten_a_lost_earth(dead: float) -> None:
    sizes = {"line_conductor": copper(2.5), "protective_conductor": copper(1.5)}
    answer = judged(readings(zs=live(2000, bound="above"), ze=0.19, dead=dead), device="C16", **sizes)
    assert answer["urgency"] == "stop-use"
    assert answer["quantities"]["touch_voltage_v"]["greatest"] == pytest.approx(253, rel=0.01)


def test_a_defect_behind_one_barrier_is_urgent() -> None:
    # With the residual device 0.2 A for 0.04 s, ratio 0.36; without it 0.2 A for over 3 s, ratio 3.1.
    read = readings(zs=no_trip(4.9), ze=0.21, dead=0.76, times={"1": 28})
    assert judged(read, residual=RESIDUAL_30)["urgency"] == "urgent"


def test_the_excess_of_a_bad_joint_counts_towards_the_touch_voltage() -> None:
    # By hand: R1 0.34 of the dead 0.55 by areas; the rest beyond Ze lies in the protective path: about 4.09 of 4.62.
    sizes = {"line_conductor": copper(2.5), "protective_conductor": copper(1.5)}
    read = readings(zs=no_trip(4.62), ze=0.19, dead=0.55, times={"1": 28})
    answer = judged(read, residual=RESIDUAL_30, **sizes)
    assert answer["urgency"] == "urgent"
    assert answer["quantities"]["touch_voltage_v"]["greatest"] > 190


def test_a_rule_not_met_otherwise_is_planned() -> None:
    answer = judged(readings(zs=live(0.6)), feeds="socket-outlets")
    assert (answer["verdict"], answer["urgency"]) == ("fail", "planned")


@pytest.mark.parametrize(
    ("feeds", "urgency"), [("socket-outlets", "planned"), ("mobile-equipment-outdoors", "stop-use")]
)
def test_outdoors_the_body_counts_with_650_ohm(feeds: str, urgency: str) -> None:
    # TT by a 100 mA S alone, up to 0.15 s: 230 mA / 0.2995 A = 0.77 dry; 354 mA: 1.18 wet.
    answer = judged(
        readings(zs=live(86), times={"1": 410}),
        earthing="TT",
        residual=SELECTIVE_100,
        feeds=feeds,
    )
    assert (answer["verdict"], answer["urgency"]) == ("fail", urgency)


@pytest.mark.parametrize(("protective", "urgency"), [(0.2, "urgent"), (0.04, "planned")])
def test_a_sustained_current_above_ten_milliampere_escalates_one_step(protective: float, urgency: str) -> None:
    # C32 at 180 A, 5.6 times its rating: over 3 s.  230 x 1.2 x 0.2 / 1.212 = 45.5 V, 45 mA, ratio 0.68; or 9.1 mA.
    answer = judged(readings(zs=live(1.01), protective=protective), device="C32")
    assert (answer["verdict"], answer["urgency"]) == ("fail", urgency)


def test_touch_voltage_is_the_share_of_the_protective_conductor() -> None:
    # 230 x 0.275 x F / (0.18 + F x 0.56), F = 1.2/0.992.
    read = readings(zs=live(0.74, conductor_temperature_c=18), ze=0.18, protective=0.275)
    answer = judged(read, device="B16")
    factor = 1.2 / 0.992
    path, loop = 0.275 * factor, 0.18 + factor * 0.56
    assert finding(answer, "touch-voltage")["value"] == pytest.approx(230 * path / loop, rel=1e-5)
    # At most: c_max, and the whole uncertainty of the hot loop in the protective path.
    u = ((factor * (0.05 * 0.74 + 0.03)) ** 2 + ((factor - 1) * (0.05 * 0.18 + 0.03)) ** 2) ** 0.5
    greatest = answer["quantities"]["touch_voltage_v"]["greatest"]
    assert greatest == pytest.approx(1.1 * 230 * (path + u) / (loop + u), rel=1e-4)


@pytest.mark.parametrize(
    "read", [readings(zs=live(0.6)), readings(zs=live(4.0)), readings(zs=live(1.1)), readings()], ids=str
)
def test_urgency_never_permits_anything(read: Body) -> None:
    answer = judged(read)
    assert (answer["urgency"] == "none") == (answer["verdict"] == "pass")
