"""Heating of the protective conductor over every current that can occur."""

from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from faultloop import assess
from tests.assessment.bodies import (
    RESIDUAL_30,
    Body,
    breaker,
    copper,
    finding,
    fuse,
    live,
    rank,
    readings,
    request,
    verdict_of,
)

CHECK = "protective-conductor-heating"


def heated(
    device: Any, line_mm2: float, protective_mm2: float, *, zs: float = 0.6, ze: float | None = 0.2, **more: Any
) -> Body:
    sizes = {"line_conductor": copper(line_mm2), "protective_conductor": copper(protective_mm2)}
    return assess(request(readings(zs=live(zs), ze=ze, **more.pop("read", {})), device=device, **sizes, **more))


def reason(answer: Body) -> str:
    return str(finding(answer, CHECK)["reason"])


@pytest.mark.parametrize(
    ("line_mm2", "least_mm2"),
    # IEC 60364-5-54 Table 54.2: the line conductor to 16 mm2, then 16 mm2, above 35 mm2 the half.
    [(1.5, 1.5), (16, 16), (25, 16), (35, 16), (50, 25), (120, 60)],
)
def test_the_table_of_sizes_is_enough_whatever_the_current(line_mm2: float, least_mm2: float) -> None:
    found = finding(heated("D20", line_mm2, least_mm2), CHECK)
    assert (found["verdict"], found["reason"], found["value"]) == ("pass", "size-table", least_mm2)
    assert reason(heated("D20", line_mm2, least_mm2 * 0.9)) != "size-table"


def test_of_another_metal_the_table_grows_by_the_ratio_of_the_factors() -> None:
    # k1/k2 = 115/76 for copper beside aluminium in PVC cables: 16 mm2 become 24.2 mm2.
    sizes = {"line_conductor": copper(16), "protective_conductor": copper(25, material="aluminium")}
    found = finding(assess(request(readings(zs=live(0.6)), device="D20", **sizes)), CHECK)
    assert found["value"] == pytest.approx(16 * 115 / 76, rel=1e-5)
    assert found["reason"] == "size-table"


# EN 60898-1 Annex ZA, class 3: A2s by characteristic and rating, to 3, 6 and 10 kA.
CLASS_3 = {
    "B16": (15_000, 35_000, 70_000),
    "B32": (18_000, 45_000, 90_000),
    "C16": (18_000, 42_000, 84_000),
    "C32": (22_000, 55_000, 110_000),
}


@pytest.mark.parametrize("column", [0, 1, 2])
@pytest.mark.parametrize("device", sorted(CLASS_3))
def test_energy_limiting_class_by_the_column_of_the_greatest_current(device: str, column: int) -> None:
    board = {"prospective_current_ka": (2.5, 5.5, 9.0)[column]}
    body = breaker(device, energy_limiting_class=3, breaking_capacity_ka=10)
    found = finding(heated(body, 6, 2.5, zs=0.3, ze=None, board=board), CHECK)
    assert found["value"] == pytest.approx(CLASS_3[device][column] ** 0.5 / 115, rel=1e-5)
    assert found["verdict"] == ("pass" if found["value"] <= 2.5 else "undetermined")


def test_class_not_stated_is_the_usual_combination_and_says_so() -> None:
    found = finding(heated("B32", 2.5, 1.5), CHECK)
    assert (found["verdict"], found["reason"]) == ("pass", "standard-combination")
    assert "not stated and taken as 3" in found["explanation"]


def test_a_device_marked_with_another_class_gets_no_credit() -> None:
    answer = heated(breaker("B32", energy_limiting_class=1), 2.5, 1.5)
    assert verdict_of(answer, CHECK) == "undetermined"


def test_a_device_without_a_class_needs_the_makers_energy() -> None:
    # No class limits characteristic D.  1.5 mm2 bear (115 x 1.5)^2 = 29 756 A2s.
    assert reason(heated("D20", 2.5, 1.5, zs=0.4)) == "let-through-missing"
    assert verdict_of(heated(breaker("D20", let_through_energy_a2s=29_700.0), 2.5, 1.5, zs=0.4), CHECK) == "pass"
    exceeded = heated(breaker("D20", let_through_energy_a2s=29_800.0), 2.5, 1.5, zs=0.4)
    assert (verdict_of(exceeded, CHECK), reason(exceeded)) == ("fail", "let-through-exceeds")


def test_the_makers_energy_goes_before_the_table_of_sizes() -> None:
    # 16 900 A2s need 130/115 = 1.13 mm2.
    answer = heated(breaker("B16", let_through_energy_a2s=16_900.0), 1.0, 1.0)
    assert finding(answer, CHECK)["value"] == pytest.approx(130 / 115, rel=1e-5)
    assert verdict_of(answer, CHECK) == "fail"


