"""Overload: the rating of the device against what the conductors carry."""

from typing import Any

import pytest

from faultloop import assess
from tests.assessment.bodies import finding, live, readings, request, verdict_of


def judged_with(capacity_a: float | None, **changes: Any) -> dict[str, Any]:
    circuit = {} if capacity_a is None else {"current_carrying_capacity_a": capacity_a}
    return assess(request(readings(zs=live(0.6), ze=0.2), **circuit, **changes))


def test_without_a_capacity_it_is_not_examined_and_caps_nothing() -> None:
    answer = judged_with(None)
    assert verdict_of(answer, "overload") == "not-examined"
    assert next(e for e in answer["not_examined"] if e["subject"] == "overload")["settled_by"]
    assert answer["verdict"] == "pass"


@pytest.mark.parametrize(("capacity_a", "verdict"), [(33.0, "pass"), (32.0, "pass"), (27.0, "fail")])
def test_rated_current_is_set_against_the_capacity(capacity_a: float, verdict: str) -> None:
    # IEC 60364-4-43, 433.1: In <= Iz.
    answer = judged_with(capacity_a, device="B32")
    found = finding(answer, "overload")
    assert (found["value"], found["limit"], found["verdict"]) == (32.0, capacity_a, verdict)
    assert answer["verdict"] == verdict
    assert answer["urgency"] == ("none" if verdict == "pass" else "planned")


def test_without_a_device_nothing_is_compared() -> None:
    answer = judged_with(20.0, device=None)
    assert verdict_of(answer, "overload") == "not-examined"


def test_what_a_rating_stands_for_is_held_against_the_capacity() -> None:
    # BS 7671 433.1.202 (memory): a rewirable fuse needs Iz of In / 0.725; a moulded-case breaker overloads at Ir.
    rewirable = {"kind": "fuse", "fuse_system": "bs-3036", "rated_current_a": 30}
    assert finding(judged_with(41.0, device=rewirable), "overload")["verdict"] == "fail"
    assert finding(judged_with(42.0, device=rewirable), "overload")["verdict"] == "pass"
    moulded = {
        "kind": "moulded-case-circuit-breaker",
        "rated_current_a": 100,
        "settings": {"overload_current_a": 80, "instantaneous_current_a": 400},
    }
    assert finding(judged_with(90.0, device=moulded), "overload")["verdict"] == "pass"


def test_a_ring_shares_its_load() -> None:
    answer = judged_with(20.0, device="B32", arrangement="ring")
    assert verdict_of(answer, "overload") == "not-examined"
