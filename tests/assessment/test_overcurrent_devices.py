"""Curves of the caller's own, overcurrent devices in series, and the families beside breakers B, C and D."""

import copy
from typing import Any

import pytest
from pydantic import ValidationError

from faultloop import assess, assess_many
from faultloop.assessment.texts import LANGUAGES
from faultloop.digests import json_bytes, sha256
from faultloop.exchange.render import assess_requests, request_bytes
from faultloop.exchange.requests import AssessmentRequest
from faultloop.protection.fuses import fuse_families
from faultloop.replay import replay
from tests.assessment.bodies import (
    RESIDUAL_30,
    Body,
    breaker,
    cautions,
    copper,
    finding,
    fuse,
    live,
    readings,
    request,
    said,
)

CHECK = "overcurrent-disconnection"
SOURCE = "data sheet 7, figure 2"


def edge(*greatest: tuple[Any, Any]) -> Body:
    """Points of a curve, whatever they are."""
    return {"points": {"greatest": [{"current_a": current, "time_s": time} for current, time in greatest]}}


def curve(*greatest: tuple[float, float], rated: float = 32.0, **more: Any) -> Body:
    """A curve of the caller's own."""
    return {"kind": "curve", "rated_current_a": rated, "source": SOURCE, **edge(*greatest), **more}


def answer(zs: float, device: Body | str, upstream: list[Body] | None = None, **more: Any) -> Body:
    """Answer for a loop read with 230 V behind a device, without heating or uncertainty in the decision."""
    policy = {"temperature": "none", "decision": "simple"}
    body = request(readings(zs=live(zs)), device=device, policy=policy, rules="iec-60364", **more)
    if upstream:
        body["upstream_overcurrent_devices"] = upstream
    return assess(body)


@pytest.mark.parametrize(("zs", "verdict"), [(230 / 161, "pass"), (230 / 159, "fail"), (230 / 310, "pass")])
def test_a_curve_is_held_at_its_points_and_never_between_them(zs: float, verdict: str) -> None:
    found = finding(answer(zs, curve((80.0, 5.0), (160.0, 0.4), (320.0, 0.1))), CHECK)
    assert found["verdict"] == verdict
    assert found["limit"] == 1.4375


def test_a_curve_without_a_point_in_time_promises_nothing() -> None:
    # Between 5 s at 80 A and 0.1 s at 320 A any line through the points would cross 0.4 s near 200 A.
    found = finding(answer(230 / 319, curve((80.0, 5.0), (320.0, 0.1))), CHECK)
    assert (found["verdict"], found["limit"]) == ("fail", 0.71875)
    found = finding(answer(0.3, curve((80.0, 5.0))), CHECK)
    assert (found["verdict"], found["reason"]) == ("undetermined", "no-guaranteed-current")


def test_a_curve_is_named_as_the_caller_s_own_with_a_caution() -> None:
    told = answer(1.0, curve((160.0, 0.4)))
    assert f"own curve 32 A (“{SOURCE}”)" in finding(told, CHECK)["explanation"]
    assert "own-curve" in cautions(told)
    assert "own-curve" in cautions(answer(1.0, "B32", [curve((160.0, 0.4))]))
    assert "own-curve" not in cautions(answer(1.0, "B32"))


def test_a_breaker_s_own_points_as_a_curve_give_the_breaker_s_verdict() -> None:
    own = curve((1.45 * 32, 3600.0), (2.55 * 32, 60.0), (160.0, 0.1))
    for zs in (0.5, 1.4, 1.45, 3.0):
        one, other = (finding(answer(zs, device), CHECK) for device in (own, breaker("B32")))
        assert (one["verdict"], one["limit"]) == (other["verdict"], other["limit"])


def test_curves_of_many_points_do_not_touch_each_other() -> None:
    quick, slow = curve((100.0, 0.1)), curve((200.0, 0.4), rated=63.0)
    plain = request(readings(zs=live(1.0)))
    bodies = [
        {**plain, "overcurrent_device": quick},
        plain,
        {**plain, "overcurrent_device": slow},
        {**plain, "upstream_overcurrent_devices": [slow, quick]},
        {
            **plain,
            "overcurrent_device": slow,
            "upstream_overcurrent_devices": [{"kind": "fuse", "fuse_system": "bs-3036", "rated_current_a": 60}],
        },
    ]
    assert [json_bytes(a) for a in assess_many(bodies)] == [json_bytes(assess(body)) for body in bodies]


