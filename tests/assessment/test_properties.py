"""What holds for every request, and the counter-examples of what only seems to."""

import copy
import json
import math
import re
from typing import Any

import numpy as np
from hypothesis import given, settings
from hypothesis import strategies as st

from faultloop import assess, assess_many
from faultloop.assessment.checks import CHECKS
from faultloop.assessment.codes import EARTHED, Earthing
from faultloop.assessment.points import from_rows
from faultloop.assessment.standing import Verdict
from faultloop.assessment.verdicts import decide
from faultloop.exchange.answers import Assessment
from faultloop.exchange.mapping import mapped
from faultloop.exchange.requests import AssessmentRequest
from tests.assessment import strategies as s
from tests.assessment.bodies import (
    Body,
    rank,
    said,
)

FORBIDDEN = re.compile(r"\b(safe|safely|certified|compliant|permitted|allowed to)\b", re.IGNORECASE)
NOT_A_NUMBER = re.compile(r"(?<![a-z])(nan|inf|None)(?![a-z])")
LINE_NEUTRAL_CHECK = "line-neutral-disconnection"

many = settings(max_examples=150, deadline=None, derandomize=True)


def numbers(value: Any) -> list[float]:
    """Every number in an answer."""
    if isinstance(value, bool):
        return []
    if isinstance(value, int | float):
        return [float(value)]
    inner = value.values() if isinstance(value, dict) else value if isinstance(value, list) else []
    return [number for part in inner for number in numbers(part)]


def encoded(answer: Body) -> str:
    """Text of an answer; refuses nan and inf."""
    return json.dumps(answer, sort_keys=True, allow_nan=False)


def bare(stated: Any) -> Body:
    """A reading as an object of its own."""
    return dict(stated) if isinstance(stated, dict) else {"value": stated}


def changed(body: Body, name: str, change: Any) -> Body:
    """The request with one reading changed."""
    other = copy.deepcopy(body)
    if name == s.TIMES:
        reading = bare(other["readings"][s.TIMES]["1"])
        other["readings"][s.TIMES]["1"] = change(reading)
    else:
        other["readings"][name] = change(bare(other["readings"][name]))
    return other


def raised(factor: float) -> Any:
    """A change that raises a reading's value."""
    return lambda reading: {**reading, "value": min(reading["value"] * factor, 1e7)}


def worst(answer: Body, *, without: tuple[str, ...] = ()) -> int:
    """Rank of the worst counted finding, some checks left out."""
    counted = [f for f in answer["findings"] if f["counts"] and f["check"] not in without]
    return min((rank(f["verdict"]) for f in counted), default=rank("pass"))


def rank_of(answer: Body, check: str) -> int:
    """Rank of one finding; what was not examined or does not apply counts as open."""
    found = [f["verdict"] for f in answer["findings"] if f["check"] == check]
    return rank(found[0]) if found else rank("undetermined")


@many
@given(s.requests)
def test_every_valid_request_gets_a_valid_answer_in_finite_numbers(body: Body) -> None:
    answer = assess(body)
    Assessment.model_validate(answer)
    encoded(answer)
    assert all(math.isfinite(number) for number in numbers(answer))
    texts = said(answer)
    assert not [text for text in texts if NOT_A_NUMBER.search(text)]
    assert not [text for text in texts if "{" in text or "@" in text]


@many
@given(s.requests)
def test_no_word_is_said_that_must_never_be(body: Body) -> None:
    assert not [text for text in said(assess(body)) if FORBIDDEN.search(text)]


@many
@given(s.requests)
def test_the_verdict_is_the_worst_counted_finding_of_one_counted_member_a_group(body: Body) -> None:
    answer = assess(body)
    assert rank(answer["verdict"]) == worst(answer)
    group = [f for f in answer["findings"] if f.get("group") == "fault-protection"]
    # A supply whose live parts are not earthed is not protected by clearing an earth fault.
    assert bool(group) == (body.get("supply", {}).get("earthing") not in ("IT", "separated"))
    best = {max(rank(f["verdict"]) for f in group)} if group else set()
    assert {rank(f["verdict"]) for f in group if f["counts"]} == best
    assert sum(f["counts"] for f in group) <= 1
    assert not [f for f in answer["findings"] if f["check"] == "barrier-failed-path" and f["counts"]]


@many
@given(s.requests)
def test_whatever_is_open_says_what_would_settle_it(body: Body) -> None:
    for found in assess(body)["findings"]:
        if found["verdict"] in ("undetermined", "marginal"):
            assert len(found["settled_by"]) > 20


@many
@given(s.requests)
def test_no_number_is_missing_from_a_sentence(body: Body) -> None:
    for found in assess(body)["findings"]:
        for told in (found["explanation"], found.get("settled_by", "")):
            assert not re.search(r"\b(nan|None)\b", told), found


