"""Worked cases of invented premises, finding by finding, on the checks and numbers that each lists."""

import json
from pathlib import Path
from typing import Any

import pytest

from faultloop import assess
from tests.assessment.bodies import Body, fault_protection, verdict_of

FILE = Path(__file__).parents[2] / "fixtures" / "cases.json"
CASES: list[Body] = json.loads(FILE.read_text(encoding="utf-8"))["cases"]

each = pytest.mark.parametrize("case", [pytest.param(case, id=case["id"]) for case in CASES])


def at(answer: Body, path: str) -> Any:
    """A number in an answer; findings are named by their check."""
    part: Any = {**answer, "findings": {f["check"]: f for f in answer["findings"]}}
    for step in path.split("/"):
        part = part[step]
    return part


@each
def test_each_listed_check_gets_its_word(case: Body) -> None:
    answer = assess(case["request"])
    told = {
        check: fault_protection(answer) if check == "fault-protection" else verdict_of(answer, check)
        for check in case["expected"]["checks"]
    }
    assert told == case["expected"]["checks"]


@each
def test_each_number_worked_by_hand_is_found(case: Body) -> None:
    answer = assess(case["request"])
    for value in case["values"]:
        assert at(answer, value["at"]) == pytest.approx(value["value"], rel=value["rel_tol"]), value["at"]


@pytest.mark.parametrize("case", [pytest.param(case, id=case["id"]) for case in CASES if "verdict" in case["expected"]])
def test_the_overall_words_where_all_required_evidence_is_given(case: Body) -> None:
    answer, expected = assess(case["request"]), case["expected"]
    assert answer["verdict"] == expected["verdict"]
    assert answer["urgency"] == expected.get("urgency", answer["urgency"])


def test_the_baseline_raises_no_caution_about_a_finding() -> None:
    answer = assess(CASES[0]["request"])
    assert not [found for found in answer["findings"] if "caution" in found]


def test_a_masked_joint_says_what_the_residual_device_hides() -> None:
    answer = assess(next(case["request"] for case in CASES if case["id"] == "case-05"))
    found = next(f for f in answer["findings"] if f["check"] == "residual-disconnection")
    assert found["value"] < found["limit"]
    assert "hides" in found["explanation"]
    cautions = {caution["caution"] for caution in answer["cautions"]}
    assert {"fault-path-unexplained", "residual-device-only", "line-neutral-unseen"} <= cautions