@pytest.mark.parametrize(
    ("change", "pointer"),
    [
        (edge(), ("points", "greatest")),
        (edge((160, 0.4), (100, 0.1)), ("points", "greatest")),
        (edge((160, 0.4), (200, 0.4)), ("points", "greatest")),
        (edge(*[(100.0 + n, 100.0 - n) for n in range(65)]), ("points", "greatest")),
        (edge((160, 0.0)), ("points", "greatest", 0, "time_s")),
        (edge((-1, 1)), ("points", "greatest", 0, "current_a")),
        (edge(("160", 1)), ("points", "greatest", 0, "current_a")),
        (edge((float("nan"), 1)), ("points", "greatest", 0, "current_a")),
        ({"points": {"greatest": [{"current_a": 160}]}}, ("points", "greatest", 0, "time_s")),
        ({"points": {"greatest": [{"current_a": 160, "time_s": 1}], "fastest": []}}, ("points", "fastest")),
        (edge((5, 0.4)), ()),
        ({"points": {"greatest": [{"current_a": 100, "time_s": 1}], "least": [{"current_a": 150, "time_s": 2}]}}, ()),
        ({"source": ""}, ("source",)),
        ({"source": None}, ("source",)),
        ({"rated_current_a": 0}, ("rated_current_a",)),
    ],
)  # fmt: skip
def test_a_bad_curve_is_refused_at_its_field(change: Body, pointer: tuple[str | int, ...]) -> None:
    body = request(readings(zs=1.0), device={**curve((160.0, 0.4)), **change})
    with pytest.raises(ValidationError) as refusal:
        AssessmentRequest.model_validate(body)
    assert [error["loc"] for error in refusal.value.errors()] == [("overcurrent_device", "curve", *pointer)]


@pytest.mark.parametrize("missing", ["source", "points", "rated_current_a"])
def test_a_curve_without_source_points_or_rating_is_refused(missing: str) -> None:
    device = curve((160.0, 0.4))
    del device[missing]
    with pytest.raises(ValidationError, match="Field required"):
        AssessmentRequest.model_validate(request(readings(zs=1.0), device=device))


def test_a_stored_curve_replays_to_the_same_bytes_and_every_point_is_in_the_digest() -> None:
    body = request(readings(zs=live(1.0)), device=curve((160.0, 0.4)))
    body["upstream_overcurrent_devices"] = [curve((500.0, 0.3), rated=63.0), breaker("C63")]
    asked = AssessmentRequest.model_validate(body)
    stored, told = request_bytes(asked), json_bytes(assess(body))
    again = replay(stored, told, assess(body)["provenance"]["rules"], sha256(stored))
    assert again.identical, again.differences
    other = copy.deepcopy(body)
    other["upstream_overcurrent_devices"][0]["points"]["greatest"][0]["time_s"] = 0.2
    assert assess(other)["provenance"]["input_digest"] != sha256(stored)


def test_an_upstream_device_that_clears_in_time_counts_and_is_named() -> None:
    # C32 needs 320 A; B40 in front of it 200 A: limits 0.71875 and 1.15 ohm.
    alone, backed = answer(1.0, "C32"), answer(1.0, "C32", [breaker("B40")])
    assert finding(alone, CHECK)["verdict"] == "fail"
    found = finding(backed, CHECK)
    assert (found["verdict"], found["reason"], found["limit"]) == ("pass", "cleared-upstream", 1.15)
    assert "C32 itself is sure to operate within 0.4 s only from 320 A" in found["explanation"]
    assert "B40" in found["explanation"]
    assert "everything that it feeds goes off with this circuit" in found["explanation"]
    assert "upstream-cuts-off-more" in cautions(backed)


