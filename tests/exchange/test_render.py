"""The shape of answers: the published model, rounding, absence, order."""

import json

import pytest

from faultloop import assess_many
from faultloop.exchange.answers import Assessment
from tests.assessment.bodies import RESIDUAL_30, Body, judged, live, no_trip, readings, request

CHECKS = [
    "overcurrent-disconnection",
    "residual-disconnection",
    "barrier-failed-path",
    "touch-voltage",
    "protective-conductor-condition",
    "means-of-earthing",
    "earth-electrode",
    "additional-protection",
    "residual-device-test",
    "line-neutral-disconnection",
    "breaking-capacity",
    "polarity",
    "insulation-resistance",
]
BODIES = [
    request(readings(zs=live(0.6))),
    request(readings()),
    request(readings(zs=live(2000, bound="above"))),
    request(readings(zs=no_trip(0.3), times={"1": 25}), residual=RESIDUAL_30, feeds="socket-outlets"),
    request(readings(electrode=71, times={"1": 25}), residual=RESIDUAL_30, earthing="TT"),
]


@pytest.mark.parametrize("answer", assess_many(BODIES))
def test_an_answer_is_what_its_model_says_and_nothing_else(answer: Body) -> None:
    model = Assessment.model_validate_json(json.dumps(answer))
    assert json.loads(model.model_dump_json(exclude_unset=True)) == answer


@pytest.mark.parametrize("answer", assess_many(BODIES))
def test_findings_come_in_the_order_of_the_checks(answer: Body) -> None:
    told = [found["check"] for found in answer["findings"]]
    assert told == [check for check in CHECKS if check in told]


def test_numbers_are_rounded_once_to_six_digits() -> None:
    found = judged(readings(zs=live(1.0)))["findings"][0]
    # 0.95 x 230 / 160 = 1.365625; 1.2 x 1.08 = 1.296.
    assert (found["limit"], found["interval"]["greatest"]) == (1.36563, 1.296)


def test_decisions_are_made_before_rounding() -> None:
    # Hot at the upper end 1.2 x (1.05 z + 0.03); its limit 1.365625 prints as 1.36563.
    just_over = (1.365628 / 1.2 - 0.03) / 1.05
    found = judged(readings(zs=live(just_over)))["findings"][0]
    assert found["interval"]["greatest"] == found["limit"] == 1.36563
    assert found["verdict"] == "marginal"


def test_answers_come_in_the_order_of_the_requests() -> None:
    values = [0.3, 0.6, 0.9]
    answers = assess_many([request(readings(zs=live(value))) for value in values])
    assert [a["findings"][0]["value"] for a in answers] == pytest.approx([1.2 * v for v in values])
