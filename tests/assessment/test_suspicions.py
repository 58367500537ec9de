"""Values over several points that look written rather than read."""

from typing import Any

import pytest

from faultloop.assessment.points import from_rows
from faultloop.assessment.suspicions import Suspicion, suspicions
from faultloop.exchange.mapping import mapped
from faultloop.exchange.requests import AssessmentRequest
from tests.assessment.bodies import live, readings, request


def found_in(*reads: dict[str, Any]) -> list[Suspicion]:
    points = from_rows([mapped(AssessmentRequest.model_validate(request(read))).row for read in reads])
    return suspicions(points.value, points.bound)


def summed(count: int, off: float = 0.0) -> list[dict[str, Any]]:
    dead = [round(0.2 + 0.07 * at, 2) for at in range(count)]
    return [readings(zs=live(round(0.21 + part + off, 2)), ze=0.21, dead=part) for part in dead]


@pytest.mark.parametrize(("count", "found"), [(4, False), (5, True), (9, True)])
def test_sums_that_are_exact_at_five_points_or_more_are_a_note(count: int, found: bool) -> None:
    told = found_in(*summed(count), readings(zs=live(0.9), ze=0.21, dead=0.6))
    assert [(s.reason, s.places) for s in told] == ([("sums-exact", tuple(range(count)))] if found else [])


def test_readings_that_scatter_raise_nothing() -> None:
    assert found_in(*summed(9, off=0.01)) == []


@pytest.mark.parametrize(("alike", "others", "found"), [(12, 3, True), (7, 0, False), (8, 9, False)])
def test_one_value_down_the_page_is_a_note(alike: int, others: int, found: bool) -> None:
    reads = [readings(zs=live(0.62))] * alike + [readings(zs=live(0.4 + 0.01 * at)) for at in range(others)]
    told = found_in(*reads)
    assert [(s.reason, s.places) for s in told] == ([("loops-alike", tuple(range(alike)))] if found else [])


def test_over_range_readings_are_no_values() -> None:
    assert found_in(*[readings(zs=live(20, bound="above"))] * 12) == []