def test_the_circuit_s_own_device_decides_where_it_clears() -> None:
    backed = answer(0.5, "C32", [breaker("B40")])
    found = finding(backed, CHECK)
    assert (found["verdict"], found["reason"], found["limit"]) == ("pass", "within-limit", 0.71875)
    assert "upstream-cuts-off-more" not in cautions(backed)
    assert found == finding(answer(0.5, "C32"), CHECK)


def test_the_quickest_upstream_device_is_named_wherever_it_stands() -> None:
    chains = [[breaker("D63"), breaker("B40")], [breaker("B40"), breaker("D63")]]
    first, second = (finding(answer(1.0, "C32", chain), CHECK) for chain in chains)
    assert first == second
    assert "B40" in first["explanation"]
    assert "D63" not in first["explanation"]


def test_an_upstream_device_that_does_not_clear_changes_nothing() -> None:
    alone, backed = (finding(answer(1.0, "C32", chain), CHECK) for chain in (None, [breaker("D63")]))
    assert alone == backed


def test_an_upstream_limit_inside_the_uncertainty_is_open() -> None:
    body = request(readings(zs=live(1.15)), device="C32", rules="iec-60364", policy={"temperature": "none"})
    assert finding(assess(body), CHECK)["verdict"] == "fail"
    found = finding(assess({**body, "upstream_overcurrent_devices": [breaker("B40")]}), CHECK)
    assert (found["verdict"], found["reason"]) == ("undetermined", "upstream-inside-uncertainty")
    assert found["settled_by"]


def test_times_are_those_of_the_series() -> None:
    # With the loop hot and read low some 177 A flow: the C32 promises 60 s there, the B32 0.1 s from 160 A.
    alone, backed = (answer(1.0, "C32", chain)["quantities"] for chain in (None, [breaker("B32")]))
    assert alone["disconnection_time_s"]["greatest"] == 60
    assert backed["disconnection_time_s"]["greatest"] == 0.1
    assert backed["disconnection_time_s"]["by"] == "overcurrent-device"


def test_conductor_is_held_against_the_time_of_the_series() -> None:
    # 1.5 mm2 bears 230 A for (115 x 1.5 / 230)^2 = 0.56 s: not the 60 s of the C32, but the 0.1 s of the B32.
    read = readings(zs=live(0.9), z_ln=live(1.0))
    body = request(read, device="C32", rules="iec-60364", line_conductor=copper(1.5))
    check = "line-neutral-disconnection"
    assert finding(assess(body), check)["verdict"] == "undetermined"
    backed = finding(assess({**body, "upstream_overcurrent_devices": [breaker("B32")]}), check)
    assert (backed["verdict"], backed["reason"]) == ("pass", "conductor-withstands")
    assert "for as long as C32 with B32 upstream may take" in backed["explanation"]


def test_the_step_of_a_device_upstream_proves_nothing_that_its_time_does_not_show() -> None:
    # 0.75 mm2 bears 250 A for (115 x 0.75 / 400)^2 = 0.05 s: less than the 0.1 s of the B40.
    body = request(readings(zs=live(0.5), z_ln=live(0.5)), device="D63", rules="iec-60364", line_conductor=copper(0.75))
    backed = finding(assess({**body, "upstream_overcurrent_devices": [breaker("B40")]}), "line-neutral-disconnection")
    assert (backed["verdict"], backed["reason"]) == ("undetermined", "not-cleared-at-once")


def test_presence_upstream_is_no_documented_back_up_of_breaking_capacity() -> None:
    weak = breaker("B32", breaking_capacity_ka=6.0)
    strong = fuse(63, "bs-88-3") | {"breaking_capacity_ka": 33.0}
    board = {"prospective_current_ka": 10.0}
    alone, backed = (answer(0.5, weak, chain, board=board) for chain in (None, [strong]))
    assert finding(backed, "breaking-capacity") == finding(alone, "breaking-capacity")
    assert finding(backed, "breaking-capacity")["reason"] == "back-up-not-documented"