def test_a_fuse_is_bounded_by_its_last_tested_point() -> None:
    # gG 32 by IEC 60269-1: 350 A in 0.1 s, so 350 x sqrt(0.1)/115 = 0.962 mm2 once the current is beyond.
    found = finding(heated(fuse(32), 2.5, 1.0, zs=0.3), CHECK)
    assert found["value"] == pytest.approx(350 * 0.1**0.5 / 115, rel=1e-5)
    assert found["verdict"] == "pass"


def test_nothing_sure_to_act_within_five_seconds_is_too_slow_to_judge() -> None:
    answer = heated("B32", 2.5, 1.5, zs=1.9)
    assert (verdict_of(answer, CHECK), reason(answer)) == ("undetermined", "too-slow-to-judge")


def test_a_tested_residual_device_ends_the_heating_of_a_long_path() -> None:
    more = {"read": {"dead": 1.7, "times": {"1": 25}}, "residual": RESIDUAL_30}
    assert verdict_of(heated("B32", 2.5, 1.5, zs=1.9, **more), CHECK) == "pass"
    untested = {"read": {"dead": 1.7}, "residual": RESIDUAL_30}
    assert reason(heated("B32", 2.5, 1.5, zs=1.9, **untested)) == "too-slow-to-judge"


def test_sizes_not_stated_are_not_examined_and_cap_nothing() -> None:
    answer = assess(request(readings(zs=live(0.6), ze=0.2)))
    assert verdict_of(answer, CHECK) == "not-examined"
    assert answer["verdict"] == "pass"


def test_on_tt_it_does_not_apply() -> None:
    sizes = {"line_conductor": copper(2.5), "protective_conductor": copper(1.5)}
    answer = assess(request(readings(zs=live(60)), earthing="TT", **sizes))
    assert verdict_of(answer, CHECK) == "not-applicable"


DEVICES = st.sampled_from(["B16", "B32", "C20", "D16"]).map(breaker) | st.sampled_from([fuse(32), fuse(20, "bs-88-2")])


@given(
    device=DEVICES,
    areas=st.sampled_from([(1.5, 1.0), (2.5, 1.5), (4.0, 1.5), (6.0, 2.5)]),
    zs=st.floats(0.25, 4.0),
    more=st.floats(1.0, 3.0),
    capacity=st.sampled_from([3.0, 6.0, 10.0]),
)
def test_a_higher_loop_or_a_thinner_conductor_never_improves(
    device: Body, areas: tuple[float, float], zs: float, more: float, capacity: float
) -> None:
    device = {**device, "breaking_capacity_ka": capacity}
    line, protective = areas
    here = rank(verdict_of(heated(device, line, protective, zs=zs), CHECK))
    assert rank(verdict_of(heated(device, line, protective, zs=zs * more), CHECK)) <= here
    assert rank(verdict_of(heated(device, line, protective / more, zs=zs), CHECK)) <= here


def test_the_table_of_sizes_takes_a_suited_line_conductor_for_granted() -> None:
    # 1 mm2 behind B32 is no circuit: the table would ask for 1 mm2, the let-through energy for 1.17.
    assert reason(heated("B16", 1.0, 1.0)) == "size-table"
    assert reason(heated("B32", 1.0, 1.0)) == "let-through-missing"


def test_a_stated_current_at_the_board_is_not_outdone_by_a_loop() -> None:
    assert finding(heated("B32", 2.5, 1.5), CHECK)["verdict"] == "pass"
    stated = heated("B32", 2.5, 1.5, board={"prospective_current_ka": 20})
    assert finding(stated, CHECK)["verdict"] == "undetermined"


def test_the_greatest_current_is_taken_at_the_low_end_of_what_was_read() -> None:
    # Ze 0.09 with U = 0.0345 may be 0.0555: 1.1 x 230/0.0555 = 4.6 kA, in the column of 6 kA and not of 3 kA.
    found = finding(heated("B32", 6, 2.5, zs=0.3, ze=0.09), CHECK)
    assert found["value"] == pytest.approx(45_000**0.5 / 115, rel=1e-5)


def test_the_board_has_at_least_the_current_of_its_outlet() -> None:
    # A board loop of 0.2 gives 1.5 kA at most; 0.1 at the outlet, 0.065 at the least, gives 3.9 kA.
    found = finding(heated("B32", 6, 2.5, zs=0.1, ze=None, board={"earth_fault_loop_impedance_ohm": live(0.2)}), CHECK)
    assert found["value"] == pytest.approx(45_000**0.5 / 115, rel=1e-5)