@many
@given(s.requests)
def test_every_check_is_a_finding_or_listed_with_its_reason(body: Body) -> None:
    answer = assess(body)
    findings = [f["check"] for f in answer["findings"]]
    unexamined = [e["subject"] for e in answer["not_examined"] if e["reason"] not in ("out-of-scope", "not-used")]
    listed = findings + unexamined + [e["check"] for e in answer["not_applicable"]]
    assert len(listed) == len(set(listed))
    earthing = Earthing.codes()[body.get("supply", {}).get("earthing", "unknown").lower()]
    assert set(listed) == {check.id for check in CHECKS if check.supplies & ({earthing} | EARTHED)}
    assert all(e["reason"] and e["text"] for e in answer["not_examined"])
    assert all(e.get("settled_by") for e in answer["not_examined"] if e["reason"] not in ("out-of-scope", "not-used"))
    assert "overload" in {e["subject"] for e in answer["not_examined"]} or (
        "current_carrying_capacity_a" in body.get("circuit", {})
    )


@many
@given(s.requests)
def test_conditions_and_urgency_agree_with_the_verdict(body: Body) -> None:
    answer = assess(body)
    counted = [f["verdict"] for f in answer["findings"] if f["counts"]]
    assert bool(answer["conditions"]) == ("pass-with-conditions" in counted)
    assert all(c["text"] and c["owner"] for c in answer["conditions"])
    assert (answer["urgency"] == "none") == (answer["verdict"] == "pass")
    assert (answer["urgency"] == "note") == (answer["verdict"] == "pass-with-conditions")


@many
@given(s.requests)
def test_printed_numbers_have_six_significant_digits(body: Body) -> None:
    # The policy is the request's own, said back as it was asked.
    computed = {name: part for name, part in assess(body).items() if name != "policy"}
    assert all(number == float(f"{number:.6g}") for number in numbers(computed))


@settings(max_examples=60, deadline=None, derandomize=True)
@given(st.lists(s.requests, min_size=2, max_size=12))
def test_many_rows_equal_single_rows_to_the_last_bit(bodies: list[Body]) -> None:
    together = assess_many(bodies)
    assert [encoded(answer) for answer in together] == [encoded(assess(body)) for body in bodies]


@many
@given(s.requests)
def test_the_same_input_twice_gives_the_same_bytes(body: Body) -> None:
    before = copy.deepcopy(body)
    assert encoded(assess(body)) == encoded(assess(before))
    assert body == before


@many
@given(s.requests)
def test_simple_is_never_marginal(body: Body) -> None:
    answer = assess({**body, "policy": {**body.get("policy", {}), "decision": "simple"}})
    assert "marginal" not in {found["verdict"] for found in answer["findings"]}


@many
@given(s.judgeable(), st.floats(1.0, 20.0))
def test_a_higher_loop_never_improves_the_verdict(body: Body, factor: float) -> None:
    name = next((n for n in (s.LOOP, s.ELECTRODE) if n in body["readings"]), None)
    if name is None:
        return
    after = assess(changed(body, name, raised(factor)))
    assert rank(after["verdict"]) <= rank(assess(body)["verdict"])


@many
@given(s.judgeable(("TN-S", "TN-C-S")), st.floats(1.0, 20.0))
def test_a_higher_dead_resistance_never_improves_the_verdict(body: Body, factor: float) -> None:
    if s.DEAD not in body["readings"]:
        return
    after = assess(changed(body, s.DEAD, raised(factor)))
    assert rank(after["verdict"]) <= rank(assess(body)["verdict"])


@many
@given(s.judgeable(("TN-S", "TN-C-S")), st.floats(1.0, 20.0))
def test_a_higher_ze_beside_a_dead_test_never_improves_the_verdict(body: Body, factor: float) -> None:
    if s.DEAD not in body["readings"]:
        return
    after = assess(changed(body, s.EXTERNAL, raised(factor)))
    # Ze is also what a line-neutral reading is split by, so there it enters with the other sign.
    left_out = (LINE_NEUTRAL_CHECK,)
    assert worst(after, without=left_out) <= worst(assess(body), without=left_out)


@many
@given(s.judgeable(), st.floats(1.0, 50.0))
def test_a_longer_operating_time_never_improves_the_verdict(body: Body, factor: float) -> None:
    if s.TIMES not in body["readings"]:
        return
    after = assess(changed(body, s.TIMES, raised(factor)))
    assert rank(after["verdict"]) <= rank(assess(body)["verdict"])


@many
@given(s.judgeable(), st.sampled_from([10.0, 30.0, 100.0, 300.0, 500.0, 1000.0]))
def test_a_less_sensitive_device_never_improves_the_verdict(body: Body, rated: float) -> None:
    device = body.get("residual_current_device")
    if device is None or device["rated_residual_operating_current_ma"] >= rated:
        return
    after = copy.deepcopy(body)
    after["residual_current_device"]["rated_residual_operating_current_ma"] = rated
    assert rank(assess(after)["verdict"]) <= rank(assess(body)["verdict"])


UPSTREAM = "upstream_overcurrent_devices"