def test_what_is_stated_of_a_device_upstream_and_not_used_is_said() -> None:
    strong = fuse(63, "bs-88-2") | {"breaking_capacity_ka": 33.0}
    told = {entry["subject"] for entry in answer(0.5, "B32", [strong, strong])["not_examined"]}
    assert "upstream_overcurrent_devices.breaking_capacity_ka" in told


HEATING = "protective-conductor-heating"


def heated(device: Body | str, upstream: list[Body] | None = None, zs: float = 1.0, area: float = 1.5) -> Body:
    """Heating of a small protective conductor behind a larger line conductor."""
    sizes = {"line_conductor": copper(6.0), "protective_conductor": copper(area)}
    read = readings(zs=live(zs), ze=live(0.8))
    return finding(answer_of(read, device, upstream, **sizes), HEATING)


def answer_of(read: Body, device: Body | str, upstream: list[Body] | None, **more: Any) -> Body:
    """Answer with the default policy."""
    body = request(read, device=device, rules="iec-60364", **more)
    return assess({**body, "upstream_overcurrent_devices": upstream} if upstream else body)


def test_the_protective_conductor_is_held_against_the_time_of_the_series() -> None:
    # Up to 350 A flow (Ze read low): the own curve lets them flow for 3 s, the one upstream for 0.12 s; 1.5 mm2 of
    # copper bears 115^2 x 1.5^2 = 29756 A2s, which is 0.24 s of 350 A.
    slow, quick = curve((100.0, 3.0)), curve((150.0, 0.12), rated=63.0)
    alone, backed = heated(slow), heated(slow, [quick])
    assert (alone["verdict"], alone["reason"]) == ("undetermined", "time-too-long-by-band")
    assert (backed["verdict"], backed["reason"]) == ("pass", "within-limit")


def test_a_curve_gives_no_let_through_energy_unless_the_caller_states_it() -> None:
    quick = curve((100.0, 0.01))
    assert heated(quick)["reason"] == "let-through-missing"
    assert heated({**quick, "let_through_energy_a2s": 5000.0})["verdict"] == "pass"
    assert heated({**quick, "let_through_energy_a2s": 40_000.0})["reason"] == "let-through-exceeds"


def test_a_rewirable_fuse_earns_no_credit_of_a_cartridge() -> None:
    assert fuse_families()["bs-3036"].cartridge is False
    assert all(family.cartridge for system, family in fuse_families().items() if system != "bs-3036")


@pytest.mark.parametrize("language", LANGUAGES)
def test_devices_in_series_are_spoken_of_in_every_language(language: str) -> None:
    body = request(readings(zs=live(1.0)), device="C32", rules="iec-60364", policy={"temperature": "two-thirds"})
    body["upstream_overcurrent_devices"] = [curve((150.0, 0.3)), moulded_case(overload_current_a=100)]
    told = assess_requests([AssessmentRequest.model_validate(body)], languages=[language])[0]
    assert finding(told, CHECK)["reason"] == "cleared-upstream"
    assert f"own curve 32 A (“{SOURCE}”)" in finding(told, CHECK)["explanation"]
    assert {"own-curve", "settings-as-stated", "upstream-cuts-off-more"} <= cautions(told)
    assert not [text for text in said(told) if "{" in text or "@" in text]


def test_an_upstream_device_does_not_stand_in_for_an_unknown_one() -> None:
    body = request(readings(zs=live(0.3)), device=None)
    body["upstream_overcurrent_devices"] = [breaker("B32")]
    found = finding(assess(body), CHECK)
    assert (found["verdict"], found["reason"]) == ("undetermined", "device-missing")


@pytest.mark.parametrize(
    ("device", "limit"),
    [
        (breaker("K20"), 230 / 280),
        (breaker("Z10"), 230 / 30),
        (fuse(20, "bs-88-3"), 230 / 113),
        ({"kind": "fuse", "fuse_system": "bs-3036", "rated_current_a": 15}, 230 / 90),
        ({"kind": "fuse", "fuse_system": "bs-1362", "rated_current_a": 13}, 230 / 95),
    ],
)
def test_the_other_families_are_judged_at_their_currents(device: Body, limit: float) -> None:
    assert finding(answer(0.3, device), CHECK)["limit"] == pytest.approx(limit, rel=1e-5)
    assert not [text for text in said(answer(0.3, device)) if "{" in text]


