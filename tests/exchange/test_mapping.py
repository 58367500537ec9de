"""How the words of a request reach the engine, seen through its answers."""

import pytest

from faultloop import assess
from tests.assessment.bodies import (
    RESIDUAL_30,
    SELECTIVE_100,
    Body,
    copper,
    finding,
    fuse,
    judged,
    live,
    readings,
    request,
    verdict_of,
)


@pytest.mark.parametrize(
    ("device", "rules", "amperes"),
    [
        ("B32", "bs-7671", 160),
        ("C16", "bs-7671", 160),
        ("D10", "bs-7671", 200),
        (fuse(32), "iec-60364", 275),
        (fuse(32, "bs-88-2"), "bs-7671", 221),
        (fuse(32), "bs-7671", 221),
        (fuse(16), "iec-60364", 110),
        (fuse(16, "bs-88-2"), "bs-7671", 90),
    ],
)
def test_a_device_is_picked_with_the_current_that_its_rule_set_prints(
    device: Body | str, rules: str, amperes: float
) -> None:
    answer = judged(readings(zs=live(0.3)), device=device, rules=rules)
    factor = 0.95 if rules == "bs-7671" else 1.0
    limit = finding(answer, "overcurrent-disconnection")["limit"]
    assert limit == pytest.approx(factor * 230 / amperes, rel=1e-5)


def test_a_rated_current_left_out_is_that_of_the_device() -> None:
    read = readings(zs=live(0.1))
    assert judged(read, device="B40")["quantities"]["required_disconnection_time_s"] == 5
    assert judged(read, device="B40", rated_current_a=32)["quantities"]["required_disconnection_time_s"] == 0.4


def test_without_a_device_of_its_own_the_most_sensitive_one_in_front_carries_the_circuit() -> None:
    front = {"rated_residual_operating_current_ma": 300}
    body = request(readings(zs=live(86), times={"1": 410}), earthing="TT", upstream=[front, SELECTIVE_100])
    answer = assess(body)
    # 218.5 V / (2 x 0.1 A): the 100 mA S; the 300 mA device still sets the electrode's limit.
    assert finding(answer, "residual-disconnection")["limit"] == pytest.approx(1092.5, rel=1e-5)
    assert finding(answer, "earth-electrode")["limit"] == pytest.approx(50 / 0.3, rel=1e-5)


@pytest.mark.parametrize(
    ("residual", "told"),
    [
        (RESIDUAL_30, "30 mA A"),
        (SELECTIVE_100, "100 mA A S"),
        ({"rated_residual_operating_current_ma": 30}, "30 mA"),
    ],
)
def test_devices_are_named_in_trade_shorthand(residual: Body, told: str) -> None:
    answer = judged(readings(zs=live(0.6), times={"1": 140}), residual=residual)
    assert finding(answer, "residual-disconnection")["explanation"].startswith(f"{told}:")
    assert finding(answer, "overcurrent-disconnection")["explanation"].startswith("B32 ")


def test_a_fuse_is_named_with_its_system() -> None:
    answer = judged(readings(zs=live(0.3)), device=fuse(32, "bs-88-2"))
    assert finding(answer, "overcurrent-disconnection")["explanation"].startswith("BS 88-2 gG 32 ")


def test_a_ring_halves_twice_the_expected_resistance() -> None:
    # 80 m x 19.51 milliohm = 1.56; in the ring's middle a quarter of it, 0.39, with Ze 0.4 about 0.79.
    sizes = {"line_conductor": copper(2.5), "protective_conductor": copper(1.5), "length_m": 80}
    read = readings(zs=live(1.95), ze=0.4, times={"1": 25})
    radial = judged(read, residual=RESIDUAL_30, arrangement="radial", **sizes)
    ring = judged(read, residual=RESIDUAL_30, arrangement="ring", **sizes)
    assert (radial["verdict"], ring["verdict"]) == ("pass-with-conditions", "fail")


@pytest.mark.parametrize(
    ("rules", "edition"), [("bs-7671", "2018"), ("bs-7671:2008", "2008"), ("bs-7671:2011", "2011")]
)
def test_a_rule_set_without_edition_is_its_newest(rules: str, edition: str) -> None:
    answer = judged(readings(zs=live(0.6)), rules=rules)
    assert answer["provenance"]["rules"] == f"bs-7671:{edition}"


def test_a_conductor_of_no_standard_size_explains_nothing_by_length() -> None:
    sizes = {"line_conductor": copper(2.7), "protective_conductor": copper(1.5), "length_m": 60}
    answer = judged(readings(zs=live(1.6), ze=0.4, times={"1": 25}), residual=RESIDUAL_30, **sizes)
    assert answer["verdict"] == "undetermined"


def test_direct_current_is_not_judged_as_alternating() -> None:
    body = request(readings(zs=live(0.6)))
    body["supply"]["current"] = "dc"
    answer = assess(body)
    assert answer["verdict"] == "undetermined"
    assert verdict_of(answer, "line-neutral-disconnection") == "not-examined"