@many
@given(s.judgeable(), s.devices())
def test_a_device_upstream_never_worsens_and_its_removal_never_improves(body: Body, device: Body) -> None:
    more = {**body, UPSTREAM: [*body.get(UPSTREAM, []), device]}
    before, after = assess(body), assess(more)
    assert rank(after["verdict"]) >= rank(before["verdict"])
    for check in ("overcurrent-disconnection", LINE_NEUTRAL_CHECK, "breaking-capacity"):
        assert rank_of(after, check) >= rank_of(before, check)
    # Breaking capacity is not backed up by a device that merely stands there.
    assert rank_of(after, "breaking-capacity") == rank_of(before, "breaking-capacity")


@many
@given(s.judgeable(), s.devices(), s.devices())
def test_the_order_of_the_devices_upstream_is_no_matter(body: Body, first: Body, second: Body) -> None:
    one, other = (assess({**body, UPSTREAM: chain}) for chain in ([first, second], [second, first]))
    assert one["verdict"] == other["verdict"]
    assert one["urgency"] == other["urgency"]
    assert one["quantities"] == other["quantities"]


@many
@given(s.judgeable(), s.curves(), st.integers(0, 7))
def test_a_curve_with_fewer_points_never_improves_the_verdict(body: Body, curve: Body, left_out: int) -> None:
    points = {"greatest": curve["points"]["greatest"]}
    fewer = {"greatest": [point for at, point in enumerate(points["greatest"]) if at != left_out]}
    if not fewer["greatest"]:
        return
    after = assess({**body, "overcurrent_device": {**curve, "points": fewer}})
    before = assess({**body, "overcurrent_device": {**curve, "points": points}})
    # Without the point that shows a fail the time is open again, but never better than that.
    assert rank(after["verdict"]) <= max(rank(before["verdict"]), rank("undetermined"))


@many
@given(s.judgeable(), s.curves(), st.floats(1.0, 10.0))
def test_a_slower_curve_never_improves_the_verdict(body: Body, curve: Body, factor: float) -> None:
    greatest = curve["points"]["greatest"]
    slower = [{**point, "time_s": min(point["time_s"] * factor, 1e6)} for point in greatest]
    before, after = (
        assess({**body, "overcurrent_device": {**curve, "points": {"greatest": edge}}}) for edge in (greatest, slower)
    )
    assert rank(after["verdict"]) <= max(rank(before["verdict"]), rank("undetermined"))


@many
@given(s.judgeable(), st.floats(1.0, 5.0))
def test_a_wider_uncertainty_never_turns_anything_into_a_pass(body: Body, factor: float) -> None:
    before, wider = copy.deepcopy(body), copy.deepcopy(body)
    for name, stated in body["readings"].items():
        if name == s.TIMES:
            continue
        told = bare(stated)
        instrument = told.get("instrument", {"percent": 5.0, "digits": 3.0, "resolution": 0.01})
        # Leads off zero are held against the digits, so more digits excuse them: another property.
        instrument = {key: value for key, value in instrument.items() if key != "zero_check"}
        more = {key: min(instrument[key] * factor, 100.0) for key in ("percent", "digits")}
        before["readings"][name] = {**told, "instrument": instrument}
        wider["readings"][name] = {**told, "instrument": {**instrument, **more}}
    if assess(before)["verdict"] != "pass":
        assert assess(wider)["verdict"] != "pass"


REQUIRED_TN = [("circuit", "role"), ("supply", "earthing"), ("supply", "nominal_voltage_to_earth_v")]


@many
@given(s.judgeable(), st.sampled_from([*REQUIRED_TN, ("overcurrent_device",), ("readings", "loop")]))
def test_dropping_required_evidence_never_upgrades(body: Body, path: tuple[str, ...]) -> None:
    after = copy.deepcopy(body)
    if path == ("overcurrent_device",):
        if body["supply"]["earthing"] == "TT":
            return
        del after["overcurrent_device"]
    elif path == ("readings", "loop"):
        for name in (s.LOOP, s.DEAD, s.ELECTRODE):
            after["readings"].pop(name, None)
    else:
        del after[path[0]][path[1]]
    # What showed a fail may be what was dropped: then it is open again, but never better than that.
    assert rank(assess(after)["verdict"]) <= rank("undetermined")


@many
@given(s.judgeable())
def test_dropping_the_operating_time_never_upgrades(body: Body) -> None:
    if s.TIMES not in body["readings"]:
        return
    after = copy.deepcopy(body)
    del after["readings"][s.TIMES]
    first = assess(body)
    if any(f["check"] == "residual-device-test" and f["verdict"] == "fail" for f in first["findings"]):
        # A failed test of a device that nothing relies on is known only from the test itself.
        return
    if any(f["reason"] in ("calibration-lapsed", "leads-not-nulled", "time-implausible") for f in first["findings"]):
        # So is the instrument that took it, and a unit that cannot be.
        return
    assert rank(assess(after)["verdict"]) <= max(rank(first["verdict"]), rank("undetermined"))


@many
@given(s.requests)
def test_what_is_unknown_is_settled_before_it_is_compared(body: Body) -> None:
    outcome = decide(from_rows([mapped(AssessmentRequest.model_validate(body)).row]))
    found = outcome.findings
    assert not np.any(found.compared & (found.verdict == Verdict.UNDETERMINED))