def test_motor_fuses_are_refused_with_the_reason_and_a_way_out() -> None:
    device = {**fuse(50), "utilisation_category": "aM"}
    with pytest.raises(ValidationError, match=r"aM fuse-links are not held.*maker's points as a curve"):
        AssessmentRequest.model_validate(request(readings(zs=1.0), device=device))


def moulded_case(rated: float = 250.0, **settings: float) -> Body:
    """A moulded-case breaker."""
    return {"kind": "moulded-case-circuit-breaker", "rated_current_a": rated, "settings": settings}


def test_a_moulded_case_breaker_is_judged_at_its_settings() -> None:
    told = answer(0.095, moulded_case(overload_current_a=200, instantaneous_current_a=2000))
    found = finding(told, CHECK)
    # 230 V over 1.2 times 2000 A.
    assert (found["verdict"], found["limit"]) == ("pass", 0.0958333)
    assert "MCCB 250 A (Ir 200 A, Ii 2000 A)" in found["explanation"]
    assert "settings-as-stated" in cautions(told)


def test_the_time_setting_of_the_overload_release_earns_no_credit() -> None:
    told = answer(0.3, moulded_case(overload_current_a=200, overload_time_s=1))
    assert finding(told, CHECK)["reason"] == "no-guaranteed-current"
    assert "overcurrent_device.settings.overload_time_s" in {entry["subject"] for entry in told["not_examined"]}


@pytest.mark.parametrize(
    ("settings", "place"),
    [
        ({}, ("settings", "overload_current_a")),
        ({"overload_current_a": 200, "ir_a": 200}, ("settings", "ir_a")),
        ({"overload_current_a": 300}, ()),
        ({"overload_current_a": 200, "instantaneous_current_a": 10}, ()),
        ({"overload_current_a": 200, "short_time_current_a": 1000}, ()),
    ],
)
def test_bad_settings_are_refused_at_their_field(settings: Body, place: tuple[str, ...]) -> None:
    with pytest.raises(ValidationError) as refusal:
        AssessmentRequest.model_validate(request(readings(zs=1.0), device=moulded_case(**settings)))
    kind = "moulded-case-circuit-breaker"
    assert [error["loc"] for error in refusal.value.errors()] == [("overcurrent_device", kind, *place)]


def test_every_fuse_system_held_can_be_asked_for() -> None:
    schema = AssessmentRequest.model_json_schema()["$defs"]["Fuse"]["properties"]["fuse_system"]
    assert schema["enum"] == list(fuse_families())


@pytest.mark.parametrize(
    "device",
    [
        {"kind": "fuse", "fuse_system": "bs-3036", "rated_current_a": 32},
        {"kind": "fuse", "fuse_system": "bs-88-2", "utilisation_category": "gG", "rated_current_a": 12},
        {"kind": "miniature-circuit-breaker", "characteristic": "B", "rated_current_a": 0.5},
    ],
)
def test_a_rating_that_the_family_has_not_is_refused_with_those_it_has(device: Body) -> None:
    with pytest.raises(ValueError, match="no device has this rating; expected one of"):
        assess(request(readings(zs=live(0.6)), device=device))


def test_what_clears_upstream_is_not_left_to_the_residual_device() -> None:
    # D32 needs 640 A; 230/0.9 is 256 A, beyond the 80 A of the B16 in front.
    body = request(readings(zs=live(0.7), times={"1": 24}), device="D32", residual=RESIDUAL_30, rules="iec-60364")
    assert assess(body)["verdict"] != "pass"
    body["upstream_overcurrent_devices"] = [breaker("B16")]
    answer = assess(body)
    assert finding(answer, CHECK)["reason"] == "cleared-upstream"
    assert finding(answer, "residual-disconnection")["verdict"] == "pass"
    report = finding(answer, "barrier-failed-path")
    assert (report["verdict"], report["reason"]) == ("pass", "cleared-upstream")
    assert "everything rests on the residual device" not in report["explanation"]
